import type { CriterionId, LimitBand, LimitSet } from '../schema/limit-set.ts';
import { CRITERIA } from './criteria.ts';
import { describeSource, entryOf } from './lookup.ts';

/** One criterion of two sets side by side; null where a set has none. */
export interface LimitDifference {
  readonly criterion: CriterionId;
  readonly first: { readonly bands: readonly LimitBand[]; readonly source: string } | null;
  readonly second: { readonly bands: readonly LimitBand[]; readonly source: string } | null;
  /** True when both give the same values over the same bands, whatever their sources. */
  readonly same: boolean;
}

function sameBand(a: LimitBand, b: LimitBand): boolean {
  return (
    a.minSpeedKmh === b.minSpeedKmh &&
    a.maxSpeedKmh === b.maxSpeedKmh &&
    a.minRadiusM === b.minRadiusM &&
    a.maxRadiusM === b.maxRadiusM &&
    a.normal === b.normal &&
    a.exceptional === b.exceptional
  );
}

/** Every criterion that either set carries, in the order of the curve sheet. */
export function compareLimitSets(first: LimitSet, second: LimitSet): LimitDifference[] {
  const rows: LimitDifference[] = [];
  for (const { id } of CRITERIA) {
    const a = entryOf(first, id);
    const b = entryOf(second, id);
    if (a === null && b === null) continue;
    rows.push({
      criterion: id,
      first: a && { bands: a.bands, source: describeSource(a) },
      second: b && { bands: b.bands, source: describeSource(b) },
      same:
        a !== null &&
        b !== null &&
        a.bands.length === b.bands.length &&
        a.bands.every((band, i) => sameBand(band, b.bands[i]!)),
    });
  }
  return rows;
}
