import { roundRow, type CurveColumn } from '../../shared/schema/curve-columns.ts';
import type { AssessedCurve, CurveRow } from '../../shared/schema/curve-row.ts';
import { CRITERIA } from '../../shared/limits/criteria.ts';
import { api } from '../api.ts';
import { copyText } from '../parts/copy.ts';
import { counted } from '../parts/text.ts';
import { shownUnit, unitRatio } from '../parts/units.ts';
import { Verdict } from '../parts/Verdict.tsx';
import { app, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { tableText } from './cell-text.ts';
import { columnOrder } from './columns.ts';
import { countBounds, NO_FILTER, WORST_FIRST, type Filter } from './filter.ts';

const VERDICTS: readonly CurveRow['verdict'][] = ['over', 'undecided', 'within', 'not assessed'];

const FILES = [
  ['report.pdf', 'Report, PDF', 'summary, drawings, table, a page for each hotspot'],
  ['report.html', 'Report, HTML', 'the same in one file for a browser'],
  ['table.xlsx', 'Curve table, XLSX', 'typed cells, a sheet on method and cautions'],
  ['table.csv', 'Curve table, CSV', ''],
  ['table.json', 'Curve table, JSON', ''],
  ['table.geojson', 'Curves on the map, GeoJSON', ''],
  ['profile.csv', 'Resampled run, CSV', 'every figure over chainage'],
] as const;

/** Above the ledger: what is shown, in which columns, and the ways out of the page. */
export function LedgerTools(props: {
  readonly open: OpenRun;
  readonly rows: readonly AssessedCurve[];
  readonly columns: readonly CurveColumn[];
  readonly onColumns: (columns: readonly CurveColumn[] | null) => void;
}) {
  const { open, rows, columns, onColumns } = props;
  const filter = useSlice(app, (s) => s.filter);
  const sort = useSlice(app, (s) => s.sort);
  const runId = open.detail.summary.id;
  const all = open.curves.length;
  const copy = () => {
    const { units, decimalSign } = app.get();
    const text = tableText(
      rows.map(({ row }) => roundRow(row)),
      columns,
      units,
      decimalSign,
    );
    void copyText(text, `${counted(rows.length, 'row')} copied: paste them into a spreadsheet`);
  };
  return (
    <div class="ledger-tools">
      <h2>{rows.length === all ? counted(all, 'curve') : `${String(rows.length)} of ${counted(all, 'curve')}`}</h2>
      <VerdictChips open={open} filter={filter} />
      <CriterionChoice open={open} filter={filter} />
      <Bounds filter={filter} />
      {countActive(filter) > 0 && (
        <button type="button" class="quiet" onClick={() => app.set({ filter: NO_FILTER })}>
          Show all
        </button>
      )}
      {sort.key !== 'worst' && (
        <button type="button" class="quiet" onClick={() => app.set({ sort: WORST_FIRST })}>
          Worst first
        </button>
      )}
      <span class="grow" />
      <details class="menu right">
        <summary>Columns</summary>
        <div class="columns-menu">
          <button type="button" class="quiet" onClick={() => onColumns(null)}>
            Back to the usual ones
          </button>
          {columnOrder(open.ref.mode).map((column) => {
            const on = columns.includes(column);
            const next = on
              ? columns.filter((c) => c !== column)
              : columnOrder(open.ref.mode).filter((c) => c === column || columns.includes(c));
            return (
              <label key={column.key}>
                <input type="checkbox" checked={on} onChange={() => onColumns(next)} />
                {column.label} <span class="quiet-text">{column.unit}</span>
              </label>
            );
          })}
        </div>
      </details>
      <button type="button" onClick={copy} title="Copy the rows shown, for a spreadsheet">
        Copy
      </button>
      <details class="menu right">
        <summary>Export</summary>
        <div>
          {FILES.map(([file, label, what]) => (
            <a key={file} href={api.exportUrl(runId, file)} download>
              <span>
                {label}
                {what !== '' && <small>{what}</small>}
              </span>
            </a>
          ))}
        </div>
      </details>
      <a class="button" href={api.exportUrl(runId, 'report.pdf')} download>
        Report PDF
      </a>
    </div>
  );
}

function countActive(filter: Filter): number {
  return filter.verdicts.length + (filter.criterion === '' ? 0 : 1) + countBounds(filter);
}

function VerdictChips({ open, filter }: { readonly open: OpenRun; readonly filter: Filter }) {
  return (
    <div class="chips" role="group" aria-label="Verdicts shown">
      {VERDICTS.map((verdict) => {
        const count = open.curves.filter(({ row }) => row.verdict === verdict).length;
        const on = filter.verdicts.includes(verdict);
        const next = on ? filter.verdicts.filter((v) => v !== verdict) : [...filter.verdicts, verdict];
        return (
          <button
            key={verdict}
            type="button"
            class="chip"
            aria-pressed={on}
            disabled={count === 0 && !on}
            onClick={() => app.set({ filter: { ...filter, verdicts: next } })}
          >
            <Verdict verdict={verdict} />
            <span class="chip-count">{count}</span>
          </button>
        );
      })}
    </div>
  );
}

function CriterionChoice({ open, filter }: { readonly open: OpenRun; readonly filter: Filter }) {
  const judged = new Set(
    open.curves.flatMap(({ row, criteria }) => [
      row.governing_criterion,
      ...criteria.filter(({ verdict }) => verdict === 'over' || verdict === 'undecided').map((c) => c.criterion),
    ]),
  );
  return (
    <label>
      <span class="sr">Criterion</span>
      <select
        class="criterion-choice"
        value={filter.criterion}
        onChange={(e) => app.set({ filter: { ...filter, criterion: e.currentTarget.value } })}
      >
        <option value="">Any criterion</option>
        {CRITERIA.filter(({ id }) => judged.has(id) || id === filter.criterion).map(({ id, name }) => (
          <option key={id} value={id}>
            {name}
          </option>
        ))}
      </select>
    </label>
  );
}

type BoundKey = Exclude<keyof Filter, 'verdicts' | 'criterion'>;

const BOUNDS: readonly (readonly [label: string, from: BoundKey, to: BoundKey, unit: string, isChainage: boolean])[] = [
  ['Radius', 'radiusFromM', 'radiusToM', 'm', false],
  ['Speed', 'speedFromKmh', 'speedToKmh', 'km/h', false],
  ['Chainage', 'fromM', 'toM', 'm', true],
];

/** From and to of radius, speed and chainage, in the reader's units. */
function Bounds({ filter }: { readonly filter: Filter }) {
  const units = useSlice(app, (s) => s.units);
  const count = countBounds(filter);
  return (
    <details class="menu">
      <summary>{count === 0 ? 'Bounds' : `Bounds (${String(count)})`}</summary>
      <div class="bounds-menu">
        {BOUNDS.map(([label, from, to, unit, isChainage]) => {
          const shown = shownUnit(unit, units, isChainage);
          const ratio = unitRatio(unit, shown);
          const field = (key: BoundKey, word: string) => (
            <input
              type="number"
              class="num"
              aria-label={`${label} ${word}, ${shown}`}
              placeholder={word}
              value={filter[key] === null ? '' : String(Number((filter[key] * ratio).toFixed(3)))}
              onChange={(e) => {
                const value = e.currentTarget.valueAsNumber;
                app.set({ filter: { ...filter, [key]: Number.isFinite(value) ? value / ratio : null } });
              }}
            />
          );
          return (
            <div key={label} class="bound" role="group" aria-label={label}>
              <span>
                {label} <span class="quiet-text">{shown}</span>
              </span>
              {field(from, 'from')}
              {field(to, 'to')}
            </div>
          );
        })}
        <button
          type="button"
          onClick={() => app.set({ filter: { ...NO_FILTER, verdicts: filter.verdicts, criterion: filter.criterion } })}
        >
          No bounds
        </button>
      </div>
    </details>
  );
}
