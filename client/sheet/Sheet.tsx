import { useEffect, useMemo, useState } from 'preact/hooks';
import { applyTrial, assessRun, type Trial } from '../../shared/assess/index.ts';
import type { Curve } from '../../shared/model/alignment.ts';
import { roundRow } from '../../shared/schema/curve-columns.ts';
import type { AssessedCurve, CriterionResult } from '../../shared/schema/curve-row.ts';
import { saveText } from '../parts/save.ts';
import { criterionDecimals, criterionName, curveSentence, figure, interval, unitText } from '../parts/text.ts';
import { Verdict } from '../parts/Verdict.tsx';
import { app, type OpenRun } from '../state/app-state.ts';
import { Sketch } from './Sketch.tsx';
import { TrialControls } from './TrialControls.tsx';

/** Everything about one curve: figures with intervals, criteria with working, advice, and what would happen if. */
export function Sheet({ open, number }: { readonly open: OpenRun; readonly number: number }) {
  const [trial, setTrial] = useState<Trial>({ curve: number });
  useEffect(() => setTrial({ curve: number }), [number, open.detail.summary.id]);
  // Working lines are made for the one curve shown: for all of them they would cost more than the figures.
  const recorded = useMemo(
    () => assessRun(open.passages, open.setup, { working: [number] }).curves.find(({ row }) => row.curve === number),
    [open, number],
  );
  const passage = open.passages.passages.find(({ curve }) => curve.number === number);
  const tried = useMemo(() => tryCurve(open, trial, number), [open, trial, number]);
  if (recorded === undefined || passage === undefined) {
    return (
      <div class="sheet">
        <p>Curve {number} is not in this run.</p>
        <button type="button" onClick={() => app.set({ curve: null })}>
          Close
        </button>
      </div>
    );
  }
  const isTrial = Object.keys(trial).length > 1;
  const shown = isTrial && tried !== null ? tried.curve : recorded;
  const row = roundRow(recorded.row);
  return (
    <article class="sheet" aria-label={`Curve ${String(number)}`}>
      <header class="row">
        <h2 class="grow">Curve {number}</h2>
        <Step open={open} number={number} />
        <button type="button" class="no-print" onClick={() => print()}>
          Print
        </button>
        <button
          type="button"
          class="no-print"
          aria-label="Close the curve sheet"
          onClick={() => app.set({ curve: null, tab: 'ledger' })}
        >
          Close
        </button>
      </header>
      <Verdict verdict={recorded.row.verdict} />
      <p class="lead">{curveSentence(recorded)}</p>
      <Sketch curve={passage.curve} passage={passage} />
      <Geometry curve={passage.curve} row={row} mode={open.ref.mode} />
      <Advice curve={recorded} />
      <TrialControls open={open} recorded={recorded} curve={passage.curve} trial={trial} onTrial={setTrial} />
      {isTrial && tried !== null && (
        <p aria-live="polite">
          Tried: <Verdict verdict={tried.curve.row.verdict} /> {curveSentence(tried.curve)}{' '}
          {tried.timeChangeS === 0
            ? ''
            : `Running time ${tried.timeChangeS > 0 ? '+' : '−'}${figure(Math.abs(tried.timeChangeS), 1)} s against the recorded run.`}
        </p>
      )}
      <section>
        <div class="row">
          <h3 class="grow">{isTrial ? 'Criteria as tried' : 'Criteria'}</h3>
          <button type="button" class="no-print" onClick={() => void navigator.clipboard.writeText(workingText(shown))}>
            Copy working
          </button>
          <button
            type="button"
            class="no-print"
            onClick={() =>
              saveText(
                `curve-${String(number)}.json`,
                JSON.stringify(
                  {
                    recorded,
                    trial: isTrial ? { trial, result: tried?.curve } : null,
                    setup: open.setup,
                    cautions: open.cautions,
                  },
                  null,
                  1,
                ),
                'application/json',
              )
            }
          >
            Save JSON
          </button>
        </div>
        {shown.criteria.map((criterion) => (
          <Criterion key={criterion.criterion} result={criterion} />
        ))}
      </section>
      <Notes runId={open.detail.summary.id} number={number} />
      {passage.curve.remarks.length > 0 && (
        <section>
          <h3>What the recording cannot tell</h3>
          {passage.curve.remarks.map((remark) => (
            <p key={remark}>{remark}.</p>
          ))}
        </section>
      )}
      <section class="cautions" aria-label="Cautions">
        {open.cautions.map((caution) => (
          <p key={caution}>{caution}</p>
        ))}
      </section>
    </article>
  );
}

/** To the curve before and after along the run. */
function Step({ open, number }: { readonly open: OpenRun; readonly number: number }) {
  const has = (n: number) => open.curves.some(({ row }) => row.curve === n);
  return (
    <span class="row no-print">
      <button
        type="button"
        aria-label="Previous curve"
        disabled={!has(number - 1)}
        onClick={() => app.set({ curve: number - 1 })}
      >
        ‹
      </button>
      <button
        type="button"
        aria-label="Next curve"
        disabled={!has(number + 1)}
        onClick={() => app.set({ curve: number + 1 })}
      >
        ›
      </button>
    </span>
  );
}

function tryCurve(open: OpenRun, trial: Trial, number: number): { curve: AssessedCurve; timeChangeS: number } | null {
  const { passages, setup, timeChangeS } = applyTrial(open.passages, open.setup, [trial]);
  const curve = assessRun(passages, setup, { working: [number] }).curves.find(({ row }) => row.curve === number);
  return curve === undefined ? null : { curve, timeChangeS };
}

