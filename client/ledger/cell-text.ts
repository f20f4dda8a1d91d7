import type { CurveColumn } from '../../shared/schema/curve-columns.ts';
import type { CurveRow } from '../../shared/schema/curve-row.ts';
import { criterionOf } from '../../shared/limits/criteria.ts';
import { criterionName, figure, quantity } from '../parts/text.ts';
import { inShown, shownUnit, type ShownUnits } from '../parts/units.ts';
import { isChainage } from './columns.ts';

/** Unit in the head of a column, as the reader chose it. */
export function headUnit({ key, unit }: CurveColumn, units: ShownUnits): string {
  return unit === '' ? '' : shownUnit(unit, units, isChainage(key));
}

/** One cell for people. `row` is rounded already, so that page and exports agree to the last digit. */
export function cellText(row: CurveRow, { key, unit, decimals }: CurveColumn, units: ShownUnits): string {
  const value = row[key];
  if (key === 'governing_criterion') return criterionName(row.governing_criterion);
  if (key === 'value' || key === 'limit') return criterionText(row, key, units);
  if (typeof value === 'string') return value;
  if (unit === '') return figure(value, decimals ?? 0);
  const shown = inShown(value, unit, decimals ?? 0, units, isChainage(key));
  return figure(shown.value, shown.decimals);
}

/** Value and limit stand in the unit of the criterion that governs. */
function criterionText(row: CurveRow, key: 'value' | 'limit', units: ShownUnits): string {
  const value = row[key];
  if (row.governing_criterion === null || value === null) return '–';
  const { unit, decimals } = criterionOf(row.governing_criterion);
  return quantity(value, unit, decimals, units).replaceAll('\u00a0', ' ');
}

/**
 * Rows as a spreadsheet expects them: tabs between, titles with units first, plain numbers with the decimal sign that
 * the reader's spreadsheet takes, nothing where nothing is known.
 */
export function tableText(
  rows: readonly CurveRow[],
  columns: readonly CurveColumn[],
  units: ShownUnits,
  decimalSign: '.' | ',',
): string {
  const head = columns.map((column) => {
    const unit = headUnit(column, units);
    return unit === '' ? column.label : `${column.label}, ${unit}`;
  });
  const lines = rows.map((row) => columns.map((column) => plainText(row, column, units, decimalSign)));
  return [head, ...lines].map((cells) => cells.join('\t')).join('\n');
}

function plainText(row: CurveRow, column: CurveColumn, units: ShownUnits, decimalSign: '.' | ','): string {
  const value = row[column.key];
  if (value === null) return '';
  if (typeof value === 'string') {
    const text = column.key === 'governing_criterion' ? criterionName(row.governing_criterion) : value;
    const line = text.replace(/[\t\r\n]+/g, ' ');
    // A text that begins like a formula must stay a text.
    return /^[=+\-@]/.test(line) ? `'${line}` : line;
  }
  const shown = inShown(value, column.unit, column.decimals ?? 0, units, isChainage(column.key));
  return shown.value!.toFixed(shown.decimals).replace('.', decimalSign);
}
