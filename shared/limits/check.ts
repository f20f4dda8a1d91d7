import type { Limit, LimitBand, LimitSet } from '../schema/limit-set.ts';
import { criterionOf } from './criteria.ts';

export interface LimitSetProblem {
  /** `serious` makes the set unusable; `warning` is told to its owner. */
  readonly severity: 'warning' | 'serious';
  readonly message: string;
}

function reversed(low: number | undefined, high: number | undefined): boolean {
  return low !== undefined && high !== undefined && low > high;
}

function checkBand(limit: Limit, band: LimitBand): LimitSetProblem[] {
  const { id, sense } = criterionOf(limit.criterion);
  const problems: LimitSetProblem[] = [];
  if (reversed(band.minSpeedKmh, band.maxSpeedKmh) || reversed(band.minRadiusM, band.maxRadiusM)) {
    problems.push({ severity: 'serious', message: `${id}: a band ends before it begins` });
  }
  for (const value of [band.normal, band.exceptional]) {
    if (value !== null && !(value > 0)) {
      problems.push({ severity: 'serious', message: `${id}: a limit of ${String(value)} can never be met` });
    }
  }
  if (band.normal !== null && band.exceptional !== null) {
    const stricter = sense === 'most' ? band.exceptional < band.normal : band.exceptional > band.normal;
    if (stricter)
      problems.push({ severity: 'serious', message: `${id}: the exceptional value is stricter than the normal one` });
  }
  return problems;
}

/** A band that no speed and radius can reach, because an earlier one covers it whole. */
function isShadowed(band: LimitBand, earlier: readonly LimitBand[]): boolean {
  return earlier.some(
    (e) =>
      (e.minSpeedKmh ?? -Infinity) <= (band.minSpeedKmh ?? -Infinity) &&
      (e.maxSpeedKmh ?? Infinity) >= (band.maxSpeedKmh ?? Infinity) &&
      (e.minRadiusM ?? -Infinity) <= (band.minRadiusM ?? -Infinity) &&
      (e.maxRadiusM ?? Infinity) >= (band.maxRadiusM ?? Infinity),
  );
}

/** What is wrong with a limit set beyond its shape: doubled criteria, impossible or unreachable bands, wrong mode. */
export function checkLimitSet(set: LimitSet): LimitSetProblem[] {
  const problems: LimitSetProblem[] = [];
  const seen = new Set<string>();
  for (const limit of set.limits) {
    const { id, modes } = criterionOf(limit.criterion);
    if (seen.has(id)) problems.push({ severity: 'serious', message: `${id} stands twice` });
    seen.add(id);
    if (!modes.includes(set.mode))
      problems.push({ severity: 'warning', message: `${id} has no meaning for ${set.mode}` });
    limit.bands.forEach((band, i) => {
      problems.push(...checkBand(limit, band));
      if (isShadowed(band, limit.bands.slice(0, i))) {
        problems.push({
          severity: 'warning',
          message: `${id}: band ${String(i + 1)} never applies, an earlier one covers it`,
        });
      }
    });
  }
  return problems;
}
