import { parse } from 'csv-parse/sync';
import type { ColumnNames } from '../../../shared/schema/api.ts';
import { recogniseHeader } from './columns.ts';

export type Delimiter = ',' | ';' | '\t' | '|' | ' ';
const DELIMITERS: readonly Delimiter[] = [',', ';', '\t', '|'];
/** The header is looked for in this many lines, below a preamble. */
const HEADER_LINES = 80;

/** Cells of one line. Quotes are left to csv-parse; a line it cannot read is split as it stands. */
export function splitLine(line: string, delimiter: Delimiter): string[] {
  if (line.includes('"')) {
    try {
      const rows = parse(line, { delimiter, relax_column_count: true, relax_quotes: true });
      if (rows[0] !== undefined) return rows[0];
    } catch {
      // An unpaired quote: fall through.
    }
  }
  return delimiter === ' ' ? line.trim().split(/ +/) : line.split(delimiter);
}

export interface Dialect {
  readonly delimiter: Delimiter;
  /** 0-based index of the header among `lines`, or -1 when there is none. */
  readonly headerLine: number;
  readonly headers: readonly string[];
}

const clean = (cell: string) => cell.replaceAll('\0', '').trim();

/** True when `header` is one that the user named by hand. */
function isNamed(header: string, names: ReadonlySet<string>): boolean {
  return names.has(header.toLowerCase());
}

/**
 * Delimiter and header of a delimited text: the line and delimiter that give most columns of known
 * names, latitude and longitude (known or named by hand) among them. Without such a line, the delimiter
 * that cuts most lines into the same number of cells, and the first such line as header when its cells
 * are no numbers.
 */
export function findDialect(lines: readonly string[], columns: ColumnNames): Dialect {
  const names = new Set(Object.values(columns).map(({ header }) => header.trim().toLowerCase()));
  let best: Dialect | null = null;
  let bestScore = 0;
  for (const delimiter of [...DELIMITERS, ' '] as const) {
    for (let i = 0; i < Math.min(lines.length, HEADER_LINES); i++) {
      const line = lines[i]!;
      if (!line.includes(delimiter)) continue;
      const headers = splitLine(line, delimiter).map(clean);
      const fields = new Set<string>();
      let named = 0;
      for (const header of headers) {
        if (isNamed(header, names)) named++;
        const found = recogniseHeader(header);
        if (found !== null) fields.add(found.field);
      }
      const placed = fields.has('latDeg') && fields.has('lonDeg');
      const score = (placed ? 100 : 0) + 50 * named + fields.size;
      if ((placed || named > 0) && score > bestScore) {
        best = { delimiter, headerLine: i, headers };
        bestScore = score;
      }
    }
  }
  if (best !== null) return best;
  return withoutKnownNames(lines);
}

function withoutKnownNames(lines: readonly string[]): Dialect {
  let found: Dialect = { delimiter: ',', headerLine: -1, headers: [] };
  let bestScore = 0;
  for (const delimiter of DELIMITERS) {
    const widths = lines.map((line) => splitLine(line, delimiter).length);
    const counts = new Map<number, number>();
    for (const width of widths) if (width > 1) counts.set(width, (counts.get(width) ?? 0) + 1);
    for (const [width, count] of counts) {
      const score = count * Math.log2(width);
      if (score <= bestScore) continue;
      bestScore = score;
      const first = widths.indexOf(width);
      const cells = splitLine(lines[first]!, delimiter).map(clean);
      const isHeader = cells.every((cell) => cell === '' || !/^[+-]?[\d.,]+$/.test(cell));
      found = {
        delimiter,
        headerLine: isHeader ? first : -1,
        headers: isHeader ? cells : cells.map((_, i) => String(i + 1)),
      };
    }
  }
  return found;
}

/** True when most lines of a text fall into the same number (two or more) of cells. */
export function looksDelimited(text: string): boolean {
  const lines = text.split(/\r\n|\r|\n/).filter((line) => line.trim() !== '');
  // A long head may end inside a line: the last of many says little.
  const sample = lines.slice(0, Math.max(3, Math.min(400, lines.length - 1)));
  if (sample.length === 0) return false;
  const printable = text.slice(0, 4096).replace(/[\x20-\x7e\u00a0-\ufffc\t\r\n]/g, '').length;
  if (printable > 0.05 * Math.min(4096, text.length)) return false;
  return DELIMITERS.some((delimiter) => {
    const counts = new Map<number, number>();
    for (const line of sample) {
      const width = splitLine(line, delimiter).length;
      if (width > 1) counts.set(width, (counts.get(width) ?? 0) + 1);
    }
    return Math.max(0, ...counts.values()) >= 0.5 * sample.length;
  });
}
