import type { Curve, CurveEnd, Estimate } from '../model/alignment.ts';
import type { Passage, RunPassages } from '../model/passage.ts';
import type { Setup } from '../schema/setup.ts';
import { speedChangeCostS } from '../curving/speed-profile.ts';
import { timeAlongS } from './running-time.ts';

/** What somebody tries on one curve; absent fields stay as recorded. */
export interface Trial {
  readonly curve: number;
  /** Steady speed through the whole curve, km/h. */
  readonly speedKmh?: number;
  /** Cant, mm (road: superelevation, percent). */
  readonly cant?: number;
  /** Lengths of the transitions, m, about their recorded middles; 0 is none. */
  readonly entryTransitionM?: number;
  readonly exitTransitionM?: number;
}

function exactly(value: number): Estimate {
  return { value, sd: 0, low: value, high: value };
}

function withLength(end: CurveEnd, lengthM: number): CurveEnd {
  return { ...end, kind: lengthM > 0 ? 'transition' : 'abrupt', lengthM: exactly(lengthM) };
}

/** The curve with other transitions about the same middles; neither reaches past the middle of the arc. */
function withTransitions(curve: Curve, trial: Trial): Curve {
  const middle = (curve.arcStartM + curve.arcEndM) / 2;
  let { startM, arcStartM, arcEndM, endM, entry, exit } = curve;
  if (trial.entryTransitionM !== undefined) {
    const at = (startM + arcStartM) / 2;
    const half = Math.min(trial.entryTransitionM / 2, middle - at);
    startM = at - half;
    arcStartM = at + half;
    entry = withLength(entry, 2 * half);
  }
  if (trial.exitTransitionM !== undefined) {
    const at = (arcEndM + endM) / 2;
    const half = Math.min(trial.exitTransitionM / 2, at - middle);
    arcEndM = at - half;
    endM = at + half;
    exit = withLength(exit, 2 * half);
  }
  return { ...curve, startM, arcStartM, arcEndM, endM, entry, exit };
}

/** Stations that reach the curve's ends, the first and last values held outwards. */
function reaching(passage: Passage, startM: number, endM: number): Passage {
  const first = passage.chainageM[0]!;
  const last = passage.chainageM[passage.chainageM.length - 1]!;
  const hold = <T>(values: readonly T[]): T[] => [
    ...(startM < first ? [values[0]!] : []),
    ...values,
    ...(endM > last ? [values[values.length - 1]!] : []),
  ];
  return {
    ...passage,
    chainageM: [...(startM < first ? [startM] : []), ...passage.chainageM, ...(endM > last ? [endM] : [])],
    speedMps: hold(passage.speedMps),
    speedSdMps: hold(passage.speedSdMps),
    accelerationMps2: hold(passage.accelerationMps2),
    elevationM: hold(passage.elevationM),
  };
}

function tryOn(passage: Passage, trial: Trial): Passage {
  const curve = withTransitions(passage.curve, trial);
  const reached = reaching({ ...passage, curve }, curve.startM, curve.endM);
  if (trial.speedKmh === undefined) return reached;
  const mps = trial.speedKmh / 3.6;
  const kappa = curve.curvaturePerM;
  return {
    ...reached,
    // A tried speed is exact: what remains uncertain is the geometry.
    curve: { ...curve, speedMps: exactly(mps), lateralRelativeSd: Math.abs(kappa.sd / kappa.value) },
    speedMps: reached.speedMps.map(() => mps),
    speedSdMps: reached.speedMps.map(() => 0),
    accelerationMps2: reached.speedMps.map(() => 0),
  };
}

/** Running time that a tried speed costs against the recorded passage, s; negative when it saves. */
function timeChange(recorded: Passage, tried: Passage, setup: Setup): number {
  const { speedMps, chainageM } = recorded;
  const { vehicle } = setup;
  const mps = tried.speedMps[0]!;
  const inside =
    timeAlongS(
      chainageM,
      speedMps.map(() => mps),
    ) - timeAlongS(chainageM, speedMps);
  return (
    inside +
    speedChangeCostS(speedMps[0]!, mps, vehicle.brakingMps2) +
    speedChangeCostS(speedMps[speedMps.length - 1]!, mps, vehicle.accelerationMps2)
  );
}

/**
 * The run and setup with trials laid on: feed both to assessRun. Nothing given is changed.
 * timeChangeS: running time cost of the tried speeds, each curve for itself, s.
 */
export function applyTrial(
  run: RunPassages,
  setup: Setup,
  trials: readonly Trial[],
): { passages: RunPassages; setup: Setup; timeChangeS: number } {
  const byCurve = new Map(trials.map((trial) => [trial.curve, trial]));
  let timeChangeS = 0;
  const passages = run.passages.map((passage) => {
    const trial = byCurve.get(passage.curve.number);
    if (trial === undefined) return passage;
    const tried = tryOn(passage, trial);
    if (trial.speedKmh !== undefined) timeChangeS += timeChange(passage, tried, setup);
    return tried;
  });
  const cants = trials.flatMap((t) => (t.cant === undefined ? [] : [{ curve: t.curve, value: t.cant }]));
  const kept = (setup.cantTrials ?? []).filter((old) => !cants.some((c) => c.curve === old.curve));
  return {
    passages: { ...run, passages },
    setup: cants.length === 0 ? setup : { ...setup, cantTrials: [...kept, ...cants] },
    timeChangeS,
  };
}
