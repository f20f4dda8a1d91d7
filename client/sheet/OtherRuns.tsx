import { quantile } from 'simple-statistics';
import { useState } from 'preact/hooks';
import { assessRun, passagesFromWire } from '../../shared/assess/index.ts';
import { criterionOf } from '../../shared/limits/criteria.ts';
import type { RunSummary } from '../../shared/schema/api.ts';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import { api } from '../api.ts';
import { counted, criterionName, quantity } from '../parts/text.ts';
import { Verdict } from '../parts/Verdict.tsx';
import { app, report, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { openRun, resolveSetup } from '../state/open-run.ts';
import { groupRuns } from '../state/server.ts';

/** Middles of one and the same curve lie no farther apart than this in two runs, m (or a third of its length). */
const SAME_PLACE_M = 60;
/** Percentiles need at least as many passages. */
const LEAST_FOR_PERCENTILES = 3;

interface OtherPassage {
  readonly run: RunSummary;
  readonly curve: AssessedCurve;
}

/** How the other runs of the line took this curve, each judged under its own setup. */
export function OtherRuns({ open, curve }: { readonly open: OpenRun; readonly curve: AssessedCurve }) {
  const recordings = useSlice(app, (s) => s.recordings);
  const units = useSlice(app, (s) => s.units);
  const [found, setFound] = useState<readonly OtherPassage[] | null>(null);
  const own = open.detail.summary;
  const group = groupRuns(recordings.flatMap(({ runs }) => runs)).find(({ runs }) =>
    runs.some(({ id }) => id === own.id),
  );
  const others = group?.runs.filter(({ id }) => id !== own.id) ?? [];
  if (others.length === 0) return null;
  const load = () => {
    if (found !== null) return;
    Promise.all(others.map((run) => passageOf(run, curve)))
      .then((passages) => setFound(passages.filter((passage) => passage !== null)))
      .catch(report);
  };
  const criterion = curve.row.governing_criterion;
  const valueOf = (passage: AssessedCurve) => passage.criteria.find((c) => c.criterion === criterion)?.value ?? null;
  const info = criterion === null ? null : criterionOf(criterion);
  const row = (key: string, name: preact.ComponentChildren, passage: AssessedCurve, isOwn: boolean) => (
    <tr key={key} class={isOwn ? 'own' : ''}>
      <th scope="row">{name}</th>
      <td class="num">{quantity(passage.row.speed_kmh, 'km/h', 1, units)}</td>
      <td class="num">{info === null ? '–' : quantity(valueOf(passage), info.unit, info.decimals, units)}</td>
      <td>
        <Verdict verdict={passage.row.verdict} />
      </td>
    </tr>
  );
  return (
    <details
      class="section whole"
      onToggle={(e) => {
        if (e.currentTarget.open) load();
      }}
    >
      <summary>
        <h3>Other runs through it ({others.length})</h3>
      </summary>
      {found === null ? (
        <p class="quiet-text">Reading the other runs …</p>
      ) : found.length === 0 ? (
        <p class="quiet-text">None of the {counted(others.length, 'other run')} has a curve at this place.</p>
      ) : (
        <table class="plain figures other-runs">
          <caption class="quiet-text">
            {info === null ? '' : `Value: ${criterionName(info.id).toLowerCase()}. `}Each run is judged under its own
            setup.
          </caption>
          <thead>
            <tr>
              <th scope="col">Run</th>
              <th scope="col" class="num">
                Speed
              </th>
              <th scope="col" class="num">
                Value
              </th>
              <th scope="col">Verdict</th>
            </tr>
          </thead>
          <tbody>
            {row('own', 'This run', curve, true)}
            {found.map(({ run, curve: passage }) =>
              row(
                run.id,
                <button
                  type="button"
                  class="link"
                  onClick={() => void openRun(run.id, { curve: passage.row.curve })}
                  title="Open this run at this curve"
                >
                  {run.name}
                </button>,
                passage,
                false,
              ),
            )}
            {found.length + 1 >= LEAST_FOR_PERCENTILES &&
              ([0.5, 0.85, 0.95] as const).map((share) => {
                const all = [curve, ...found.map((f) => f.curve)];
                return (
                  <tr key={share} class="percentile">
                    <th scope="row">{share === 0.5 ? 'Median' : `${String(share * 100)}th percentile`}</th>
                    <td class="num">
                      {quantity(
                        percentile(
                          all.map((c) => c.row.speed_kmh),
                          share,
                        ),
                        'km/h',
                        1,
                        units,
                      )}
                    </td>
                    <td class="num">
                      {info === null
                        ? '–'
                        : quantity(percentile(all.map(valueOf), share), info.unit, info.decimals, units)}
                    </td>
                    <td />
                  </tr>
                );
              })}
          </tbody>
        </table>
      )}
    </details>
  );
}

/** Unknown values are left out; null when all are. */
function percentile(values: readonly (number | null)[], share: number): number | null {
  const known = values.filter((value) => value !== null && Number.isFinite(value)) as number[];
  return known.length === 0 ? null : quantile(known, share);
}

async function passageOf(run: RunSummary, curve: AssessedCurve): Promise<OtherPassage | null> {
  const { catalogue } = app.get();
  if (catalogue === null) return null;
  const detail = await api.run(run.id);
  const setup = resolveSetup(detail.setup, catalogue);
  const { curves } = assessRun(passagesFromWire(detail.passages), setup, { working: false });
  const reach = Math.max(SAME_PLACE_M, (curve.row.end_m - curve.row.start_m) / 3);
  let best: { curve: AssessedCurve; m: number } | null = null;
  for (const other of curves) {
    const m = distanceM(curve.row, other.row);
    if (m <= reach && (best === null || m < best.m)) best = { curve: other, m };
  }
  return best === null ? null : { run, curve: best.curve };
}

/** Between the middles of two curves; a plane does over so short a way. */
function distanceM(a: AssessedCurve['row'], b: AssessedCurve['row']): number {
  const perDegree = 111_195;
  const east = (((b.lon_mid - a.lon_mid + 540) % 360) - 180) * Math.cos((a.lat_mid * Math.PI) / 180);
  return perDegree * Math.hypot(east, b.lat_mid - a.lat_mid);
}
