import type { FixColumns } from '../../../shared/model/recording.ts';

/** A standing receiver is still noted at least this often, s. */
const STANDING_EVERY_S = 1;
/** A recorder holds fixes when it writes this many rows for each new position while moving. */
const LEAST_ROWS_PER_FIX = 1.5;

/**
 * Indices of the rows at which the receiver gave a new fix, for recorders that repeat the last fix in
 * every row of a faster sensor log; null when the file is no such log. A row counts as new when its
 * position changes, or when a second has passed on its clock with no change (standing still).
 */
export function changedFixes(fixes: FixColumns): Uint32Array | null {
  const { count, latDeg, lonDeg, utcS } = fixes;
  let changes = 0;
  let rowsBetween = 0;
  let sinceChange = 0;
  for (let i = 1; i < count; i++) {
    sinceChange++;
    if (latDeg[i] === latDeg[i - 1] && lonDeg[i] === lonDeg[i - 1]) continue;
    // Waits of more than 3 s are stops, not holding.
    if (utcS[i]! - utcS[i - sinceChange]! <= 3) {
      changes++;
      rowsBetween += sinceChange;
    }
    sinceChange = 0;
  }
  if (changes < 3 || rowsBetween / changes < LEAST_ROWS_PER_FIX) return null;
  const kept = new Uint32Array(count);
  let n = 0;
  let last = -1;
  for (let i = 0; i < count; i++) {
    const moved = last < 0 || latDeg[i] !== latDeg[last] || lonDeg[i] !== lonDeg[last];
    if (moved || !(Math.abs(utcS[i]! - utcS[last]!) < STANDING_EVERY_S)) {
      kept[n++] = i;
      last = i;
    }
  }
  return kept.slice(0, n);
}

/** The rows `kept` of all columns. */
export function selectFixes(fixes: FixColumns, kept: Uint32Array): FixColumns {
  const pick = <T extends Float64Array | Float32Array | Uint32Array | Uint8Array>(column: T): T => {
    const out = new (column.constructor as new (length: number) => T)(kept.length);
    for (let i = 0; i < kept.length; i++) out[i] = column[kept[i]!]!;
    return out;
  };
  const pickIf = <T extends Float32Array | Uint8Array>(column: T | null) => (column === null ? null : pick(column));
  return {
    count: kept.length,
    utcS: pick(fixes.utcS),
    latDeg: pick(fixes.latDeg),
    lonDeg: pick(fixes.lonDeg),
    elevationM: pickIf(fixes.elevationM),
    speedMps: pickIf(fixes.speedMps),
    courseRad: pickIf(fixes.courseRad),
    accuracyM: pickIf(fixes.accuracyM),
    hdop: pickIf(fixes.hdop),
    satellites: pickIf(fixes.satellites),
    fixQuality: pickIf(fixes.fixQuality),
    speedAccuracyMps: pickIf(fixes.speedAccuracyMps),
    courseAccuracyRad: pickIf(fixes.courseAccuracyRad),
    segment: pick(fixes.segment),
    row: pick(fixes.row),
  };
}
