import type { Finding } from '../../model/finding.ts';
import { BendbookError } from '../../model/fault.ts';
import type { CantEntry, CantRegister } from '../../schema/cant-register.ts';
import type { Unit } from '../../units.ts';
import { convert } from '../../units.ts';

type Field = Exclude<keyof CantEntry, 'line'>;

/** A column that was recognised: the field it feeds and the unit that it is written in. */
interface Column {
  readonly index: number;
  readonly field: Field;
  readonly unit: Unit | null;
}

/** Header words, lower case without signs, by field; the unit is split off first. */
const NAMES: Record<Field, readonly string[]> = {
  fromM: [
    'from',
    'start',
    'begin',
    'fromchainage',
    'chainagefrom',
    'startchainage',
    'chainagestart',
    'kmfrom',
    'fromkm',
    'startkm',
    'kmstart',
    'beginkm',
    'chainage',
    'km',
    'station',
    'fromstation',
    'startstation',
  ],
  toM: [
    'to',
    'end',
    'tochainage',
    'chainageto',
    'endchainage',
    'chainageend',
    'kmto',
    'tokm',
    'endkm',
    'kmend',
    'tostation',
    'endstation',
  ],
  fromLatDeg: ['fromlat', 'latfrom', 'startlat', 'latstart', 'fromlatitude', 'startlatitude', 'lat', 'latitude'],
  fromLonDeg: [
    'fromlon',
    'lonfrom',
    'startlon',
    'lonstart',
    'fromlongitude',
    'startlongitude',
    'lon',
    'lng',
    'longitude',
  ],
  toLatDeg: ['tolat', 'latto', 'endlat', 'latend', 'tolatitude', 'endlatitude'],
  toLonDeg: ['tolon', 'lonto', 'endlon', 'lonend', 'tolongitude', 'endlongitude'],
  curve: ['curve', 'curveno', 'curvenumber', 'curveid', 'no', 'number', 'nr'],
  cantMm: ['cant', 'actualcant', 'appliedcant', 'registeredcant', 'ea', 'elevation', 'actualelevation'],
  superelevationPct: ['superelevation', 'crossfall', 'banking', 'e'],
  note: ['note', 'notes', 'remark', 'remarks', 'comment'],
};

/** Units at the end of a header, longest first. */
const SUFFIXES: readonly [string, Unit][] = [
  ['pct', '%'],
  ['percent', '%'],
  ['%', '%'],
  ['mm', 'mm'],
  ['inches', 'in'],
  ['inch', 'in'],
  ['in', 'in'],
  ['km', 'km'],
  ['metres', 'm'],
  ['meters', 'm'],
  ['m', 'm'],
  ['feet', 'ft'],
  ['ft', 'ft'],
  ['miles', 'mi'],
  ['mi', 'mi'],
  ['deg', '°'],
];

const DEFAULT_UNIT: Partial<Record<Field, Unit>> = { fromM: 'm', toM: 'm', cantMm: 'mm', superelevationPct: '%' };
const TARGET_UNIT: Partial<Record<Field, Unit>> = DEFAULT_UNIT;

function plain(text: string): string {
  return text.toLowerCase().replace(/[^a-z0-9%]/g, '');
}

function fieldNamed(name: string): Field | null {
  for (const [field, names] of Object.entries(NAMES)) if (names.includes(name)) return field as Field;
  return null;
}

/** What a header stands for: its unit in brackets or as a suffix after a separator, then its name. */
function readHeader(header: string, index: number): Column | null {
  const words = header
    .trim()
    .toLowerCase()
    .split(/[\s_\-.()[\]/,]+/)
    .filter((w) => w !== '');
  const last = words[words.length - 1] ?? '';
  const unit = words.length > 1 ? (SUFFIXES.find(([suffix]) => suffix === last)?.[1] ?? null) : null;
  const whole = fieldNamed(plain(header));
  const stripped = unit === null ? null : fieldNamed(plain(words.slice(0, -1).join('')));
  // "from_km" is a name of its own and says its unit too; "cant_mm" is a name after its unit is taken off.
  const field = stripped ?? whole;
  if (field === null) return null;
  const kilometres = /(^km|km$)/.test(plain(header)) ? 'km' : null;
  const wanted = unit === '°' ? null : (unit ?? (field === 'fromM' || field === 'toM' ? kilometres : null));
  // A cant in percent is a superelevation, a superelevation in mm a cant.
  if (field === 'cantMm' && wanted === '%') return { index, field: 'superelevationPct', unit: '%' };
  if (field === 'superelevationPct' && (wanted === 'mm' || wanted === 'in'))
    return { index, field: 'cantMm', unit: wanted };
  return { index, field, unit: wanted ?? DEFAULT_UNIT[field] ?? null };
}

/** Cells of one line; quotes hold delimiters, doubled quotes a quote. */
function cellsOf(line: string, delimiter: string): string[] {
  const cells: string[] = [];
  let cell = '';
  let quoted = false;
  for (let i = 0; i < line.length; i++) {
    const c = line[i]!;
    if (quoted) {
      if (c !== '"') cell += c;
      else if (line[i + 1] === '"') {
        cell += c;
        i++;
      } else quoted = false;
    } else if (c === '"' && cell.trim() === '') {
      quoted = true;
      cell = '';
    } else if (c === delimiter) {
      cells.push(cell.trim());
      cell = '';
    } else cell += c;
  }
  cells.push(cell.trim());
  return cells;
}

function delimiterOf(header: string): string {
  const counts = ([';', '\t', ','] as const).map((d) => ({ d, n: header.split(d).length }));
  return counts.reduce((best, c) => (c.n > best.n ? c : best)).d;
}

