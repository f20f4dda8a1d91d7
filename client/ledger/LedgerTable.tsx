import { elementScroll, observeElementOffset, observeElementRect, Virtualizer } from '@tanstack/virtual-core';
import { useEffect, useMemo, useRef, useState } from 'preact/hooks';
import { roundRow, type CurveColumn } from '../../shared/schema/curve-columns.ts';
import type { AssessedCurve, CurveRow } from '../../shared/schema/curve-row.ts';
import type { ShownUnits } from '../parts/units.ts';
import { Verdict } from '../parts/Verdict.tsx';
import { app, chooseCurve, cursor } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { cellText, headUnit } from './cell-text.ts';
import { columnWidth } from './columns.ts';
import { NO_FILTER, WORST_FIRST, type Sort } from './filter.ts';
import { UtilisationBar } from './UtilisationBar.tsx';

const ROW_PX = 32;
const HEAD_PX = 52;
const PAGE_ROWS = 10;
const ROW_PADDING_PX = 8;

/** Rows drawn only where they can be seen; one stop of the tab key, arrows from there. */
export function LedgerTable(props: {
  readonly rows: readonly AssessedCurve[];
  readonly columns: readonly CurveColumn[];
}) {
  const { rows, columns } = props;
  const selected = useSlice(app, (s) => s.curve);
  const units = useSlice(app, (s) => s.units);
  const scroll = useRef<HTMLDivElement>(null);
  const virtual = useVirtualRows(rows.length, scroll);
  const at = rows.findIndex(({ row }) => row.curve === selected);
  useEffect(() => {
    if (at >= 0) virtual.scrollToIndex(at, { align: 'auto' });
  }, [at]);
  const widths = columns.map(columnWidth);
  const template = `${widths.map((px) => `${String(px)}px`).join(' ')} minmax(0, 1fr)`;
  const widthPx = widths.reduce((sum, px) => sum + px, 0) + 2 * ROW_PADDING_PX;
  return (
    <div
      class="ledger-scroll"
      ref={(el) => {
        scroll.current = el;
        setStyle(el, '--ledger-width', `${String(widthPx)}px`);
      }}
      role="grid"
      tabIndex={0}
      aria-label="Curves"
      aria-rowcount={rows.length + 1}
      aria-colcount={columns.length}
      aria-activedescendant={at >= 0 ? rowId(selected!) : undefined}
      onKeyDown={(event) => moveByKey(event, rows, at)}
      onPointerLeave={() => cursor.set({ m: null })}
    >
      <Head columns={columns} units={units} template={template} />
      <div
        role="rowgroup"
        class="ledger-body"
        ref={(el) => setStyle(el, 'height', `${String(virtual.getTotalSize())}px`)}
      >
        {virtual.getVirtualItems().map(({ index, start }) => {
          const curve = rows[index];
          if (curve === undefined) return null;
          return (
            <Row
              key={curve.row.curve}
              row={curve.row}
              index={index}
              columns={columns}
              units={units}
              template={template}
              topPx={start}
              isSelected={curve.row.curve === selected}
            />
          );
        })}
        <CursorMark />
      </div>
      {rows.length === 0 && (
        <div role="row" class="ledger-empty">
          <div role="gridcell">
            No curve meets these filters.{' '}
            <button type="button" onClick={() => app.set({ filter: NO_FILTER })}>
              Show all curves
            </button>
          </div>
        </div>
      )}
    </div>
  );
}

function useVirtualRows(count: number, scroll: { current: HTMLDivElement | null }) {
  const [, redraw] = useState(0);
  const virtual = useMemo(
    () =>
      new Virtualizer<HTMLDivElement, HTMLDivElement>({
        count,
        getScrollElement: () => scroll.current,
        estimateSize: () => ROW_PX,
        overscan: 10,
        scrollPaddingStart: HEAD_PX,
        observeElementRect,
        observeElementOffset,
        scrollToFn: elementScroll,
        onChange: () => redraw((n) => n + 1),
      }),
    [],
  );
  virtual.setOptions({ ...virtual.options, count });
  useEffect(() => virtual._didMount(), []);
  useEffect(() => virtual._willUpdate());
  return virtual;
}

function Head(props: {
  readonly columns: readonly CurveColumn[];
  readonly units: ShownUnits;
  readonly template: string;
}) {
  const { columns, units, template } = props;
  const sort = useSlice(app, (s) => s.sort);
  const sortKey = sort.key === 'worst' ? 'utilisation' : sort.key;
  const isSortShown = columns.some(({ key }) => key === sortKey);
  return (
    <div role="rowgroup" class="ledger-head">
      <div
        class="ledger-row"
        role="row"
        aria-rowindex={1}
        ref={(el) => setStyle(el, 'grid-template-columns', template)}
        onKeyDown={alongHead}
      >
        {columns.map((column, k) => {
          const on = column.key === sortKey;
          const unit = headUnit(column, units);
          return (
            <div
              key={column.key}
              role="columnheader"
              aria-colindex={k + 1}
              aria-sort={on ? (sort.descending ? 'descending' : 'ascending') : 'none'}
              class={isNumeric(column) ? 'num' : ''}
            >
              <button
                type="button"
                tabIndex={on || (k === 0 && !isSortShown) ? 0 : -1}
                onClick={() => app.set({ sort: nextSort(sort, column.key) })}
              >
                <span>
                  {column.label}
                  {unit !== '' && <span class="head-unit">{unit}</span>}
                </span>
                <span class="sort-sign" aria-hidden="true">
                  {on ? (sort.descending ? '↓' : '↑') : ''}
                </span>
              </button>
            </div>
          );
        })}
      </div>
    </div>
  );
}

