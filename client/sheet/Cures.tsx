import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import { figure, quantity } from '../parts/text.ts';
import { app } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import type { CurveTrial } from './trials.ts';

const NAMES = { speed: 'Speed at most', cant: 'Cant at least', transition: 'Transition at least' };

/** What would bring the curve within its limits, what that costs, and what stands against it. */
export function Cures(props: { readonly curve: AssessedCurve; readonly onTry: (change: Partial<CurveTrial>) => void }) {
  const { curve, onTry } = props;
  const units = useSlice(app, (s) => s.units);
  const cures = curve.cures ?? [];
  if (cures.length === 0) return null;
  const change = (kind: (typeof cures)[number]['kind'], value: number): Partial<CurveTrial> =>
    kind === 'speed'
      ? { speedKmh: value }
      : kind === 'cant'
        ? { cant: value }
        : { entryTransitionM: value, exitTransitionM: value };
  return (
    <section>
      <h3>What would cure it</h3>
      <ul class="cures">
        {cures.map((cure) => (
          <li key={cure.kind} class={cure.feasible ? 'feasible' : ''}>
            <p>
              {NAMES[cure.kind]} <strong>{quantity(cure.value, cure.unit, 0, units)}</strong>
              {cure.feasible && cure.timeCostS !== null && <>, costs {figure(cure.timeCostS, 1)} s</>}
              {!cure.feasible && <small>Not enough alone: {cure.against}.</small>}
            </p>
            <button
              type="button"
              class="small no-print"
              aria-label={`Try ${NAMES[cure.kind].toLowerCase()} ${quantity(cure.value, cure.unit, 0, units)}`}
              onClick={() => onTry(change(cure.kind, cure.value))}
            >
              Try
            </button>
          </li>
        ))}
      </ul>
    </section>
  );
}
