import type { Observations } from './observations.ts';
import type { Parameters } from './parameters.ts';
import { walkAt } from './parameters.ts';

/** Time over which the local strength of the curvature walk is judged, s, either side. */
const HALF_WINDOW_S = 2;
/** Weight of the log's own strength against the local finding, in units of a step's expectation. */
const PRIOR_WEIGHT = 1;
const LEAST_FACTOR = 0.1;
const GREATEST_FACTOR = 30;
const PLAUSIBLE_LATERAL_MPS2 = 3;
const PLAUSIBLE_TIME_S = 2;

/**
 * Local factor on the strength of the curvature walk. The score of the strength of one step's noise is
 * (found - expected) / 2, found = lambda' Q lambda and expected = trace(Q Lambda); their ratio over a window says by how much the
 * local changes of curvature exceed what the log's average allows.
 */
export function adaptWalk(
  observations: Observations,
  parameters: Parameters,
  speedMps: Float64Array,
  found: Float32Array,
  expected: Float32Array,
): void {
  const { count, timeS, walkFactor } = observations;
  const walk = { walk: 0, lengthM: 1 };
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
    const v = Math.max(1, speedMps[i]!);
    walkAt(parameters, v, walk);
    // A vehicle gains so much lateral acceleration in so much time at most: q v t <= (a / v^2)^2.
    const plausible = PLAUSIBLE_LATERAL_MPS2 ** 2 / (v ** 5 * PLAUSIBLE_TIME_S * walk.walk);
    const greatest = Math.max(1, Math.min(GREATEST_FACTOR, plausible));
    walkFactor[i] = Math.min(greatest, Math.max(LEAST_FACTOR, 2 * ratio - 1));
  }
}
