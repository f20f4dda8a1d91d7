import { quantileSorted } from 'simple-statistics';

/** Quantile of absolute values; NaN when there are none. */
export function absoluteQuantile(values: readonly number[], share: number): number {
  if (values.length === 0) return Number.NaN;
  const sorted = values.map((value) => Math.abs(value)).sort((a, b) => a - b);
  return quantileSorted(sorted, share);
}

/** Root mean square without the given share of largest absolute values. */
export function rootMeanSquare(values: readonly number[], trimmed = 0): number {
  const kept = values
    .map((value) => value * value)
    .sort((a, b) => a - b)
    .slice(0, Math.ceil(values.length * (1 - trimmed)));
  return kept.length === 0 ? Number.NaN : Math.sqrt(kept.reduce((sum, value) => sum + value, 0) / kept.length);
}

/** Share of true entries; NaN when there are none. */
export function share(judged: readonly { readonly held: boolean }[]): number {
  return judged.length === 0 ? Number.NaN : judged.filter((one) => one.held).length / judged.length;
}
