import type { ColumnUse, Recording } from '../../../shared/model/recording.ts';
import { readHead, type ByteSource } from '../byte-source.ts';
import { decimal, readDecimal } from '../decimal.ts';
import { asciiCompatibleBytes, detectEncoding, ENCODING_NAMES, type TextNote } from '../encoding.ts';
import { counted, FindingLog } from '../finding-log.ts';
import { courseFromDegrees, FixBuilder, wrapLongitude, type FloatChannel } from '../fix-builder.ts';
import { lineBlocks } from '../line-blocks.ts';
import type { ReadContext } from '../options.ts';
import { angleFrom, parseAngle } from './angles.ts';
import { factorOf, unitFor } from './columns.ts';
import { changedFixes, selectFixes } from './held.ts';
import { planColumns, type Plan, type PlannedColumn } from './plan.ts';
import { RowSplitter } from './row-splitter.ts';
import { SensorBuilder } from './sensors.ts';
import { TimeReader, type RowCells } from './time-reader.ts';

const HEAD_BYTES = 1 << 17;
const [DOT, COMMA] = [46, 44];
const MAX_SEGMENTS = 10_000;

/** Words of receivers for their solution, to FixColumns.fixQuality. */
const QUALITY_WORDS: readonly (readonly [RegExp, number])[] = [
  [/^(none|no|no ?fix|invalid|v|false|insufficient.*|nan)$/i, 0],
  [/^(propagated|estimated|dead ?reckoning|dr|e)$/i, 3],
  [/^(narrow_int|wide_int|l1_int|ins_rtkfixed|rtk ?fix(ed)?|fixed|rtk|r)\d*$/i, 4],
  [/^(narrow_float|l1_float|iono_?free_float|ins_rtkfloat|float_?conv|rtk ?float|float|f)\d*$/i, 5],
  [/^(psrdiff|dgps|dgnss|sbas|waas|egnos|omnistar.*|diff(erential)?|d)$/i, 2],
  [/^(single|sps|gps|gnss|autonomous|2d|3d|a|valid|true|ok|pps|fix)$/i, 1],
];

/** A planned channel of the fixes with the way its cells are read, settled once and not for every cell. */
type Channel = PlannedColumn &
  (
    | { readonly kind: 'satellites' | 'fixQuality' }
    | { readonly kind: 'course' | 'positive' | 'signed'; readonly target: FloatChannel }
  );

function channelOf(planned: PlannedColumn): Channel | null {
  switch (planned.field) {
    case 'satellites':
    case 'fixQuality':
      return { ...planned, kind: planned.field };
    case 'courseRad':
      return { ...planned, kind: 'course', target: planned.field };
    case 'elevationM':
      return { ...planned, kind: 'signed', target: planned.field };
    case 'speedMps':
    case 'accuracyM':
    case 'hdop':
    case 'speedAccuracyMps':
    case 'courseAccuracyRad':
      return { ...planned, kind: 'positive', target: planned.field };
    default:
      return null;
  }
}

/** First lines of a delimited file, as text. The last may be cut and is left out of longer files. */
export async function headLines(source: ByteSource): Promise<{ lines: string[]; note: TextNote }> {
  const head = await readHead(source, HEAD_BYTES);
  const note: TextNote = { encoding: 'utf-8', replaced: 0 };
  const detected = detectEncoding(head);
  let text: string;
  if (detected !== 'utf-8') text = new TextDecoder(detected).decode(head);
  else {
    const parts: Buffer[] = [];
    for await (const part of asciiCompatibleBytes({ ...source, open: () => once(head) }, note)) {
      parts.push(Buffer.from(part));
    }
    text = new TextDecoder(note.encoding).decode(Buffer.concat(parts));
  }
  note.encoding = detected === 'utf-8' ? note.encoding : detected;
  const lines = text.replaceAll('\0', ' ').split(/\r\n|\r|\n/);
  if (head.length === HEAD_BYTES && lines.length > 1) lines.pop();
  return { lines, note };
}

// eslint-disable-next-line @typescript-eslint/require-await -- an async iterable by contract
async function* once(bytes: Uint8Array): AsyncGenerator<Uint8Array> {
  yield bytes;
}

