import type { CurveEnd } from '../model/alignment.ts';
import type { Passage } from '../model/passage.ts';
import type { Setup } from '../schema/setup.ts';
import { CUSTOMARY_VIRTUAL_LENGTH_M, effectiveTransitionM } from '../curving/abrupt-change.ts';
import { cantBaseForGaugeMm } from '../curving/gauges.ts';
import { intervalAt, twoSidedQuantile } from './confidence.ts';

/** Slower than this a vehicle is starting or stopping, m/s: no figure of running is taken there. */
export const RUNNING_MPS = 2;

/** A speed met at one station of a passage. */
export interface SpeedAt {
  readonly mps: number;
  readonly sdMps: number;
  readonly chainageM: number;
}

/** One end of a curve as the rate criteria need it. */
export interface EndFacts {
  readonly place: 'entry' | 'exit';
  readonly kind: CurveEnd['kind'];
  /** Length that the change takes for this vehicle, m: never less than the virtual length; with its interval. */
  readonly lengthM: number;
  readonly lengthLowM: number;
  readonly lengthHighM: number;
  readonly isVirtual: boolean;
  /** Change of |curvature| over this end, signed in favour of this curve's hand, 1/m. */
  readonly curvatureChangePerM: number;
  /** Number of the curve joined here when it has the same hand (its cant then goes on), else null. */
  readonly sameHandNeighbour: number | null;
  /** Highest speed over this end. */
  readonly fastest: SpeedAt;
}

/** What a passage and a setup say of one curve, before cant and limits. */
export interface CurveFacts {
  readonly passage: Passage;
  /** Two-sided quantile of the chosen confidence. */
  readonly z: number;
  readonly baseMm: number;
  /** |curvature|, 1/m, best, and at the ends of its own interval. */
  readonly curvaturePerM: number;
  readonly curvatureHighPerM: number;
  /**
   * |curvature| scaled so that v^2 kappa at the measured speed lies at the ends of ITS interval (speed enters once).
   */
  readonly lateralLowPerM: number;
  readonly lateralHighPerM: number;
  readonly radiusM: number;
  /** Highest and lowest running speed on the circular part; null when the vehicle never ran there. */
  readonly fastest: SpeedAt | null;
  readonly slowest: SpeedAt | null;
  /** Highest speed over the whole passage. */
  readonly top: SpeedAt;
  readonly ends: readonly [entry: EndFacts, exit: EndFacts];
}

/** Cant base of a setup's vehicle, mm: its own, or the customary one of its gauge, or that of 1435 mm. */
export function cantBaseMm(setup: Setup): number {
  return setup.vehicle.cantBaseMm ?? cantBaseForGaugeMm(setup.vehicle.gaugeMm ?? 1435);
}

function speedAt(passage: Passage, index: number): SpeedAt {
  return {
    mps: passage.speedMps[index]!,
    sdMps: passage.speedSdMps[index]!,
    chainageM: passage.chainageM[index]!,
  };
}

/** Index of the station nearest to a chainage. */
function nearest(chainageM: readonly number[], s: number): number {
  let best = 0;
  for (let i = 1; i < chainageM.length; i++) {
    if (Math.abs(chainageM[i]! - s) < Math.abs(chainageM[best]! - s)) best = i;
  }
  return best;
}

/** Index of the extreme running speed between two chainages, -1 when there is none. sign +1: highest, -1: lowest. */
function extreme(passage: Passage, fromM: number, toM: number, sign: 1 | -1, leastMps: number): number {
  let best = -1;
  const { chainageM, speedMps } = passage;
  for (let i = 0; i < chainageM.length; i++) {
    const s = chainageM[i]!;
    const v = speedMps[i]!;
    if (s < fromM || s > toM || !(v >= leastMps)) continue;
    if (best < 0 || sign * (v - speedMps[best]!) > 0) best = i;
  }
  return best;
}

/** The extreme between two chainages, or the station nearest to their middle when no station lies between. */
function extremeOrNearest(
  passage: Passage,
  fromM: number,
  toM: number,
  sign: 1 | -1,
  leastMps: number,
): SpeedAt | null {
  const margin = 1e-6;
  let index = extreme(passage, fromM - margin, toM + margin, sign, leastMps);
  if (index < 0) {
    const near = nearest(passage.chainageM, (fromM + toM) / 2);
    const s = passage.chainageM[near]!;
    const isOutside = s < fromM || s > toM;
    if (isOutside && passage.speedMps[near]! >= leastMps) index = near;
  }
  return index < 0 ? null : speedAt(passage, index);
}

function endFacts(passage: Passage, place: 'entry' | 'exit', virtualM: number, z: number): EndFacts {
  const { curve } = passage;
  const end = curve[place];
  const own = curve.curvaturePerM.value;
  const from = end.fromCurvaturePerM;
  const isReverse = own * from < 0;
  // A direct reverse ramp is shared: this curve's part runs from zero. An abrupt reverse has no ramp to share.
  const fromInFavour = isReverse ? (end.kind === 'abrupt' ? -Math.abs(from) : 0) : Math.abs(from);
  const length = intervalAt(end.lengthM, z);
  const shown = end.kind === 'abrupt' ? 0 : length.value;
  const [fromM, toM] = place === 'entry' ? [curve.startM, curve.arcStartM] : [curve.arcEndM, curve.endM];
  return {
    place,
    kind: end.kind,
    lengthM: effectiveTransitionM(shown, virtualM),
    lengthLowM: effectiveTransitionM(Math.min(length.low, shown), virtualM),
    lengthHighM: effectiveTransitionM(Math.max(length.high, shown), virtualM),
    isVirtual: shown < virtualM,
    curvatureChangePerM: Math.abs(own) - fromInFavour,
    sameHandNeighbour: isReverse || from === 0 ? null : end.joins,
    fastest: extremeOrNearest(passage, fromM, toM, 1, 0) ?? speedAt(passage, nearest(passage.chainageM, fromM)),
  };
}

/** Reduces a passage to the figures that all criteria share. */
export function curveFacts(passage: Passage, setup: Setup): CurveFacts {
  const { curve } = passage;
  const z = twoSidedQuantile(setup.confidence);
  const kappa = Math.abs(curve.curvaturePerM.value);
  const own = intervalAt(curve.curvaturePerM, z);
  const spread = z * curve.lateralRelativeSd;
  const virtualM = setup.vehicle.wheelbaseM ?? CUSTOMARY_VIRTUAL_LENGTH_M;
  const wholeFrom = passage.chainageM[0]!;
  const wholeTo = passage.chainageM[passage.chainageM.length - 1]!;
  return {
    passage,
    z,
    baseMm: cantBaseMm(setup),
    curvaturePerM: kappa,
    curvatureHighPerM: Math.max(Math.abs(own.low), Math.abs(own.high)),
    lateralLowPerM: Math.max(kappa * (1 - spread), 0),
    lateralHighPerM: kappa * (1 + spread),
    radiusM: 1 / kappa,
    fastest: extremeOrNearest(passage, curve.arcStartM, curve.arcEndM, 1, RUNNING_MPS),
    slowest: extremeOrNearest(passage, curve.arcStartM, curve.arcEndM, -1, RUNNING_MPS),
    top: extremeOrNearest(passage, wholeFrom, wholeTo, 1, 0) ?? speedAt(passage, 0),
    ends: [endFacts(passage, 'entry', virtualM, z), endFacts(passage, 'exit', virtualM, z)],
  };
}
