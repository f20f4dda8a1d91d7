import writeExcelFile from 'write-excel-file/node';
import { curveColumns, roundRow } from '../../shared/schema/curve-columns.ts';
import type { ReportContext } from './context.ts';
import { methodLines } from './method.ts';
import { spreadsheetText } from './spreadsheet-text.ts';

interface Cell {
  value: string | number;
  type: typeof String | typeof Number;
  format?: string;
  fontWeight?: 'bold';
  backgroundColor?: string;
  wrap?: boolean;
  alignVertical?: 'top';
}

/** Fill of an exceedance; the verdict stands in words as well. */
const OVER_FILL = '#F7D9C9';
const HEAD_FILL = '#E8ECEF';

/**
 * The curve table as a workbook: a sheet of curves with typed cells, units in the headers and the
 * header row kept in view; a sheet of criteria with their working; a sheet of method and cautions.
 */
export async function curveTableXlsx(context: ReportContext): Promise<Buffer> {
  return await writeExcelFile([
    {
      data: curveSheet(context),
      sheet: 'Curves',
      stickyRowsCount: 1,
      columns: curveColumns.map(({ key }) => ({ width: key === 'notes' ? 60 : Math.max(10, key.length + 2) })),
    },
    {
      data: criteriaSheet(context),
      sheet: 'Criteria',
      stickyRowsCount: 1,
      columns: [14, 8, 26, 14, 12, 12, 12, 10, 12, 12, 90].map((width) => ({ width })),
    },
    {
      data: methodLines(context).map((line) => [{ ...text(line), wrap: true, alignVertical: 'top' as const }]),
      sheet: 'Method and cautions',
      columns: [{ width: 120 }],
    },
  ]).toBuffer();
}

function curveSheet(context: ReportContext): (Cell | null)[][] {
  const header = curveColumns.map(({ key, unit }) => head(unit === '' ? key : `${key} [${unit}]`));
  const rows = context.runs.flatMap((run) =>
    run.curves.map((curve) => {
      const row = roundRow(curve.row);
      return curveColumns.map(({ key, decimals }) => {
        const value = row[key];
        if (value === null) return null;
        const cell = typeof value === 'number' ? number(value, decimals ?? 3) : text(value);
        return key === 'verdict' && value === 'over' ? { ...cell, backgroundColor: OVER_FILL } : cell;
      });
    }),
  );
  return [header, ...rows];
}

function criteriaSheet(context: ReportContext): (Cell | null)[][] {
  const names = [
    'run',
    'curve',
    'criterion',
    'verdict',
    'value',
    'low',
    'high',
    'unit',
    'limit',
    'utilisation',
    'working',
  ];
  const rows = context.runs.flatMap((run) =>
    run.curves.flatMap(({ row, criteria }) =>
      criteria.map((c) => [
        text(row.run),
        number(row.curve, 0),
        text(c.criterion),
        text(c.verdict),
        optional(c.value),
        optional(c.low),
        optional(c.high),
        text(c.unit),
        optional(c.limit),
        optional(c.utilisation),
        text([...c.working, c.source, c.reason].filter((line) => line !== '').join(' | ')),
      ]),
    ),
  );
  return [names.map(head), ...rows];
}

function head(value: string): Cell {
  return { value, type: String, fontWeight: 'bold', backgroundColor: HEAD_FILL, wrap: true };
}

function text(value: string): Cell {
  // The longest text a cell can hold is 32,767 characters.
  return { value: spreadsheetText(value).slice(0, 32767), type: String };
}

function number(value: number, decimals: number): Cell {
  return { value, type: Number, format: decimals === 0 ? '0' : `0.${'0'.repeat(decimals)}` };
}

function optional(value: number | null): Cell | null {
  return value === null || !Number.isFinite(value) ? null : number(value, 3);
}