/** Reads the rows of one delimited file as planned. */
class DelimitedReader {
  readonly fixes: FixBuilder;
  readonly sensors: SensorBuilder;
  readonly log = new FindingLog('ingest');
  readonly #plan: Plan;
  readonly #file: string;
  readonly #mark: number;
  readonly #time: TimeReader;
  readonly #sensorTime: TimeReader;
  readonly #channels: readonly Channel[];
  readonly #sensorValues: Float64Array;
  readonly #sensorColumns: readonly number[];
  readonly #segments = new Map<string, number>();
  readonly #qualities = new Map<string, number>();
  #lastSegment = '';
  #segment = 0;

  constructor(plan: Plan, file: string, maxFixes: number) {
    this.#plan = plan;
    this.#file = file;
    this.#mark = plan.decimalComma ? COMMA : DOT;
    this.fixes = new FixBuilder(file, maxFixes);
    this.sensors = new SensorBuilder(plan.channels);
    this.#sensorColumns = this.sensors.columns;
    this.#sensorValues = new Float64Array(this.#sensorColumns.length);
    this.#time = new TimeReader(plan.time, this.#mark);
    this.#sensorTime = plan.sensorTime === null ? this.#time : new TimeReader(plan.sensorTime, this.#mark);
    this.#channels = plan.channels.map(channelOf).filter((channel) => channel !== null);
  }

  /** The last cell that any quantity needs. */
  get lastCell(): number {
    const { time, sensorTime, channels, latitude, longitude, latHemisphere, lonHemisphere, segment } = this.#plan;
    const timeCells = [time, sensorTime].flatMap((form) =>
      form === null ? [] : form.kind === 'pair' ? [form.date, form.time] : [form.column],
    );
    const cells = channels.map(({ column }) => column);
    return Math.max(latitude, longitude, latHemisphere, lonHemisphere, segment, ...timeCells, ...cells);
  }

  get unzoned(): boolean {
    return this.#time.unzoned;
  }

