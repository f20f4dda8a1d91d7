import { BendbookError, type Fault } from '../../../shared/model/fault.ts';
import type { ColumnUse } from '../../../shared/model/recording.ts';
import type { ColumnNames } from '../../../shared/schema/api.ts';
import type { ByteSource } from '../byte-source.ts';
import { findDialect, splitLine } from './dialect.ts';
import { planColumns } from './plan.ts';
import { headLines } from './read.ts';

/** First look at a delimited file, for the user to check before it is analysed. */
export interface DelimitedPreview {
  /** What each column is taken for, in the order of `headers`. */
  readonly columns: ColumnUse[];
  readonly headers: string[];
  readonly rows: string[][];
  /** Why the columns cannot be told, or null when they can. */
  readonly fault: Fault | null;
}

const MAX_CELL = 200;

/** Columns, headers and the first `rowCount` rows of a delimited file under the names given by hand. */
export async function previewDelimited(
  source: ByteSource,
  columns: ColumnNames,
  rowCount: number,
): Promise<DelimitedPreview> {
  const { lines } = await headLines(source);
  const { delimiter, headerLine, headers } = findDialect(lines, columns);
  let fault: Fault | null = null;
  let uses: ColumnUse[] = headers.map((header) => ({ header, field: 'ignored', unit: '', guessed: false }));
  let first = headerLine + 1;
  try {
    const plan = planColumns(lines, columns, source.name);
    uses = [...plan.uses];
    first = plan.skipLines;
  } catch (error) {
    if (!(error instanceof BendbookError)) throw error;
    fault = error.fault;
  }
  const rows = lines
    .slice(first)
    .filter((line) => line.trim() !== '')
    .slice(0, rowCount)
    .map((line) => splitLine(line, delimiter).map((cell) => cell.trim().slice(0, MAX_CELL)));
  return { columns: uses, headers: headers.map((header) => header.slice(0, MAX_CELL)), rows, fault };
}