function Row(props: {
  readonly row: CurveRow;
  readonly index: number;
  readonly columns: readonly CurveColumn[];
  readonly units: ShownUnits;
  readonly template: string;
  readonly topPx: number;
  readonly isSelected: boolean;
}) {
  const { index, columns, units, template, topPx, isSelected } = props;
  const row = roundRow(props.row);
  return (
    <div
      id={rowId(row.curve)}
      class={`ledger-row ledger-line ${row.verdict.replace(' ', '-')}`}
      role="row"
      aria-rowindex={index + 2}
      aria-selected={isSelected}
      ref={(el) => {
        setStyle(el, 'grid-template-columns', template);
        setStyle(el, 'top', `${String(topPx)}px`);
      }}
      onClick={() => chooseCurve(row.curve)}
      onPointerEnter={() => cursor.set({ m: (row.start_m + row.end_m) / 2 })}
    >
      {columns.map((column, k) => (
        <Cell key={column.key} row={row} column={column} index={k} units={units} />
      ))}
    </div>
  );
}

function Cell(props: {
  readonly row: CurveRow;
  readonly column: CurveColumn;
  readonly index: number;
  readonly units: ShownUnits;
}) {
  const { row, column, index, units } = props;
  const text = cellText(row, column, units);
  return (
    <div
      role="gridcell"
      aria-colindex={index + 1}
      class={isNumeric(column) ? 'num' : ''}
      title={column.decimals === null && text.length > 12 ? text : undefined}
    >
      {column.key === 'verdict' ? (
        <Verdict verdict={row.verdict} />
      ) : column.key === 'utilisation' ? (
        <UtilisationBar value={row.utilisation} verdict={row.verdict} />
      ) : (
        text
      )}
    </div>
  );
}

function isNumeric({ key, decimals }: CurveColumn): boolean {
  return decimals !== null && key !== 'utilisation';
}

/** Marks the row of the curve under the cursor of Plan, Band or ribbon, without drawing the rows anew. */
function CursorMark() {
  useEffect(() => {
    let marked: Element | null = null;
    return cursor.listen(() => {
      const { m } = cursor.get();
      const hit = m === null ? undefined : app.get().open?.curves.find(({ row }) => m >= row.start_m && m <= row.end_m);
      const next = hit === undefined ? null : document.getElementById(rowId(hit.row.curve));
      if (next === marked) return;
      marked?.classList.remove('under-cursor');
      next?.classList.add('under-cursor');
      marked = next;
    });
  }, []);
  return null;
}

function rowId(curve: number): string {
  return `ledger-curve-${String(curve)}`;
}

/** One column head is a stop of the tab key; the arrows go along the others. */
function alongHead(event: KeyboardEvent): void {
  const step = { ArrowRight: 1, ArrowLeft: -1 }[event.key];
  if (step === undefined) return;
  event.preventDefault();
  const buttons = [...(event.currentTarget as HTMLElement).querySelectorAll('button')];
  const at = buttons.indexOf(event.target as HTMLButtonElement);
  buttons[Math.min(buttons.length - 1, Math.max(0, at + step))]?.focus();
}

function moveByKey(event: KeyboardEvent, rows: readonly AssessedCurve[], at: number): void {
  const to = {
    ArrowDown: at + 1,
    ArrowUp: at - 1,
    PageDown: at + PAGE_ROWS,
    PageUp: at - PAGE_ROWS,
    Home: 0,
    End: rows.length - 1,
  }[event.key];
  if (event.key === 'Enter' && at >= 0 && event.target === event.currentTarget) {
    event.preventDefault();
    chooseCurve(rows[at]!.row.curve);
    document.querySelector<HTMLElement>('.area-sheet')?.focus();
    return;
  }
  if (to === undefined) return;
  event.preventDefault();
  const next = rows[Math.min(rows.length - 1, Math.max(0, to))];
  if (next !== undefined) app.set({ curve: next.row.curve });
}

/** Pressed once, twice, and back to worst first. */
function nextSort(sort: Sort, key: keyof CurveRow): Sort {
  const first = key === 'utilisation';
  if (sort.key !== key) return { key, descending: first };
  return sort.descending === first ? { key, descending: !first } : WORST_FIRST;
}

// The content policy forbids style attributes in markup; styles set from here are allowed.
function setStyle(el: HTMLElement | null, property: string, value: string): void {
  el?.style.setProperty(property, value);
}