/**
 * Number of a cell; decimal comma unless the comma separates cells; "12+345.6" is kilometres and metres, given in
 * metres.
 */
function numberOf(text: string, delimiter: string): { value: number; stationing: boolean } {
  const unified = delimiter === ',' ? text : text.replace(',', '.');
  const station = /^(\d+)\+(\d{1,3}(?:\.\d+)?)$/.exec(unified);
  if (station !== null) return { value: Number(station[1]) * 1000 + Number(station[2]), stationing: true };
  return { value: unified === '' ? NaN : Number(unified), stationing: false };
}

export interface ParsedRegister {
  readonly register: CantRegister;
  readonly findings: Finding[];
}

/**
 * A cant register from delimited text: comma, semicolon or tab; rows by chainage (`from_m`, `to_m`; also km, ft, mi
 * or 12+345),
 * by the positions of their ends (`from_lat`, `from_lon`, `to_lat`, `to_lon`), or by `curve` number; `cant_mm` (or
 * inches),
 * or `superelevation_pct` for roads; optional `note`. Lines that begin with # are comments.
 * Rows without a place or a value are left out and counted in a finding.
 * Errors: BendbookError cant/empty, cant/no-value-column, cant/no-place-column, cant/no-rows.
 */
export function parseCantRegister(text: string, options: { id: string; name: string; file?: string }): ParsedRegister {
  const file = options.file ?? options.name;
  const lines = text
    .replace(/^\uFEFF/, '')
    .split(/\r\n|\n|\r/)
    .map((content, i) => ({ content, line: i + 1 }))
    .filter(({ content }) => content.trim() !== '' && !content.trimStart().startsWith('#'));
  const head = lines[0];
  if (head === undefined) {
    throw new BendbookError('cant/empty', {
      cause: 'The cant register holds no lines',
      place: { file },
      remedy: 'Give a table with a header line, for example from_m,to_m,cant_mm.',
    });
  }
  const delimiter = delimiterOf(head.content);
  const headers = cellsOf(head.content, delimiter);
  const columns = headers.map(readHeader).filter((c) => c !== null);
  requireColumns(columns, headers, file, head.line);

  const entries: CantEntry[] = [];
  const bad: number[] = [];
  for (const { content, line } of lines.slice(1)) {
    const entry = entryOf(cellsOf(content, delimiter), columns, delimiter, line);
    if (entry === null) bad.push(line);
    else entries.push(entry);
  }
  if (entries.length === 0) {
    throw new BendbookError('cant/no-rows', {
      cause: 'No row of the cant register has both a place and a cant',
      place: { file, line: head.line },
      remedy: 'Check the numbers, the decimal sign and the separator of the rows.',
    });
  }
  const findings: Finding[] =
    bad.length === 0
      ? []
      : [
          {
            code: 'assess/cant-rows-unreadable',
            stage: 'assess',
            severity: 'warning',
            message: `${String(bad.length)} rows of the cant register have no readable place or cant and are left out`,
            count: bad.length,
            dropped: bad.length,
            places: bad.slice(0, 20).map((line) => ({ file, line })),
          },
        ];
  return { register: { id: options.id, name: options.name, offsetM: 0, stretch: 1, entries }, findings };
}

function requireColumns(columns: readonly Column[], headers: readonly string[], file: string, line: number): void {
  const has = (field: Field): boolean => columns.some((c) => c.field === field);
  const found = headers.map((h) => `"${h}"`).join(', ');
  if (!has('cantMm') && !has('superelevationPct')) {
    throw new BendbookError('cant/no-value-column', {
      cause: `No column of the cant register was recognised as a cant; the columns are ${found}`,
      place: { file, line },
      remedy: 'Name a column cant_mm (or cant_in), or superelevation_pct for roads.',
    });
  }
  if (!has('fromM') && !has('curve') && !(has('fromLatDeg') && has('fromLonDeg'))) {
    throw new BendbookError('cant/no-place-column', {
      cause: `No column of the cant register says where a cant holds; the columns are ${found}`,
      place: { file, line },
      remedy: 'Name columns from_m and to_m, or from_lat, from_lon, to_lat and to_lon, or curve.',
    });
  }
}

/** A row as an entry; null when place or value cannot be read. */
function entryOf(
  cells: readonly string[],
  columns: readonly Column[],
  delimiter: string,
  line: number,
): CantEntry | null {
  const values: Partial<Record<Exclude<Field, 'note'>, number>> = {};
  let note: string | undefined;
  for (const { index, field, unit } of columns) {
    const cell = cells[index] ?? '';
    if (cell === '') continue;
    if (field === 'note') {
      note = cell;
      continue;
    }
    const { value, stationing } = numberOf(cell, delimiter);
    if (!Number.isFinite(value)) return null;
    const target = TARGET_UNIT[field];
    values[field] = target === undefined || unit === null || stationing ? value : convert(value, unit, target);
  }
  const hasPlace =
    values.fromM !== undefined ||
    values.curve !== undefined ||
    (values.fromLatDeg !== undefined && values.fromLonDeg !== undefined);
  if (!hasPlace || (values.cantMm === undefined && values.superelevationPct === undefined)) return null;
  // A chainage range also names its curve when both are given; the range is the surer of the two against renumbering.
  if (values.fromM !== undefined && values.curve !== undefined) delete values.curve;
  if (values.curve !== undefined && !Number.isInteger(values.curve)) return null;
  return { line, ...values, ...(note === undefined ? {} : { note }) };
}
