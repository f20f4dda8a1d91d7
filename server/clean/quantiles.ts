import { quantile } from 'simple-statistics';

/** At most about this many values are looked at: enough for a quantile of a million. */
const MOST_SAMPLES = 20_001;

/** Quantile of the finite values among `valueAt(0..count-1)`, evenly thinned; NaN when there is none. */
export function sampledQuantile(count: number, share: number, valueAt: (i: number) => number): number {
  const stride = Math.max(1, Math.floor(count / MOST_SAMPLES));
  const kept: number[] = [];
  for (let i = 0; i < count; i += stride) {
    const value = valueAt(i);
    if (Number.isFinite(value)) kept.push(value);
  }
  return kept.length === 0 ? NaN : quantile(kept, share);
}
