import type { Estimate } from '../model/alignment.ts';

/** Quantile of a two-sided 95 % interval, the one that Estimate.low and high carry. */
const Z95 = 1.959963984540054;

/** A value with its interval at the chosen confidence; low is null when nothing bounds it from below. */
export interface Interval {
  readonly value: number;
  readonly low: number | null;
  readonly high: number;
}

/**
 * Quantile z of a two-sided interval of the given confidence, for example 1.95996 for 0.95.
 * Rational approximation of the normal quantile, relative error below 1.2e-9.
 * Errors: RangeError outside (0, 1). Source: P. J. Acklam's coefficients (from memory; checked against the error
 * function in a test).
 */
export function twoSidedQuantile(confidence: number): number {
  if (!(confidence > 0 && confidence < 1))
    throw new RangeError(`A confidence of ${String(confidence)} is not between 0 and 1`);
  const p = (1 + confidence) / 2;
  if (p <= 0.97575) {
    const q = p - 0.5;
    const r = q * q;
    const top =
      ((((-39.69683028665376 * r + 220.9460984245205) * r - 275.9285104469687) * r + 138.357751867269) * r -
        30.66479806614716) *
        r +
      2.506628277459239;
    const bottom =
      ((((-54.47609879822406 * r + 161.5858368580409) * r - 155.6989798598866) * r + 66.80131188771972) * r -
        13.28068155288572) *
        r +
      1;
    return (q * top) / bottom;
  }
  const q = Math.sqrt(-2 * Math.log(1 - p));
  const top =
    ((((-0.007784894002430293 * q - 0.3223964580411365) * q - 2.400758277161838) * q - 2.549732539343734) * q +
      4.374664141464968) *
      q +
    2.938163982698783;
  const bottom =
    (((0.007784695709041462 * q + 0.3224671290700398) * q + 2.445134137142996) * q + 3.754408661907416) * q + 1;
  return -top / bottom;
}

/** The interval of an estimate at another confidence: its 95 % distances scaled by z / 1.96. */
export function intervalAt(estimate: Estimate, z: number): { value: number; low: number; high: number } {
  const scale = z / Z95;
  return {
    value: estimate.value,
    low: estimate.value - (estimate.value - estimate.low) * scale,
    high: estimate.value + (estimate.high - estimate.value) * scale,
  };
}

/**
 * Interval of a figure that depends on independent inputs: the distances that each input's own interval moves it by,
 * combined as the root of their squares, upwards and downwards apart.
 * value: at the best inputs; ups and downs: the figure with one input at a time at its unfavourable and favourable end.
 */
export function combine(value: number, downs: readonly number[], ups: readonly number[]): Interval {
  return {
    value,
    low: value - Math.hypot(...downs.map((d) => Math.max(value - d, 0))),
    high: value + Math.hypot(...ups.map((u) => Math.max(u - value, 0))),
  };
}
