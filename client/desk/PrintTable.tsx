import { render } from 'preact';
import { roundRow } from '../../shared/schema/curve-columns.ts';
import { cellText, headUnit } from '../ledger/cell-text.ts';
import { keptColumns } from '../ledger/columns.ts';
import { filterCurves, sortCurves } from '../ledger/filter.ts';
import { clock } from '../parts/text.ts';
import { app, type AppState, type OpenRun } from '../state/app-state.ts';

/**
 * On paper the ledger is a plain table of all its rows, since the grid on the screen draws only those in sight, and
 * every criterion of a sheet lies open. Returns how to stop.
 */
export function preparePrinting(): () => void {
  const host = document.createElement('div');
  host.className = 'print-table';
  document.body.append(host);
  let closed: HTMLDetailsElement[] = [];
  const before = () => {
    const state = app.get();
    const { open, view, curve } = state;
    closed = [...document.querySelectorAll<HTMLDetailsElement>('.sheet details:not([open])')];
    for (const details of closed) details.open = true;
    if (view === 'desk' && open !== null && curve === null) render(<PrintTable open={open} state={state} />, host);
  };
  const after = () => {
    for (const details of closed) details.open = false;
    render(null, host);
  };
  addEventListener('beforeprint', before);
  addEventListener('afterprint', after);
  return () => {
    removeEventListener('beforeprint', before);
    removeEventListener('afterprint', after);
    host.remove();
  };
}

function PrintTable({ open, state }: { readonly open: OpenRun; readonly state: AppState }) {
  const { units, filter, sort } = state;
  const columns = keptColumns(open.ref.mode);
  const rows = sortCurves(filterCurves(open.curves, filter), sort).map(({ row }) => roundRow(row));
  const { summary } = open.detail;
  return (
    <>
      <h1>{summary.name}</h1>
      <p>
        {clock(summary.startUtcS)}. Judged by {open.setup.limits.name}, {open.ref.tier} values, with{' '}
        {open.setup.vehicle.name}. {rows.length} of {open.curves.length} curves.
      </p>
      <table class="plain figures">
        <thead>
          <tr>
            {columns.map((column) => (
              <th key={column.key} class={column.decimals === null ? '' : 'num'}>
                {column.label} {headUnit(column, units)}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => (
            <tr key={row.curve}>
              {columns.map((column) => (
                <td key={column.key} class={column.decimals === null ? '' : 'num'}>
                  {cellText(row, column, units)}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
      <ul>
        {open.cautions.map((caution) => (
          <li key={caution}>{caution}</li>
        ))}
      </ul>
    </>
  );
}
