import { useState } from 'preact/hooks';
import type { Curve } from '../../shared/model/alignment.ts';
import type { Catalogue } from '../../shared/schema/api.ts';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import { saveText } from '../parts/save.ts';
import { figure, governingText, quantity, unitText } from '../parts/text.ts';
import { shownDecimals, shownUnit, unitRatio } from '../parts/units.ts';
import { Verdict } from '../parts/Verdict.tsx';
import { app, notify, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import {
  isAsRecorded,
  keepTrials,
  keptTrials,
  trialText,
  tryCurve,
  type CurveTrial,
  type NamedTrial,
  type TrialResult,
} from './trials.ts';

interface Props {
  readonly open: OpenRun;
  readonly catalogue: Catalogue;
  readonly recorded: AssessedCurve;
  readonly curve: Curve;
  readonly trial: CurveTrial;
  readonly tried: TrialResult | null;
  readonly onTrial: (trial: CurveTrial) => void;
}

const END_HINTS: Readonly<Record<Curve['entry']['kind'], string>> = {
  transition: 'as fitted',
  abrupt: 'none found',
  undetermined: 'not resolved',
};

/** What if: speed, cant, transitions, vehicle and limits of this curve; the verdict follows as they move. */
export function TrialPanel(props: Props) {
  const { open, trial, tried, recorded, onTrial } = props;
  return (
    <section class={`trial${isAsRecorded(trial) ? ' no-print' : ''}`} aria-label="Trial">
      <div class="row">
        <h3 class="grow">What if</h3>
        <button
          type="button"
          class="small no-print"
          disabled={isAsRecorded(trial)}
          onClick={() => onTrial({ curve: trial.curve })}
        >
          Back to the record
        </button>
      </div>
      <Passage {...props} />
      <JudgedBy {...props} />
      <Comparison recorded={recorded} tried={tried} />
      <NamedTrials {...props} key={open.detail.summary.id + String(trial.curve)} />
    </section>
  );
}

function Passage({ open, recorded, curve, trial, onTrial }: Props) {
  const { row } = recorded;
  const rail = open.ref.mode === 'rail';
  const recordedKmh = row.speed_kmh ?? curve.speedMps.value * 3.6;
  const speed = trial.speedKmh ?? recordedKmh;
  const longest = Math.max(120, 2 * (curve.entry.lengthM.value + curve.exit.lengthM.value));
  return (
    <div class="no-print trial-controls">
      <Slider
        label="Speed"
        hint={trial.speedKmh === undefined ? 'as recorded' : `${figure((100 * speed) / recordedKmh, 0)} % of recorded`}
        unit="km/h"
        value={speed}
        min={5}
        max={Math.max(40, Math.ceil(recordedKmh * 1.4))}
        step={1}
        onValue={(speedKmh) => onTrial({ ...trial, speedKmh })}
      />
      <Slider
        label={rail ? 'Cant' : 'Superelevation'}
        hint={trial.cant === undefined ? row.cant_source : 'tried'}
        unit={rail ? 'mm' : '%'}
        value={trial.cant ?? (rail ? row.cant_mm : row.superelevation_pct) ?? 0}
        min={rail ? -20 : -4}
        max={rail ? 200 : 12}
        step={rail ? 5 : 0.5}
        onValue={(cant) => onTrial({ ...trial, cant })}
      />
      <Slider
        label="Entry transition"
        hint={trial.entryTransitionM === undefined ? END_HINTS[curve.entry.kind] : 'tried'}
        unit="m"
        value={trial.entryTransitionM ?? curve.entry.lengthM.value}
        min={0}
        max={longest}
        step={1}
        onValue={(entryTransitionM) => onTrial({ ...trial, entryTransitionM })}
      />
      <Slider
        label="Exit transition"
        hint={trial.exitTransitionM === undefined ? END_HINTS[curve.exit.kind] : 'tried'}
        unit="m"
        value={trial.exitTransitionM ?? curve.exit.lengthM.value}
        min={0}
        max={longest}
        step={1}
        onValue={(exitTransitionM) => onTrial({ ...trial, exitTransitionM })}
      />
    </div>
  );
}

/** Another vehicle, set or tier for this trial alone. */
function JudgedBy({ open, catalogue, trial, onTrial }: Props) {
  const { mode } = open.ref;
  const without = (key: 'vehicleId' | 'limitSetId' | 'tier') =>
    Object.fromEntries(Object.entries(trial).filter(([name]) => name !== key)) as unknown as CurveTrial;
  const pick = (key: 'vehicleId' | 'limitSetId', own: string, id: string) =>
    onTrial(id === own ? without(key) : { ...trial, [key]: id });
  return (
    <div class="no-print trial-judged">
      <label>
        <span>Vehicle</span>
        <select
          value={trial.vehicleId ?? open.setup.vehicle.id}
          onChange={(e) => pick('vehicleId', open.setup.vehicle.id, e.currentTarget.value)}
        >
          {catalogue.vehicles
            .filter((vehicle) => vehicle.mode === mode)
            .map(({ id, name }) => (
              <option key={id} value={id}>
                {name}
              </option>
            ))}
        </select>
      </label>
      <label>
        <span>Limits</span>
        <select
          value={trial.limitSetId ?? open.setup.limits.id}
          onChange={(e) => pick('limitSetId', open.setup.limits.id, e.currentTarget.value)}
        >
          {catalogue.limitSets
            .filter((set) => set.mode === mode)
            .map(({ id, name }) => (
              <option key={id} value={id}>
                {name}
              </option>
            ))}
        </select>
      </label>
      <label>
        <span>Values</span>
        <select
          value={trial.tier ?? open.ref.tier}
          onChange={(e) => {
            const tier = e.currentTarget.value as typeof open.ref.tier;
            onTrial(tier === open.ref.tier ? without('tier') : { ...trial, tier });
          }}
        >
          <option value="normal">normal</option>
          <option value="exceptional">exceptional</option>
        </select>
      </label>
    </div>
  );
}

/** Recorded and tried, side by side. */
function Comparison({ recorded, tried }: { readonly recorded: AssessedCurve; readonly tried: TrialResult | null }) {
  const units = useSlice(app, (s) => s.units);
  if (tried === null) return null;
  const line = (curve: AssessedCurve) => governingText(curve, units) ?? 'nothing to judge';
  const time =
    Math.abs(tried.timeChangeS) < 0.05
      ? 'no change'
      : `${tried.timeChangeS > 0 ? '+' : '−'}${figure(Math.abs(tried.timeChangeS), 1)} s`;
  return (
    <table class="plain figures trial-result" aria-live="polite">
      <tbody>
        <tr>
          <th scope="row">Recorded</th>
          <td>
            <Verdict verdict={recorded.row.verdict} />
          </td>
          <td class="wide">{line(recorded)}</td>
        </tr>
        <tr>
          <th scope="row">Tried</th>
          <td>
            <Verdict verdict={tried.curve.row.verdict} />
          </td>
          <td class="wide">{line(tried.curve)}</td>
        </tr>
        <tr>
          <th scope="row">Running time</th>
          <td class="strong">{time}</td>
          <td class="wide">against the recorded passage</td>
        </tr>
      </tbody>
    </table>
  );
}

/** Trials worth keeping: by name in this browser, and as JSON beside the recorded state. */
function NamedTrials({ open, catalogue, trial, recorded, onTrial }: Props) {
  const units = useSlice(app, (s) => s.units);
  const runId = open.detail.summary.id;
  const [saved, setSaved] = useState<readonly NamedTrial[]>(() => keptTrials(runId, trial.curve));
  const change = (next: readonly NamedTrial[]) => {
    keepTrials(runId, trial.curve, next);
    setSaved(next);
  };
  const rail = open.ref.mode === 'rail';
  const exportJson = () => {
    const body = {
      run: open.detail.summary.name,
      setup: open.setup,
      recorded,
      trials: [...saved, ...(isAsRecorded(trial) ? [] : [{ name: 'unnamed', trial }])].map((named) => ({
        ...named,
        result: tryCurve(open, named.trial, catalogue),
      })),
      cautions: open.cautions,
    };
    saveText(`curve-${String(trial.curve)}-trials.json`, JSON.stringify(body, null, 1), 'application/json');
  };
  return (
    <>
      <form
        class="row no-print"
        onSubmit={(e) => {
          e.preventDefault();
          const name = (e.currentTarget.elements.namedItem('name') as HTMLInputElement).value.trim();
          if (name === '') return;
          change([...saved.filter((s) => s.name !== name), { name, trial }]);
          notify(`Kept as “${name}”`);
          e.currentTarget.reset();
        }}
      >
        <input type="text" name="name" placeholder="Name" aria-label="Name of the trial" class="grow" />
        <button type="submit" class="small" disabled={isAsRecorded(trial)}>
          Keep this trial
        </button>
        <button type="button" class="small" onClick={exportJson}>
          Save as JSON
        </button>
      </form>
      {saved.length > 0 && (
        <ul class="kept-trials">
          {saved.map(({ name, trial: kept }) => {
            const result = tryCurve(open, kept, catalogue);
            return (
              <li key={name}>
                <button type="button" class="quiet kept" onClick={() => onTrial(kept)}>
                  <strong>{name}</strong>
                  <span class="quiet-text">{trialText(kept, rail, units, catalogue)}</span>
                </button>
                {result !== null && <Verdict verdict={result.curve.row.verdict} />}
                <button
                  type="button"
                  class="quiet small no-print"
                  aria-label={`Forget the trial ${name}`}
                  onClick={() => change(saved.filter((s) => s.name !== name))}
                >
                  Forget
                </button>
              </li>
            );
          })}
        </ul>
      )}
    </>
  );
}

/** A slider and a field for one figure, in the reader's unit; at most one answer a frame while it moves. */
function Slider(props: {
  readonly label: string;
  readonly hint: string;
  readonly unit: string;
  readonly value: number;
  readonly min: number;
  readonly max: number;
  readonly step: number;
  readonly onValue: (value: number) => void;
}) {
  const { label, hint, unit, value, min, max, step, onValue } = props;
  const units = useSlice(app, (s) => s.units);
  const shown = shownUnit(unit, units);
  const ratio = unitRatio(unit, shown);
  const decimals = shownDecimals(step < 1 ? 1 : 0, ratio);
  const take = (next: number) => {
    if (Number.isFinite(next)) onValue(Math.min(max, Math.max(min, next)));
  };
  return (
    <div class="slider">
      <label for={`try-${label}`}>
        {label} <small>{hint}</small>
      </label>
      <input
        type="range"
        aria-label={`${label}, ${shown}`}
        aria-valuetext={quantity(value, unit, step < 1 ? 1 : 0, units)}
        min={min}
        max={max}
        step={step}
        value={value}
        onInput={(e) => take(e.currentTarget.valueAsNumber)}
      />
      <span class="field">
        <input
          id={`try-${label}`}
          type="number"
          class="num"
          step="any"
          value={(value * ratio).toFixed(decimals)}
          onChange={(e) => take(e.currentTarget.valueAsNumber / ratio)}
        />
        {unitText(shown)}
      </span>
    </div>
  );
}
