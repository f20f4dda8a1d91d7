import { elementScroll, observeElementOffset, observeElementRect, Virtualizer } from '@tanstack/virtual-core';
import { useEffect, useMemo, useRef, useState } from 'preact/hooks';
import { curveColumns, roundRow, type CurveColumn } from '../../shared/schema/curve-columns.ts';
import type { AssessedCurve, CurveRow } from '../../shared/schema/curve-row.ts';
import { api } from '../api.ts';
import { criterionName, figure } from '../parts/text.ts';
import { Verdict } from '../parts/Verdict.tsx';
import { app, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { columnWidth, keepColumns, keptColumns } from './columns.ts';
import { filterCurves, NO_FILTER, sortCurves, type Filter, type Sort } from './filter.ts';

const ROW_PX = 30;
const VERDICTS: readonly CurveRow['verdict'][] = ['over', 'undecided', 'within', 'not assessed'];

/** The curve table, worst first: sorted, filtered, copied and exported from here. */
export function Ledger({ open }: { readonly open: OpenRun }) {
  const { mode } = open.ref;
  const [filter, setFilter] = useState<Filter>(NO_FILTER);
  const [sort, setSort] = useState<Sort>({ key: 'worst', descending: true });
  const [columns, setColumns] = useState(() => keptColumns(mode));
  const selected = useSlice(app, (s) => s.curve);
  useEffect(() => setColumns(keptColumns(mode)), [mode]);
  const rows = useMemo(() => sortCurves(filterCurves(open.curves, filter), sort), [open.curves, filter, sort]);
  const choose = (next: readonly CurveColumn[]) => {
    if (next.length === 0) return;
    keepColumns(mode, next);
    setColumns(next);
  };
  return (
    <section class="ledger" aria-label="Ledger">
      <LedgerTools
        open={open}
        filter={filter}
        onFilter={setFilter}
        shown={rows.length}
        columns={columns}
        onColumns={choose}
        rows={rows}
      />
      <LedgerTable rows={rows} columns={columns} sort={sort} onSort={setSort} selected={selected} />
    </section>
  );
}

function LedgerTools(props: {
  readonly open: OpenRun;
  readonly filter: Filter;
  readonly onFilter: (filter: Filter) => void;
  readonly shown: number;
  readonly rows: readonly AssessedCurve[];
  readonly columns: readonly CurveColumn[];
  readonly onColumns: (columns: readonly CurveColumn[]) => void;
}) {
  const { open, filter, onFilter, shown, rows, columns, onColumns } = props;
  const runId = open.detail.summary.id;
  const counts = new Map(VERDICTS.map((v) => [v, open.curves.filter(({ row }) => row.verdict === v).length]));
  const governing = [...new Set(open.curves.map(({ row }) => row.governing_criterion))].filter((c) => c !== null);
  const number = (text: string) => (text.trim() === '' || !Number.isFinite(Number(text)) ? null : Number(text));
  const files = [
    ['table.csv', 'Curve table, CSV'],
    ['table.xlsx', 'Curve table, XLSX'],
    ['table.json', 'Curve table, JSON'],
    ['table.geojson', 'Curves, GeoJSON'],
    ['profile.csv', 'Resampled run, CSV'],
    ['report.pdf', 'Report, PDF'],
    ['report.html', 'Report, HTML'],
  ] as const;
  return (
    <div class="ledger-tools">
      <strong>
        {shown === open.curves.length
          ? `${String(shown)} curves`
          : `${String(shown)} of ${String(open.curves.length)} curves`}
      </strong>
      <div class="row" role="group" aria-label="Verdicts shown">
        {VERDICTS.map((verdict) => {
          const on = filter.verdicts.includes(verdict);
          const next = on ? filter.verdicts.filter((v) => v !== verdict) : [...filter.verdicts, verdict];
          return (
            <button
              key={verdict}
              type="button"
              aria-pressed={on}
              onClick={() => onFilter({ ...filter, verdicts: next })}
            >
              <Verdict verdict={verdict} /> {counts.get(verdict)}
            </button>
          );
        })}
      </div>
      <label>
        <span class="sr">Governing criterion</span>
        <select value={filter.criterion} onChange={(e) => onFilter({ ...filter, criterion: e.currentTarget.value })}>
          <option value="">any criterion</option>
          {governing.map((c) => (
            <option key={c} value={c}>
              {criterionName(c)}
            </option>
          ))}
        </select>
      </label>
      <details class="menu">
        <summary>More filters</summary>
        <div>
          {(
            [
              ['radiusBelowM', 'Radius at most, m'],
              ['speedAboveKmh', 'Speed at least, km/h'],
              ['fromM', 'From chainage, m'],
              ['toM', 'To chainage, m'],
            ] as const
          ).map(([key, label]) => (
            <label key={key}>
              <span class="grow">{label}</span>
              <input
                type="number"
                class="num"
                value={filter[key] ?? ''}
                onInput={(e) => onFilter({ ...filter, [key]: number(e.currentTarget.value) })}
              />
            </label>
          ))}
          <button type="button" onClick={() => onFilter(NO_FILTER)}>
            Show all
          </button>
        </div>
      </details>
      <span class="grow" />
      <button type="button" onClick={() => void copyRows(rows, columns)}>
        Copy
      </button>
      <details class="menu">
        <summary>Columns</summary>
        <div>
          {curveColumns.map((column) => {
            const on = columns.some(({ key }) => key === column.key);
            const next = on
              ? columns.filter(({ key }) => key !== column.key)
              : curveColumns.filter(({ key }) => key === column.key || columns.some((c) => c.key === key));
            return (
              <label key={column.key}>
                <input type="checkbox" checked={on} onChange={() => onColumns(next)} />
                {column.label} <span class="quiet-text">{column.unit}</span>
              </label>
            );
          })}
        </div>
      </details>
      <details class="menu">
        <summary>Export</summary>
        <div>
          {files.map(([file, label]) => (
            <a key={file} href={api.exportUrl(runId, file)} download>
              {label}
            </a>
          ))}
        </div>
      </details>
    </div>
  );
}

function LedgerTable(props: {
  readonly rows: readonly AssessedCurve[];
  readonly columns: readonly CurveColumn[];
  readonly sort: Sort;
  readonly onSort: (sort: Sort) => void;
  readonly selected: number | null;
}) {
  const { rows, columns, sort, onSort, selected } = props;
  const scroll = useRef<HTMLDivElement>(null);
  const [, redraw] = useState(0);
  const virtual = useMemo(
    () =>
      new Virtualizer<HTMLDivElement, HTMLDivElement>({
        count: rows.length,
        getScrollElement: () => scroll.current,
        estimateSize: () => ROW_PX,
        overscan: 12,
        observeElementRect,
        observeElementOffset,
        scrollToFn: elementScroll,
        onChange: () => redraw((n) => n + 1),
      }),
    [],
  );
  virtual.setOptions({ ...virtual.options, count: rows.length });
  useEffect(() => virtual._didMount(), []);
  useEffect(() => virtual._willUpdate());
  useEffect(() => {
    const index = rows.findIndex(({ row }) => row.curve === selected);
    if (index >= 0) virtual.scrollToIndex(index, { align: 'auto' });
  }, [selected, rows]);
  const template = columns.map((c) => `${String(columnWidth(c))}px`).join(' ');
  const move = (event: KeyboardEvent) => {
    const step = { ArrowDown: 1, ArrowUp: -1, PageDown: 10, PageUp: -10 }[event.key];
    if (step === undefined || rows.length === 0) return;
    event.preventDefault();
    const now = rows.findIndex(({ row }) => row.curve === selected);
    const next = rows[Math.min(rows.length - 1, Math.max(0, now + step))];
    if (next !== undefined) app.set({ curve: next.row.curve });
  };
  const shown = rows.map(({ row }) => row);
  return (
    <div class="ledger-scroll" ref={scroll}>
      <div
        class="ledger-grid"
        role="grid"
        tabIndex={0}
        aria-label="Curves"
        aria-rowcount={rows.length + 1}
        aria-colcount={columns.length}
        onKeyDown={move}
      >
        <div class="ledger-row ledger-head" role="row" aria-rowindex={1} ref={(el) => setTemplate(el, template)}>
          {columns.map((column) => {
            const on = sort.key === column.key || (sort.key === 'worst' && column.key === 'utilisation');
            const direction = sort.descending ? 'descending' : 'ascending';
            return (
              <div
                key={column.key}
                role="columnheader"
                aria-sort={on ? direction : 'none'}
                class={column.decimals === null ? '' : 'num'}
              >
                <button
                  type="button"
                  title={`Sort by ${column.label}`}
                  onClick={() => onSort(nextSort(sort, column.key))}
                >
                  {column.label}
                  {column.unit === '' ? '' : ` ${column.unit}`}
                  {on ? (sort.descending ? ' ↓' : ' ↑') : ''}
                </button>
              </div>
            );
          })}
        </div>
        <div role="rowgroup" ref={(el) => setHeight(el, virtual.getTotalSize())}>
          {virtual.getVirtualItems().map((item) => {
            const curve = rows[item.index];
            if (curve === undefined) return null;
            const row = roundRow(curve.row);
            return (
              <div
                key={row.curve}
                class={`ledger-row ledger-body-row ${row.verdict.replace(' ', '-')}`}
                role="row"
                aria-rowindex={item.index + 2}
                aria-selected={row.curve === selected}
                ref={(el) => placeRow(el, template, 40 + item.start)}
                onClick={() => app.set({ curve: row.curve, tab: 'sheet' })}
              >
                {columns.map((column) => (
                  <Cell key={column.key} row={row} column={column} />
                ))}
              </div>
            );
          })}
        </div>
      </div>
      {shown.length === 0 && <p class="empty">No curve meets these filters.</p>}
    </div>
  );
}

function Cell({ row, column }: { readonly row: CurveRow; readonly column: CurveColumn }) {
  const { key, decimals } = column;
  const value = row[key];
  if (key === 'verdict')
    return (
      <div role="gridcell">
        <Verdict verdict={row.verdict} />
      </div>
    );
  if (key === 'governing_criterion') return <div role="gridcell">{criterionName(row.governing_criterion)}</div>;
  if (key === 'utilisation')
    return (
      <div role="gridcell">
        <Bar value={row.utilisation} verdict={row.verdict} />
      </div>
    );
  if (typeof value === 'number' || value === null)
    return (
      <div role="gridcell" class={decimals === null ? '' : 'num'}>
        {figure(value, decimals ?? 1)}
      </div>
    );
  return (
    <div role="gridcell" title={value}>
      {value}
    </div>
  );
}

/** Utilisation as number and bar; the mark is the limit, the bar ends at one and a half times it. */
function Bar({ value, verdict }: { readonly value: number | null; readonly verdict: string }) {
  const share = value === null ? 0 : Math.min(1, Math.max(0, value / 1.5));
  return (
    <span class={`bar ${verdict.replace(' ', '-')}`}>
      <span>{figure(value, 2)}</span>
      <i ref={(el) => el?.style.setProperty('width', `${String(share * 100)}%`)} />
      <b />
    </span>
  );
}

function nextSort(sort: Sort, key: keyof CurveRow): Sort {
  if (sort.key !== key) return { key, descending: key === 'utilisation' };
  if (sort.descending === (key === 'utilisation')) return { key, descending: !sort.descending };
  return { key: 'worst', descending: true };
}

// The content policy forbids style attributes in markup; styles set from here are allowed.
function setTemplate(el: HTMLElement | null, template: string): void {
  el?.style.setProperty('grid-template-columns', template);
}

function setHeight(el: HTMLElement | null, px: number): void {
  el?.style.setProperty('height', `${String(px)}px`);
}

function placeRow(el: HTMLElement | null, template: string, topPx: number): void {
  setTemplate(el, template);
  el?.style.setProperty('top', `${String(topPx)}px`);
}

/** Rows as a spreadsheet expects them: tabs between, headers with units first, a point as the decimal sign. */
async function copyRows(rows: readonly AssessedCurve[], columns: readonly CurveColumn[]): Promise<void> {
  const head = columns.map(({ key, unit }) => (unit === '' ? key : `${key} [${unit}]`)).join('\t');
  const body = rows.map((curve) => {
    const row = roundRow(curve.row);
    return columns.map(({ key }) => String(row[key] ?? '').replace(/[\t\r\n]+/g, ' ')).join('\t');
  });
  await navigator.clipboard.writeText([head, ...body].join('\n'));
}
