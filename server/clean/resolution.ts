/** Values looked at; steps show in a few thousand. */
const MOST_VALUES = 4000;
/** Fewer different values than this say nothing of a step. */
const LEAST_DISTINCT = 4;
/** Share of values that must lie on multiples of the step. */
const ON_STEP = 0.98;

/** Differences that the common divisor is taken of. */
const MOST_DIFFERENCES = 500;

/** Common divisor of two lengths by Euclid, remainders within `noise` of nothing (or of the divisor) taken for none. */
function commonDivisor(a: number, b: number, noise: number): number {
  while (b > noise) {
    const rest = a - b * Math.floor(a / b);
    a = b;
    b = Math.min(rest, b - rest) <= noise ? 0 : rest;
  }
  return a;
}

/** Mean of the smallest differences, those of one step when values are dense; conversion has blurred each. */
function smallestDifference(differences: readonly number[]): number {
  let [sum, count] = [0, 0];
  for (const difference of differences) {
    if (difference > 1.5 * differences[0]!) break;
    sum += difference;
    count++;
  }
  return sum / count;
}

/** `step` refined over the range of the values, from near to far, so that multiples far off stay in phase. */
function refine(step: number, sorted: Float64Array): number {
  const origin = sorted[0]!;
  for (const reach of [20, 400, 8000, 160_000, 3_200_000]) {
    for (const value of sorted) {
      const multiple = Math.round((value - origin) / step);
      if (multiple <= reach / 2 || multiple > reach) continue;
      const refined = (value - origin) / multiple;
      if (Math.abs(refined / step - 1) < 0.3 / multiple) step = refined;
    }
  }
  return step;
}

function liesOn(step: number, sorted: Float64Array, noise: number): boolean {
  const tolerance = Math.max(0.05 * step, noise);
  if (tolerance > 0.2 * step) return false;
  let on = 0;
  for (const value of sorted) {
    const off = (value - sorted[0]!) / step;
    if (Math.abs(off - Math.round(off)) * step <= tolerance) on++;
  }
  return on >= ON_STEP * sorted.length;
}

/**
 * Last-digit step of a column: a length of which nearly all values are multiples from the first. Tried are the smallest
 * difference between values (dense columns) and their common divisor at several levels of blur (sparse ones, or ones
 * rounded twice); the largest that holds is the step. 0 when none does (values finer than that, or too few).
 * @param noise Rounding of the storage: smaller differences are none, and steps near it are not looked for.
 * @param customary Steps tried beside those that the values suggest: a few values off them do not hide them.
 */
export function stepOf(values: Float64Array | Float32Array, noise: number, customary: readonly number[] = []): number {
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
  const first = differences.slice(0, MOST_DIFFERENCES);
  const candidates = [1, 10, 100].map((blur) =>
    first.reduce((step, difference) => commonDivisor(difference, step, blur * noise)),
  );
  candidates.push(smallestDifference(differences), ...customary);
  let best = 0;
  for (const candidate of candidates) {
    if (candidate < 5 * noise) continue;
    const step = refine(candidate, sorted);
    if (step > best && liesOn(step, sorted, noise)) best = step;
  }
  return best;
}
