import { useMemo, useState } from 'preact/hooks';
import { assessRun, curveGeometryLines } from '../../shared/assess/index.ts';
import { roundRow } from '../../shared/schema/curve-columns.ts';
import { curveSentence } from '../parts/text.ts';
import { Verdict } from '../parts/Verdict.tsx';
import { app, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { Criteria } from './Criteria.tsx';
import { Cures } from './Cures.tsx';
import { Facts } from './Facts.tsx';
import { Notes } from './Notes.tsx';
import { OtherRuns } from './OtherRuns.tsx';
import { PassageChart } from './PassageChart.tsx';
import { Sketch } from './Sketch.tsx';
import { TrialPanel } from './TrialPanel.tsx';
import { isAsRecorded, tryCurve, type CurveTrial } from './trials.ts';

/** Everything about one curve: figures with intervals, criteria with working, advice, and what would happen if. */
export function Sheet({ open, number }: { readonly open: OpenRun; readonly number: number }) {
  const [trial, setTrial] = useState<CurveTrial>({ curve: number });
  const units = useSlice(app, (s) => s.units);
  const catalogue = useSlice(app, (s) => s.catalogue);
  // Working lines are made for the one curve shown: for all of them they would cost more than the figures.
  const recorded = useMemo(
    () => assessRun(open.passages, open.setup, { working: [number] }).curves.find(({ row }) => row.curve === number),
    [open, number],
  );
  const passage = open.passages.passages.find(({ curve }) => curve.number === number);
  const tried = useMemo(
    () => (isAsRecorded(trial) || catalogue === null ? null : tryCurve(open, trial, catalogue)),
    [open, trial, catalogue],
  );
  if (recorded === undefined || passage === undefined || catalogue === null) {
    return (
      <div class="sheet">
        <h2>Curve {number} is not in this run</h2>
        <button type="button" onClick={() => app.set({ curve: null })}>
          Close
        </button>
      </div>
    );
  }
  const row = roundRow(recorded.row);
  return (
    <article class="sheet" aria-labelledby="sheet-title">
      <SheetHead open={open} number={number} verdict={recorded.row.verdict} />
      <p class="lead">{curveSentence(recorded, units)}</p>
      <Cures curve={recorded} onTry={(change) => setTrial({ ...trial, ...change })} />
      <TrialPanel
        open={open}
        catalogue={catalogue}
        recorded={recorded}
        curve={passage.curve}
        trial={trial}
        tried={tried}
        onTrial={setTrial}
      />
      <div class="drawings">
        <PassageChart passage={passage} row={row} triedKmh={trial.speedKmh ?? null} />
        <Sketch runId={open.detail.summary.id} curve={passage.curve} />
      </div>
      <Facts curve={passage.curve} row={row} mode={open.ref.mode} />
      <Criteria recorded={recorded} tried={tried?.curve ?? null} />
      <OtherRuns open={open} curve={recorded} />
      <details class="section whole">
        <summary>
          <h3>Geometry in the office’s terms</h3>
        </summary>
        {curveGeometryLines(passage.curve).map((line) => (
          <p key={line}>{line}</p>
        ))}
      </details>
      {passage.curve.remarks.length > 0 && (
        <section>
          <h3>What the recording cannot tell</h3>
          {passage.curve.remarks.map((remark) => (
            <p key={remark}>{remark.replace(/\.?$/, '.')}</p>
          ))}
        </section>
      )}
      <Notes runId={open.detail.summary.id} number={number} />
      <section class="cautions whole" aria-label="Cautions">
        <h3>Before anybody acts on this</h3>
        <ul>
          {open.cautions.map((caution) => (
            <li key={caution}>{caution}</li>
          ))}
        </ul>
      </section>
    </article>
  );
}

/** Number, verdict, and the way to the curves before and after. */
function SheetHead(props: {
  readonly open: OpenRun;
  readonly number: number;
  readonly verdict: Parameters<typeof Verdict>[0]['verdict'];
}) {
  const { open, number, verdict } = props;
  const has = (n: number) => open.curves.some(({ row }) => row.curve === n);
  const step = (to: number, label: string, sign: string) => (
    <button
      type="button"
      class="quiet icon"
      aria-label={label}
      title={label}
      disabled={!has(to)}
      onClick={() => app.set({ curve: to })}
    >
      {sign}
    </button>
  );
  return (
    <header class="sheet-head">
      <h2 id="sheet-title">Curve {number}</h2>
      <Verdict verdict={verdict} />
      <span class="grow print-only">{open.detail.summary.name}</span>
      <span class="grow" />
      <span class="row tight no-print">
        {step(number - 1, 'Curve before', '←')}
        {step(number + 1, 'Curve after', '→')}
        <button type="button" class="quiet" onClick={() => print()}>
          Print
        </button>
        <button type="button" class="quiet" onClick={() => app.set({ curve: null, tab: 'ledger' })}>
          Close
        </button>
      </span>
    </header>
  );
}
