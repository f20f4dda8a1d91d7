import type { FixColumns } from '../../shared/model/recording.ts';

/** Fewer satellites than a position with height needs. */
const LEAST_SATELLITES = 4;
const MOST_HDOP = 5;
const MOST_ACCURACY_M = 50;

/** True when the receiver itself says that a fix is poor: few satellites, high dilution, propagated or no fix. */
export function isWeak(fixes: FixColumns, row: number): boolean {
  const satellites = fixes.satellites?.[row] ?? 255;
  const quality = fixes.fixQuality?.[row] ?? 255;
  return (
    satellites < LEAST_SATELLITES ||
    quality === 0 ||
    quality === 3 ||
    (fixes.hdop?.[row] ?? 0) > MOST_HDOP ||
    (fixes.accuracyM?.[row] ?? 0) > MOST_ACCURACY_M
  );
}
