import { applyTrial, assessRun, type Trial } from '../../shared/assess/index.ts';
import type { Catalogue } from '../../shared/schema/api.ts';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import type { SetupRef } from '../../shared/schema/setup.ts';
import { keep, readKept } from '../parts/kept.ts';
import { unitText, quantity } from '../parts/text.ts';
import type { ShownUnits } from '../parts/units.ts';
import type { OpenRun } from '../state/app-state.ts';
import { resolveSetup } from '../state/open-run.ts';

/** What somebody tries on one curve: another passage or geometry, and by what it is judged. */
export interface CurveTrial extends Trial {
  readonly limitSetId?: string;
  readonly vehicleId?: string;
  readonly tier?: SetupRef['tier'];
}

export interface NamedTrial {
  readonly name: string;
  readonly trial: CurveTrial;
}

export interface TrialResult {
  readonly curve: AssessedCurve;
  /** Running time against the recorded passage, s; zero when no speed was tried. */
  readonly timeChangeS: number;
}

/** True when nothing differs from the recorded state. */
export function isAsRecorded(trial: CurveTrial): boolean {
  return Object.keys(trial).length < 2;
}

/** The curve as it would be, by the code that made the table. */
export function tryCurve(open: OpenRun, trial: CurveTrial, catalogue: Catalogue): TrialResult | null {
  const { limitSetId, vehicleId, tier, ...passage } = trial;
  const setup = resolveSetup(
    {
      ...open.ref,
      ...(limitSetId === undefined ? {} : { limitSetId }),
      ...(vehicleId === undefined ? {} : { vehicleId }),
      ...(tier === undefined ? {} : { tier }),
    },
    catalogue,
  );
  const tried = applyTrial(open.passages, setup, [passage]);
  const { curves } = assessRun(tried.passages, tried.setup, { working: [trial.curve] });
  const curve = curves.find(({ row }) => row.curve === trial.curve);
  return curve === undefined ? null : { curve, timeChangeS: tried.timeChangeS };
}

/** "speed 74 km/h, cant 120 mm": what a trial changes. */
export function trialText(trial: CurveTrial, rail: boolean, units: ShownUnits, catalogue: Catalogue): string {
  const parts: string[] = [];
  if (trial.speedKmh !== undefined) parts.push(`speed ${quantity(trial.speedKmh, 'km/h', 0, units)}`);
  if (trial.cant !== undefined) {
    parts.push(
      rail ? `cant ${quantity(trial.cant, 'mm', 0, units)}` : `superelevation ${String(trial.cant)} ${unitText('%')}`,
    );
  }
  if (trial.entryTransitionM !== undefined) {
    parts.push(`entry transition ${quantity(trial.entryTransitionM, 'm', 0, units)}`);
  }
  if (trial.exitTransitionM !== undefined) {
    parts.push(`exit transition ${quantity(trial.exitTransitionM, 'm', 0, units)}`);
  }
  const name = (list: readonly { id: string; name: string }[], id: string | undefined) =>
    list.find((item) => item.id === id)?.name;
  const vehicle = name(catalogue.vehicles, trial.vehicleId);
  const limits = name(catalogue.limitSets, trial.limitSetId);
  if (vehicle !== undefined) parts.push(vehicle);
  if (limits !== undefined) parts.push(limits);
  if (trial.tier !== undefined) parts.push(`${trial.tier} values`);
  return parts.length === 0 ? 'as recorded' : parts.join(', ');
}

function keyOf(runId: string, curve: number): string {
  return `trials.${runId}.${String(curve)}`;
}

export function keptTrials(runId: string, curve: number): readonly NamedTrial[] {
  return readKept<readonly NamedTrial[]>(keyOf(runId, curve), []);
}

export function keepTrials(runId: string, curve: number, trials: readonly NamedTrial[]): void {
  keep(keyOf(runId, curve), trials.length === 0 ? null : trials);
}
