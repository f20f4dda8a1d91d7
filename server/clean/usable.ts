import type { FixColumns } from '../../shared/model/recording.ts';
import { counted, type FindingLog } from '../ingest/finding-log.ts';
import { placeOf, type Track } from './track.ts';

/** Start of GPS time, 6 January 1980, and an end no log of today reaches: times outside are wrong. */
const EARLIEST_S = 315_964_800;
const LATEST_S = 4_102_444_800;

/**
 * The fixes with a time and a place, in file order. Left out and counted: no time, a time before satellite
 * navigation or after 2100 (unless the whole log has no date), latitude and longitude both exactly zero
 * (how receivers write "nowhere").
 */
export function usableFixes(fixes: FixColumns, file: string, log: FindingLog): Track {
  const { count, utcS, latDeg, lonDeg } = fixes;
  let [timed, dated, nowhere] = [0, 0, 0];
  for (let i = 0; i < count; i++) {
    const utc = utcS[i]!;
    if (!Number.isFinite(utc)) continue;
    timed++;
    if (utc >= EARLIEST_S && utc <= LATEST_S) dated++;
    if (latDeg[i] === 0 && lonDeg[i] === 0) nowhere++;
  }
  const judgeDates = dated > 0.5 * timed;
  const judgeNowhere = nowhere < 0.9 * timed;
  const rows = new Uint32Array(count);
  let n = 0;
  for (let i = 0; i < count; i++) {
    const utc = utcS[i]!;
    if (!Number.isFinite(utc)) {
      log.note(
        'no-time',
        'warning',
        (many) => `${counted(many, 'fix', 'fixes')} without a time left out`,
        { file, line: fixes.row[i]! },
        1,
      );
    } else if (judgeDates && (utc < EARLIEST_S || utc > LATEST_S)) {
      log.note(
        'wrong-time',
        'warning',
        (many) => `${counted(many, 'fix', 'fixes')} with an impossible date left out`,
        placeOf(fixes, file, i, utc),
        1,
      );
    } else if (judgeNowhere && latDeg[i] === 0 && lonDeg[i] === 0) {
      log.note(
        'nowhere',
        'warning',
        (many) => `${counted(many, 'fix', 'fixes')} at latitude 0, longitude 0 (receiver without a fix) left out`,
        placeOf(fixes, file, i, utc),
        1,
      );
    } else rows[n++] = i;
  }
  const kept = rows.slice(0, n);
  const times = new Float64Array(n);
  for (let i = 0; i < n; i++) times[i] = utcS[kept[i]!]!;
  return { rows: kept, utcS: times };
}
