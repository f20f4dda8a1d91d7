import { stringify } from 'csv-stringify/sync';
import { curveColumns, roundRow } from '../../shared/schema/curve-columns.ts';
import type { ReportContext } from './context.ts';
import { spreadsheetText } from './spreadsheet-text.ts';

/**
 * The curve table as CSV (RFC 4180, CRLF, UTF-8): a header row with the column names, then one row
 * a curve. Unknown values are empty. A last column repeats the short caution in every row, since a
 * row that travels alone must still carry it.
 */
export function curveTableCsv(context: ReportContext): string {
  const header = [...curveColumns.map(({ key }) => key), 'caution'];
  const caution = context.cautions[0] ?? '';
  const rows = context.runs.flatMap((run) =>
    run.curves.map((curve) => {
      const row = roundRow(curve.row);
      return [...curveColumns.map(({ key }) => csvCell(row[key])), caution];
    }),
  );
  return stringify([header, ...rows], { record_delimiter: 'windows' });
}

function csvCell(value: string | number | null): string {
  if (value === null) return '';
  return typeof value === 'number' ? String(value) : spreadsheetText(value);
}
