import type { CriterionId, Limit, LimitBand, LimitSet } from '../schema/limit-set.ts';

export type Tier = 'normal' | 'exceptional';

/** A limit that applies, with the tier it was taken from. */
export interface AppliedLimit {
  readonly value: number;
  readonly tier: Tier;
  readonly limit: Limit;
}

/** True when a band holds at a speed (km/h) and radius (m); both its bounds belong to it. */
export function bandApplies(band: LimitBand, speedKmh: number, radiusM: number): boolean {
  return (
    speedKmh >= (band.minSpeedKmh ?? -Infinity) &&
    speedKmh <= (band.maxSpeedKmh ?? Infinity) &&
    radiusM >= (band.minRadiusM ?? -Infinity) &&
    radiusM <= (band.maxRadiusM ?? Infinity)
  );
}

/** Value of a band for a tier; a set without an exceptional value keeps its normal one there. */
export function bandValue(band: LimitBand, tier: Tier): { value: number; tier: Tier } | null {
  if (tier === 'exceptional' && band.exceptional !== null) return { value: band.exceptional, tier };
  return band.normal === null ? null : { value: band.normal, tier: 'normal' };
}

/** The set's entry for a criterion, or null. */
export function entryOf(set: LimitSet, criterion: CriterionId): Limit | null {
  for (const limit of set.limits) if (limit.criterion === criterion) return limit;
  return null;
}

/**
 * The limit that applies at a speed (km/h) and radius (m): the first matching band of the criterion's entry.
 * Null when the set has no entry, no matching band or no value: the criterion is then not assessed.
 */
export function limitFor(
  set: LimitSet,
  criterion: CriterionId,
  tier: Tier,
  speedKmh: number,
  radiusM: number,
): AppliedLimit | null {
  const limit = entryOf(set, criterion);
  if (limit === null) return null;
  for (const band of limit.bands) {
    if (!bandApplies(band, speedKmh, radiusM)) continue;
    const found = bandValue(band, tier);
    return found === null ? null : { value: found.value, tier: found.tier, limit };
  }
  return null;
}

/** Source in one line: document, clause, year and how the value was obtained. */
export function describeSource(limit: Limit): string {
  const { document, clause, year, status, note } = limit.source;
  const words = { read: 'read', memory: 'from memory', operator: "operator's own", computed: 'computed' } as const;
  const where = [document, clause].filter((part) => part !== '').join(', ');
  return `${where}${year === null ? '' : ` (${String(year)})`}; ${words[status]}${note === undefined ? '' : `; ${note}`}`;
}