  broken(line: number): void {
    this.log.note(
      'bad-row',
      'warning',
      (n) => `${counted(n, 'row')} that cannot be read left out`,
      { file: this.#file, line },
      1,
    );
  }

  row(row: RowCells, line: number): void {
    const plan = this.#plan;
    if (line <= plan.skipLines) return;
    const utcS = this.#time.read(row);
    const sensorRow = this.#readSensors(row, utcS);
    const lat = this.#angle(row, plan.latitude, plan.latHemisphere);
    const lon = wrapLongitude(this.#angle(row, plan.longitude, plan.lonHemisphere));
    if (!(lat >= -90 && lat <= 90) || Number.isNaN(lon)) {
      this.#withoutPosition(row, line, sensorRow, utcS);
      return;
    }
    if (Number.isNaN(utcS)) {
      this.log.note('bad-time', 'warning', (n) => `${counted(n, 'row')} with a time that cannot be read`, {
        file: this.#file,
        line,
      });
    }
    this.fixes.add(utcS, lat, lon, plan.segment < 0 ? 0 : this.#segmentOf(row), line);
    for (let i = 0; i < this.#channels.length; i++) this.#channel(row, this.#channels[i]!);
  }

  /** A row of a sensor alone is no loss; any other row without a position is counted. */
  #withoutPosition(row: RowCells, line: number, sensorRow: boolean, utcS: number): void {
    const { latitude, longitude } = this.#plan;
    const empty = (cell: number) => cell >= row.count || row.starts[cell] === row.ends[cell];
    if (sensorRow && empty(latitude) && empty(longitude)) return;
    if (Number.isNaN(utcS) && row.count <= Math.min(latitude, longitude)) {
      this.broken(line);
      return;
    }
    this.log.note(
      'bad-position',
      'warning',
      (n) => `${counted(n, 'row')} without a valid latitude and longitude left out`,
      { file: this.#file, line },
      1,
    );
  }

  #readSensors(row: RowCells, fixUtcS: number): boolean {
    const columns = this.#sensorColumns;
    if (columns.length === 0) return false;
    let any = false;
    for (let i = 0; i < columns.length; i++) {
      const cell = columns[i]!;
      const value = cell < row.count ? readDecimal(row.bytes, row.starts[cell]!, row.ends[cell]!, this.#mark) : NaN;
      this.#sensorValues[i] = value;
      if (!Number.isNaN(value)) any = true;
    }
    if (!any) return false;
    const utcS = this.#sensorTime === this.#time ? fixUtcS : this.#sensorTime.read(row);
    if (Number.isNaN(utcS)) return false;
    this.sensors.add(utcS, this.#sensorValues);
    return true;
  }

  #text(row: RowCells, cell: number): string {
    return cell < row.count ? row.bytes.toString('utf8', row.starts[cell], row.ends[cell]) : '';
  }

  #angle(row: RowCells, cell: number, hemisphereCell: number): number {
    if (cell >= row.count) return NaN;
    const start = row.starts[cell]!;
    const end = row.ends[cell]!;
    let value = readDecimal(row.bytes, start, end, this.#mark);
    if (Number.isNaN(value) && this.#mark === COMMA) value = readDecimal(row.bytes, start, end);
    if (Number.isNaN(value)) {
      if (start === end) return NaN;
      value = this.#spelledAngle(row, cell);
    } else value = angleFrom(value, this.#plan.angleForm);
    if (hemisphereCell >= 0 && hemisphereCell < row.count) {
      // S, W or their small letters.
      const letter = row.bytes[row.starts[hemisphereCell]!]! | 32;
      if ((letter === 115 || letter === 119) && row.ends[hemisphereCell]! > row.starts[hemisphereCell]!) {
        value = -Math.abs(value);
      }
    }
    return value;
  }

  /** A position with a hemisphere letter, degree signs, or both; minutes may be packed as ddmm.mmmm. */
  #spelledAngle(row: RowCells, cell: number): number {
    const bytes = row.bytes.subarray(row.starts[cell], row.ends[cell]);
    const utf8 = bytes.toString('utf8');
    const text = utf8.includes('\ufffd') ? new TextDecoder('windows-1252').decode(bytes) : utf8;
    const packed = /^([NSEW]?)\s*(\d{3,5}(?:\.\d+)?)\s*([NSEW]?)$/i.exec(text);
    if (packed !== null && this.#plan.angleForm !== 'degrees') {
      const letter = (packed[1] || packed[3] || '').toUpperCase();
      const value = angleFrom(Number(packed[2]), this.#plan.angleForm);
      return letter === 'S' || letter === 'W' ? -value : value;
    }
    return parseAngle(text);
  }

  #channel(row: RowCells, planned: Channel): void {
    const { column, kind } = planned;
    if (column >= row.count) return;
    const start = row.starts[column]!;
    const end = row.ends[column]!;
    if (start === end) return;
    if (kind === 'satellites') {
      // "11(11)" is used and in view: leading digits.
      let digitsEnd = start;
      while (digitsEnd < end && row.bytes[digitsEnd]! >= 48 && row.bytes[digitsEnd]! <= 57) digitsEnd++;
      const value = readDecimal(row.bytes, start, digitsEnd);
      if (value >= 0 && value < 255) this.fixes.setByte('satellites', value);
      return;
    }
    if (kind === 'fixQuality') {
      const quality = this.#quality(row.bytes.toString('latin1', start, end), planned);
      if (quality !== 255) this.fixes.setByte('fixQuality', quality);
      return;
    }
    if (!('target' in planned)) return;
    let value = readDecimal(row.bytes, start, end, this.#mark);
    if (Number.isNaN(value)) value = this.#withUnit(row, planned);
    else if (kind === 'course') value = courseFromDegrees(planned.unit === 'rad' ? (value * 180) / Math.PI : value);
    else value *= planned.factor;
    if (Number.isNaN(value)) return;
    if ((value < 0 && kind !== 'signed') || Math.abs(value) > 1e6) return;
    this.fixes.set(planned.target, value);
  }

  /** A number followed by its own unit, in SI. */
  #withUnit(row: RowCells, { column, field, factor, unit }: PlannedColumn): number {
    const match = /^([+-]?[\d.,]+)\s*([^\d\s.,].*)$/.exec(this.#text(row, column));
    if (match === null) return NaN;
    const value = decimal(this.#mark === COMMA ? match[1]!.replace(',', '.') : match[1]!);
    const own = unitFor(field, match[2]!);
    if (own === '') return NaN;
    if (field === 'courseRad') return courseFromDegrees(own === 'rad' ? (value * 180) / Math.PI : value);
    return value * (own === unit ? factor : factorOf(own));
  }

  #quality(text: string, { column }: PlannedColumn): number {
    const known = this.#qualities.get(text);
    if (known !== undefined) return known;
    let quality: number;
    const value = decimal(text);
    if (Number.isNaN(value)) quality = QUALITY_WORDS.find(([word]) => word.test(text))?.[1] ?? 255;
    else if (/quality/i.test(this.#plan.headers[column]!)) quality = [0, 1, 2, 1, 4, 5, 3, 1, 1][value] ?? 255;
    // Otherwise dimensions of the fix: 2 and 3 (1 is how some receivers write "no fix", others "fix").
    else quality = value === 0 ? 0 : value >= 1 && value <= 3 ? 1 : 255;
    if (this.#qualities.size < 1000) this.#qualities.set(text, quality);
    return quality;
  }

  #segmentOf(row: RowCells): number {
    const cell = this.#plan.segment;
    if (cell >= row.count) return this.#segment;
    const text = row.bytes.toString('latin1', row.starts[cell], row.ends[cell]);
    if (text === this.#lastSegment) return this.#segment;
    this.#lastSegment = text;
    let segment = this.#segments.get(text);
    if (segment === undefined) {
      segment = Math.min(this.#segments.size, MAX_SEGMENTS);
      if (this.#segments.size < MAX_SEGMENTS) this.#segments.set(text, segment);
    }
    this.#segment = segment;
    return segment;
  }
}

/**
 * Delimited text: delimiter, header, units, notations of position and time found from the first lines
 * (plan.ts), rows cut and converted straight from the bytes. Inertial channels go to `sensors`.
 * Throws what planColumns throws.
 */
export async function readDelimited(source: ByteSource, context: ReadContext): Promise<Recording> {
  const { lines, note } = await headLines(source);
  const plan = planColumns(lines, context.columns, source.name);
  const reader = new DelimitedReader(plan, source.name, context.maxFixes);
  const splitter = new RowSplitter(
    plan.delimiter,
    reader.lastCell,
    (row, line) => {
      reader.row(row, line);
    },
    (line) => {
      reader.broken(line);
    },
  );
  const streamNote: TextNote = { encoding: 'utf-8', replaced: 0 };
  for await (const block of lineBlocks(asciiCompatibleBytes(source, streamNote))) splitter.block(block);

  const { log } = reader;
  const uses: ColumnUse[] = [...plan.uses];
  const sensors = reader.sensors.finish(uses);
  let fixes = reader.fixes.columns();
  const kept = changedFixes(fixes);
  if (kept !== null) {
    const held = fixes.count - kept.length;
    fixes = selectFixes(fixes, kept);
    log.note(
      'held-positions',
      'info',
      (n) =>
        `${counted(n, 'row')} repeat the position of the row before (the receiver is slower than the log): only new positions count as fixes`,
      null,
      held,
      held,
    );
  }
  if (plan.swapped) {
    log.note('swapped', 'warning', () => 'Latitude and longitude are swapped under their headings: exchanged', {
      file: source.name,
      line: plan.skipLines,
    });
  }
  if (plan.time.kind === 'elapsed' || (plan.time.kind === 'pair' && plan.time.date < 0)) {
    log.note(
      'no-date',
      'warning',
      () => 'The times have no date: they count from an unknown day, shown as 1 January 1970',
      { file: source.name },
    );
  } else if (reader.unzoned) {
    log.note('no-zone', 'info', () => 'The times state no zone: they are taken as UTC', { file: source.name });
  }
  if (plan.orderUnsure) {
    log.note('date-order', 'warning', () => 'Day and month of the dates could be the other way round', {
      file: source.name,
    });
  }
  return {
    name: source.name,
    format: 'csv',
    bytes: source.bytes,
    encoding: ENCODING_NAMES[note.encoding],
    title: '',
    fixes,
    sensors,
    waypoints: [],
    columns: uses,
    findings: log.findings(),
  };
}
