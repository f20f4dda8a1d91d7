import type { CriterionId, Limit, LimitBand, LimitSet } from '../schema/limit-set.ts';

export type Tier = 'normal' | 'exceptional';

/** A limit that applies, with the tier it was taken from. */
export interface AppliedLimit {
  readonly value: number;
  readonly tier: Tier;
  readonly limit: Limit;
}

/** 60 km/h arrives from m/s as 60.00000000000001: bounds hold within this, km/h. */
const ROUND_OFF_KMH = 1e-9;

/** True when a band holds at a speed (km/h) and radius (m); both its bounds belong to it. */
function bandApplies(band: LimitBand, speedKmh: number, radiusM: number): boolean {
  return (
    speedKmh >= (band.minSpeedKmh ?? -Infinity) - ROUND_OFF_KMH &&
    speedKmh <= (band.maxSpeedKmh ?? Infinity) + ROUND_OFF_KMH &&
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
 * The limit of one entry that applies at a speed (km/h) and radius (m): its first matching band; null without band or
 * value.
 */
export function limitIn(limit: Limit, tier: Tier, speedKmh: number, radiusM: number): AppliedLimit | null {
  for (const band of limit.bands) {
    if (!bandApplies(band, speedKmh, radiusM)) continue;
    const found = bandValue(band, tier);
    return found === null ? null : { value: found.value, tier: found.tier, limit };
  }
  return null;
}

/** The same of a whole set; null, too, when it has no entry for the criterion, which is then not assessed. */
export function limitFor(
  set: LimitSet,
  criterion: CriterionId,
  tier: Tier,
  speedKmh: number,
  radiusM: number,
): AppliedLimit | null {
  const limit = entryOf(set, criterion);
  return limit === null ? null : limitIn(limit, tier, speedKmh, radiusM);
}

/** Source in one line: document, clause, year and how the value was obtained. */
export function describeSource(limit: Limit): string {
  const { document, clause, year, status, note } = limit.source;
  const words = { read: 'read', memory: 'from memory', operator: "operator's own", computed: 'computed' } as const;
  const where = [document, clause].filter((part) => part !== '').join(', ');
  return `${where}${year === null ? '' : ` (${String(year)})`}; ${words[status]}${note === undefined ? '' : `; ${note}`}`;
}