function Geometry({
  curve,
  row,
  mode,
}: {
  readonly curve: Curve;
  readonly row: AssessedCurve['row'];
  readonly mode: 'rail' | 'road';
}) {
  const end = (e: Curve['entry']) =>
    e.kind === 'transition' ? (
      <>
        {figure(e.lengthM.value, 0)} m <small>{interval(e.lengthM.low, e.lengthM.high, 0)}</small>
      </>
    ) : e.kind === 'abrupt' ? (
      <>
        none <small>abrupt change</small>
      </>
    ) : (
      <>
        not resolved <small>at most {figure(e.lengthM.high, 0)} m</small>
      </>
    );
  return (
    <dl class="facts">
      <div>
        <dt>Radius</dt>
        <dd>
          {figure(row.radius_m, 0)} m <small>{interval(row.radius_low_m, row.radius_high_m, 0)}</small>
        </dd>
      </div>
      <div>
        <dt>Hand and shape</dt>
        <dd>
          {row.hand} <small>{row.shape}</small>
        </dd>
      </div>
      <div>
        <dt>Chainage</dt>
        <dd>
          {figure(row.start_m, 0)} to {figure(row.end_m, 0)} m
        </dd>
      </div>
      <div>
        <dt>Deflection</dt>
        <dd>{figure(row.deflection_deg, 1)}°</dd>
      </div>
      <div>
        <dt>Entry transition</dt>
        <dd>{end(curve.entry)}</dd>
      </div>
      <div>
        <dt>Exit transition</dt>
        <dd>{end(curve.exit)}</dd>
      </div>
      <div>
        <dt>Speed</dt>
        <dd>
          {figure(row.speed_kmh, 1)} km/h <small>{interval(row.speed_low_kmh, row.speed_high_kmh, 1)}</small>
        </dd>
      </div>
      <div>
        <dt>{mode === 'rail' ? 'Cant' : 'Superelevation'}</dt>
        <dd>
          {mode === 'rail' ? `${figure(row.cant_mm, 0)} mm` : `${figure(row.superelevation_pct, 1)} %`}{' '}
          <small>{row.cant_source}</small>
        </dd>
      </div>
      <div>
        <dt>Lateral, track plane</dt>
        <dd>
          {figure(row.lateral_track_ms2, 2)} m/s²{' '}
          <small>{interval(row.lateral_track_low_ms2, row.lateral_track_high_ms2, 2)}</small>
        </dd>
      </div>
    </dl>
  );
}

function Advice({ curve }: { readonly curve: AssessedCurve }) {
  const cures = curve.cures ?? [];
  if (cures.length === 0) return null;
  const names = { speed: 'Speed at most', cant: 'Cant at least', transition: 'Transition at least' };
  return (
    <section>
      <h3>What would cure it</h3>
      <table class="plain">
        <tbody>
          {cures.map((cure) => (
            <tr key={cure.kind}>
              <th scope="row">{names[cure.kind]}</th>
              <td class="num">
                {figure(cure.value, 0)} {cure.unit}
              </td>
              <td>
                {cure.feasible
                  ? cure.timeCostS === null
                    ? 'feasible'
                    : `costs ${figure(cure.timeCostS, 1)} s`
                  : `not alone: ${cure.against}`}
              </td>
            </tr>
          ))}
        </tbody>
      </table>
      <p class="quiet-text">A change of speed or cant is decided by the competent, authorised people of the line.</p>
    </section>
  );
}

function Criterion({ result }: { readonly result: CriterionResult }) {
  const decimals = criterionDecimals(result.criterion);
  const unit = unitText(result.unit);
  return (
    <details class="criterion" open={result.verdict === 'over'}>
      <summary>
        <span>{criterionName(result.criterion)}</span>
        <Verdict verdict={result.verdict} />
        <span class="quiet-text">
          {figure(result.value, decimals)} {unit}{' '}
          {result.low === null ? '' : `(95 %: ${interval(result.low, result.high, decimals)})`}
        </span>
        <span class="quiet-text">
          {result.limit === null ? 'no limit in the set' : `limit ${figure(result.limit, decimals)} ${unit}`}
        </span>
      </summary>
      {result.working.length > 0 && <p class="working">{result.working.join('\n')}</p>}
      {result.reason !== '' && <p>{result.reason}</p>}
      <p class="quiet-text">{result.source}</p>
    </details>
  );
}

function workingText(curve: AssessedCurve): string {
  const parts = curve.criteria.map((c) =>
    [`${criterionName(c.criterion)}: ${c.verdict}`, ...c.working, c.source, c.reason]
      .filter((l) => l !== '')
      .join('\n'),
  );
  return [curveSentence(curve), ...parts].join('\n\n');
}

/** What the user wrote about a curve: kept in this browser. */
function Notes({ runId, number }: { readonly runId: string; readonly number: number }) {
  const key = `bendbook.note.${runId}.${String(number)}`;
  const [text, setText] = useState(() => localStorage.getItem(key) ?? '');
  useEffect(() => setText(localStorage.getItem(key) ?? ''), [key]);
  return (
    <label>
      <h3>Notes</h3>
      <textarea
        rows={3}
        value={text}
        placeholder="Kept in this browser"
        onInput={(e) => {
          setText(e.currentTarget.value);
          if (e.currentTarget.value === '') localStorage.removeItem(key);
          else localStorage.setItem(key, e.currentTarget.value);
        }}
      />
    </label>
  );
}
