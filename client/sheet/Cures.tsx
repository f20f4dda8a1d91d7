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
      <table class="plain figures">
        <tbody>
          {cures.map((cure) => (
            <tr key={cure.kind}>
              <th scope="row">{NAMES[cure.kind]}</th>
              <td class="num strong">{quantity(cure.value, cure.unit, 0, units)}</td>
              <td class="wide">
                {cure.feasible
                  ? cure.timeCostS === null
                    ? 'would do'
                    : `costs ${figure(cure.timeCostS, 1)} s`
                  : `not enough alone: ${cure.against}`}
              </td>
              <td class="no-print">
                <button
                  type="button"
                  class="small"
                  aria-label={`Try ${NAMES[cure.kind].toLowerCase()} ${quantity(cure.value, cure.unit, 0, units)}`}
                  onClick={() => onTry(change(cure.kind, cure.value))}
                >
                  Try
                </button>
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </section>
  );
}
