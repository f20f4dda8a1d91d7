import { useState } from 'preact/hooks';
import type { Trial } from '../../shared/assess/index.ts';
import type { Curve } from '../../shared/model/alignment.ts';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import { figure } from '../parts/text.ts';
import type { OpenRun } from '../state/app-state.ts';

interface Named {
  readonly name: string;
  readonly trial: Trial;
}

/** Sliders for speed, cant and transitions: the verdict follows as they move. */
export function TrialControls(props: {
  readonly open: OpenRun;
  readonly recorded: AssessedCurve;
  readonly curve: Curve;
  readonly trial: Trial;
  readonly onTrial: (trial: Trial) => void;
}) {
  const { open, recorded, curve, trial, onTrial } = props;
  const { row } = recorded;
  const rail = open.ref.mode === 'rail';
  const key = `bendbook.trials.${open.detail.summary.id}.${String(curve.number)}`;
  const [saved, setSaved] = useState<readonly Named[]>(() => JSON.parse(localStorage.getItem(key) ?? '[]') as Named[]);
  const keep = (next: readonly Named[]) => {
    localStorage.setItem(key, JSON.stringify(next));
    setSaved(next);
  };
  const speed = trial.speedKmh ?? row.speed_kmh ?? 0;
  const cant = trial.cant ?? (rail ? row.cant_mm : row.superelevation_pct) ?? 0;
  return (
    <section class="trial no-print" aria-label="Trial">
      <div class="row">
        <h3 class="grow">Try</h3>
        <button type="button" disabled={Object.keys(trial).length < 2} onClick={() => onTrial({ curve: curve.number })}>
          As recorded
        </button>
      </div>
      <Slider
        label="Speed"
        unit="km/h"
        value={speed}
        min={5}
        max={Math.max(40, Math.ceil((row.speed_kmh ?? 40) * 1.4))}
        step={1}
        onInput={(speedKmh) => onTrial({ ...trial, speedKmh })}
      />
      <Slider
        label={rail ? 'Cant' : 'Superelevation'}
        unit={rail ? 'mm' : '%'}
        value={cant}
        min={rail ? -20 : -4}
        max={rail ? 200 : 12}
        step={rail ? 5 : 0.5}
        onInput={(value) => onTrial({ ...trial, cant: value })}
      />
      <Slider
        label="Entry transition"
        unit="m"
        value={trial.entryTransitionM ?? curve.entry.lengthM.value}
        min={0}
        max={250}
        step={1}
        onInput={(entryTransitionM) => onTrial({ ...trial, entryTransitionM })}
      />
      <Slider
        label="Exit transition"
        unit="m"
        value={trial.exitTransitionM ?? curve.exit.lengthM.value}
        min={0}
        max={250}
        step={1}
        onInput={(exitTransitionM) => onTrial({ ...trial, exitTransitionM })}
      />
      <form
        class="row"
        onSubmit={(e) => {
          e.preventDefault();
          const name = new FormData(e.currentTarget).get('name')?.toString().trim() ?? '';
          if (name !== '') keep([...saved.filter((s) => s.name !== name), { name, trial }]);
          e.currentTarget.reset();
        }}
      >
        <input type="text" name="name" placeholder="Name this trial" aria-label="Name of the trial" class="grow" />
        <button type="submit">Keep</button>
      </form>
      {saved.map(({ name, trial: kept }) => (
        <div class="row" key={name}>
          <button type="button" class="quiet grow" onClick={() => onTrial(kept)}>
            {name}
          </button>
          <button
            type="button"
            class="quiet"
            aria-label={`Delete trial ${name}`}
            onClick={() => keep(saved.filter((s) => s.name !== name))}
          >
            Delete
          </button>
        </div>
      ))}
    </section>
  );
}

function Slider(props: {
  label: string;
  unit: string;
  value: number;
  min: number;
  max: number;
  step: number;
  onInput: (value: number) => void;
}) {
  const { label, unit, value, min, max, step, onInput } = props;
  return (
    <label>
      <span>{label}</span>
      <input
        type="range"
        min={min}
        max={max}
        step={step}
        value={value}
        onInput={(e) => onInput(Number(e.currentTarget.value))}
      />
      <output class="num">
        {figure(value, step < 1 ? 1 : 0)} {unit}
      </output>
    </label>
  );
}
