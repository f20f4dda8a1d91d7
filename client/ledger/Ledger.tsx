import { useEffect, useMemo, useState } from 'preact/hooks';
import type { CurveColumn } from '../../shared/schema/curve-columns.ts';
import { app, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { keepColumns, keptColumns } from './columns.ts';
import { filterCurves, sortCurves } from './filter.ts';
import { LedgerTable } from './LedgerTable.tsx';
import { LedgerTools } from './LedgerTools.tsx';

/** The curve table, worst first: sorted, filtered, copied and exported from here. */
export function Ledger({ open }: { readonly open: OpenRun }) {
  const { mode } = open.ref;
  const filter = useSlice(app, (s) => s.filter);
  const sort = useSlice(app, (s) => s.sort);
  const [columns, setColumns] = useState(() => keptColumns(mode));
  useEffect(() => setColumns(keptColumns(mode)), [mode]);
  const rows = useMemo(() => sortCurves(filterCurves(open.curves, filter), sort), [open.curves, filter, sort]);
  const choose = (next: readonly CurveColumn[] | null) => {
    if (next?.length === 0) return;
    keepColumns(mode, next);
    setColumns(keptColumns(mode));
  };
  return (
    <section class="ledger" aria-label="Ledger">
      <LedgerTools open={open} rows={rows} columns={columns} onColumns={choose} />
      <LedgerTable rows={rows} columns={columns} />
    </section>
  );
}
