/** Values looked at; steps show in a few thousand. */
const MOST_VALUES = 4000;
/** Fewer different values than this say nothing of a step. */
const LEAST_DISTINCT = 4;
/** Share of values that must lie on multiples of the step. */
const ON_STEP = 0.98;

/**
 * Last-digit step of a column: the smallest difference between two different values, when nearly all values lie on
 * multiples of it from the first. 0 when there is none (values finer than that, or too few).
 * @param noise Differences below this are rounding of the storage, not steps.
 */
export function stepOf(values: Float64Array | Float32Array, noise: number): number {
  const stride = Math.max(1, Math.floor(values.length / MOST_VALUES));
  const distinct = new Set<number>();
  for (let i = 0; i < values.length; i += stride) if (Number.isFinite(values[i]!)) distinct.add(values[i]!);
  if (distinct.size < LEAST_DISTINCT) return 0;
  const sorted = Float64Array.from(distinct).sort();
  const differences: number[] = [];
  for (let i = 1; i < sorted.length; i++) {
    const difference = sorted[i]! - sorted[i - 1]!;
    if (difference > noise) differences.push(difference);
  }
  if (differences.length < LEAST_DISTINCT - 1) return 0;
  differences.sort((a, b) => a - b);
  const smallest = differences[0]!;
  // Average the differences of one step: conversion between units has blurred each.
  let [sum, count] = [0, 0];
  for (const difference of differences) {
    if (difference > 1.5 * smallest) break;
    sum += difference;
    count++;
  }
  let step = sum / count;
  const origin = sorted[0]!;
  // Refine over the whole range, from near to far, so that multiples far off stay in phase.
  for (const reach of [20, 400, 8000, 160_000]) {
    for (const value of sorted) {
      const multiple = Math.round((value - origin) / step);
      if (multiple > reach / 2 && multiple <= reach) {
        const refined = (value - origin) / multiple;
        if (Math.abs(refined / step - 1) < 0.3 / multiple + 1e-12) step = refined;
      }
    }
  }
  const tolerance = Math.max(0.05 * step, noise);
  if (tolerance > 0.2 * step) return 0;
  let on = 0;
  for (const value of sorted) {
    const off = (value - origin) / step;
    if (Math.abs(off - Math.round(off)) * step <= tolerance) on++;
  }
  return on >= ON_STEP * sorted.length ? step : 0;
}
