import type { Observations } from './observations.ts';
import { USE } from './observations.ts';
import type { Parameters } from './parameters.ts';
import { walkAt } from './parameters.ts';

/** Time over which the local strength of a process noise is judged, s, either side. */
const HALF_WINDOW_S = 2;
/** Weight of the log's own strength against the local finding, in units of a step's expectation. */
const PRIOR_WEIGHT = 1;
const LEAST_FACTOR = 0.1;
const GREATEST_FACTOR = 30;
/** A vehicle gains this much lateral acceleration within this time at most. */
const PLAUSIBLE_LATERAL_MPS2 = 3;
const PLAUSIBLE_TIME_S = 2;

/** What the first pass found of one process noise at each step, and what its strength lets expect. */
export interface NoiseScore {
  /** lambda' Q lambda */
  readonly found: Float32Array;
  /** trace(Q Lambda) */
  readonly expected: Float32Array;
}

/**
 * Local factors on the strength of a process noise. The score of the strength in one step is (found - expected) / 2; the ratio of
 * their sums over a window says by how much the local motion exceeds what the log's average allows. Where the ratio is r
 * the strength is multiplied by 2 r - 1: about half of what is expected is the observations' own noise.
 */
function adaptNoise(timeS: Float64Array, score: NoiseScore, greatest: (i: number) => number, out: Float32Array): void {
  const { found, expected } = score;
  const count = out.length;
  let from = 0;
  let to = 0;
  let sumFound = 0;
  let sumExpected = 0;
  for (let i = 0; i < count; i++) {
    while (to < count && timeS[to]! <= timeS[i]! + HALF_WINDOW_S) {
      sumFound += found[to]!;
      sumExpected += expected[to]!;
      to++;
    }
    while (timeS[from]! < timeS[i]! - HALF_WINDOW_S) {
      sumFound -= found[from]!;
      sumExpected -= expected[from]!;
      from++;
    }
    const ratio = (PRIOR_WEIGHT + Math.max(0, sumFound)) / (PRIOR_WEIGHT + Math.max(0, sumExpected));
    out[i] = Math.min(greatest(i), Math.max(LEAST_FACTOR, 2 * ratio - 1));
  }
}

/** Adapts the curvature walk and the acceleration's noise to what the first pass found, and opens both where it lost the vehicle. */
export function adaptProcessNoise(
  observations: Observations,
  parameters: Parameters,
  speedMps: Float64Array,
  walk: NoiseScore,
  jerk: NoiseScore,
): void {
  const { count, timeS, walkFactor, jerkFactor, use } = observations;
  const local = { walk: 0, lengthM: 1 };
  const greatestWalk = (i: number): number => {
    const v = Math.max(1, speedMps[i]!);
    walkAt(parameters, v, local);
    // q v t <= (a / v^2)^2
    const plausible = PLAUSIBLE_LATERAL_MPS2 ** 2 / (v ** 5 * PLAUSIBLE_TIME_S * local.walk);
    return Math.max(1, Math.min(GREATEST_FACTOR, plausible));
  };
  adaptNoise(timeS, walk, greatestWalk, walkFactor);
  adaptNoise(timeS, jerk, () => GREATEST_FACTOR, jerkFactor);
  for (let i = 1; i < count; i++) {
    if ((use[i]! & USE.RESTART) === 0) continue;
    use[i]! &= ~USE.RESTART;
    for (let k = i; k > 0 && timeS[i]! - timeS[k]! <= HALF_WINDOW_S; k--) open(k);
    for (let k = i + 1; k < count && timeS[k]! - timeS[i]! <= HALF_WINDOW_S; k++) open(k);
  }
  function open(k: number): void {
    walkFactor[k] = greatestWalk(k);
    jerkFactor[k] = GREATEST_FACTOR;
  }
}
