import type { Estimate } from '../../shared/model/alignment.ts';

/** Normal factor of a two-sided 95 % interval. */
const Z95 = 1.959963984540054;

/**
 * Curvature of one curve from several runs: the weighted mean with weights 1/variance. When the runs
 * disagree more than their standard errors allow, a common variance between runs is added (method of
 * moments), since multipath repeats at the same place and the floor is then not sigma / sqrt(N):
 *
 *   Q = sum w_r (k_r - k)^2,   tau^2 = max(0, (Q - (N - 1)) / (sum w - sum w^2 / sum w))
 *
 * @param curvaturePerM one value a run, signed alike, 1/m
 * @param sdPerM their standard deviations, 1/m, positive
 * @returns the combined estimate and Q / (N - 1) (NaN for one run)
 *
 * Source: DerSimonian and Laird (1986), random-effects estimator: from memory.
 */
export function combineCurvature(
  curvaturePerM: readonly number[],
  sdPerM: readonly number[],
): { estimate: Estimate; consistency: number } {
  const n = curvaturePerM.length;
  const weights = sdPerM.map((sd) => 1 / (sd * sd));
  const fixed = weightedMean(curvaturePerM, weights);
  let q = 0;
  let sumSquares = 0;
  for (let i = 0; i < n; i++) {
    q += weights[i]! * (curvaturePerM[i]! - fixed.mean) ** 2;
    sumSquares += weights[i]! ** 2;
  }
  const spread = fixed.sum - sumSquares / fixed.sum;
  const between = n > 1 && spread > 0 ? Math.max(0, (q - (n - 1)) / spread) : 0;
  const pooled = weightedMean(
    curvaturePerM,
    sdPerM.map((sd) => 1 / (sd * sd + between)),
  );
  const sd = Math.sqrt(1 / pooled.sum);
  return {
    estimate: { value: pooled.mean, sd, low: pooled.mean - Z95 * sd, high: pooled.mean + Z95 * sd },
    consistency: n > 1 ? q / (n - 1) : NaN,
  };
}

function weightedMean(values: readonly number[], weights: readonly number[]): { mean: number; sum: number } {
  let sum = 0;
  let total = 0;
  for (let i = 0; i < values.length; i++) {
    sum += weights[i]!;
    total += weights[i]! * values[i]!;
  }
  return { mean: total / sum, sum };
}

/** Radius from a signed curvature and its interval; the upper end is infinite when the interval reaches straight. */
export function radiusFromCurvature(k: Estimate): Estimate {
  const sign = Math.sign(k.value) || 1;
  const value = 1 / Math.abs(k.value);
  const [weak, strong] = sign > 0 ? [k.low, k.high] : [-k.high, -k.low];
  return { value, sd: (k.sd / Math.abs(k.value)) * value, low: 1 / strong, high: weak > 0 ? 1 / weak : Infinity };
}
