import type { FixColumns } from '../../shared/model/recording.ts';
import { counted, type FindingLog } from '../ingest/finding-log.ts';
import { distanceM } from './distance.ts';
import { sampledQuantile } from './quantiles.ts';
import { filterTrack, pickTrack, placeOf, type Track } from './track.ts';

/** A step of the clock larger than this without motion to match is a jump of the clock, s. */
const LEAST_JUMP_S = 1.5;
/** A forward step is looked into only when it would end the trip, s. */
const TRIP_GAP_S = 1200;
/** Length of the counter of GPS weeks, after which old receivers fall back to its start, s. */
const WEEK_ROLLOVER_S = 1024 * 604_800;

/** Speed between neighbours `i-1` and `i` of the track, m/s; NaN across a step of no time. */
function speedInto(track: Track, fixes: FixColumns, i: number): number {
  if (i < 1 || i >= track.rows.length) return NaN;
  const dt = track.utcS[i]! - track.utcS[i - 1]!;
  return dt > 0 && dt <= 30 ? stepM(track, fixes, i) / dt : NaN;
}

function stepM(track: Track, fixes: FixColumns, i: number): number {
  const [a, b] = [track.rows[i - 1]!, track.rows[i]!];
  return distanceM(fixes.latDeg[a]!, fixes.lonDeg[a]!, fixes.latDeg[b]!, fixes.lonDeg[b]!);
}

/**
 * Repairs jumps of the clock in mid-run: where the time leaps back or forward while the vehicle moves on as
 * before, the shorter part of the log is moved to join the longer one. What is not plainly such a jump is left.
 */
function repairJumps(track: Track, fixes: FixColumns, file: string, log: FindingLog): Track {
  const n = track.rows.length;
  const interval = sampledQuantile(n - 1, 0.5, (i) => {
    const dt = track.utcS[i + 1]! - track.utcS[i]!;
    return dt > 0 ? dt : NaN;
  });
  if (!(interval > 0)) return track;
  let utcS = track.utcS;
  let copied = false;
  for (let i = 1; i < n; i++) {
    const dt = utcS[i]! - utcS[i - 1]!;
    const backwards = dt < -LEAST_JUMP_S;
    if (!backwards && dt < TRIP_GAP_S) continue;
    const current: Track = { rows: track.rows, utcS };
    const before = speedInto(current, fixes, i - 1);
    const after = speedInto(current, fixes, i + 1);
    const step = stepM(current, fixes, i);
    // Moving before and after at like speed, and the step between them what one interval gives.
    const speed = (before + after) / 2;
    const carriesOn =
      before > 3 &&
      after > 3 &&
      Math.abs(before - after) < 0.3 * speed &&
      Math.abs(step / (speed * interval) - 1) < 0.5;
    const rollover = Math.abs(Math.abs(dt) - WEEK_ROLLOVER_S) < 86_400;
    if (!carriesOn && !(rollover && step < 1000)) continue;
    const move = dt - interval;
    if (!copied) {
      utcS = utcS.slice();
      copied = true;
    }
    const moveFirst = i <= n / 2;
    if (moveFirst) for (let j = 0; j < i; j++) utcS[j]! += move;
    else for (let j = i; j < n; j++) utcS[j]! -= move;
    log.note(
      rollover ? 'week-rollover' : 'clock-jump',
      'warning',
      (many) =>
        rollover
          ? `The receiver's week counter rolled over ${counted(many, 'time')} (1,024 weeks): times corrected`
          : `The clock jumps at ${counted(many, 'place')} (${move > 0 ? 'forward' : 'back'} by ${Math.abs(move).toFixed(0)} s at the first) while the vehicle moves on: the shorter part was moved to join`,
      placeOf(fixes, file, track.rows[i]!, utcS[i]!),
    );
  }
  return { rows: track.rows, utcS };
}

/** Puts fixes in the order of time and tells how many stood out of order. */
function sortByTime(track: Track, fixes: FixColumns, file: string, log: FindingLog): Track {
  const n = track.rows.length;
  let backwards = 0;
  for (let i = 1; i < n; i++) {
    if (track.utcS[i]! >= track.utcS[i - 1]!) continue;
    backwards++;
    log.note(
      'out-of-order',
      'warning',
      (many) => `Time runs back at ${counted(many, 'place')}: fixes put in the order of their times`,
      placeOf(fixes, file, track.rows[i]!, track.utcS[i]!),
    );
  }
  if (backwards === 0) return track;
  const order = Array.from({ length: n }, (_, i) => i);
  order.sort((a, b) => track.utcS[a]! - track.utcS[b]! || a - b);
  return pickTrack(track, order);
}

/** Leaves out fixes that repeat time and place of the one before. */
function dropRepeats(track: Track, fixes: FixColumns, file: string, log: FindingLog): Track {
  const { rows, utcS } = track;
  // Several fixes may share a stamp: a repeat is looked for among all of them.
  let groupStart = 0;
  return filterTrack(track, (i) => {
    if (i > 0 && utcS[i] !== utcS[i - 1]) groupStart = i;
    for (let j = groupStart; j < i; j++) {
      const [a, b] = [rows[j]!, rows[i]!];
      if (fixes.latDeg[a] !== fixes.latDeg[b] || fixes.lonDeg[a] !== fixes.lonDeg[b]) continue;
      log.note(
        'repeated',
        'info',
        (many) => `${counted(many, 'fix', 'fixes')} repeat time and place of another: left out`,
        placeOf(fixes, file, b, utcS[i]!),
        1,
      );
      return false;
    }
    // Absurd numbers of fixes under one stamp must not take quadratic time.
    if (i - groupStart > 1000) groupStart = i;
    return true;
  });
}

/** Fewest stamps shared by several fixes that make it the recorder's habit. */
const HABIT = 5;

/**
 * Several fixes under one stamp. Whole-second stamps of a recorder that lost the fractions: spread evenly
 * over their second (over the interval to the next stamp for two where the next second has none). Otherwise the
 * first of them is kept.
 */
function spreadShared(track: Track, fixes: FixColumns, file: string, log: FindingLog): Track {
  const { rows, utcS } = track;
  const n = rows.length;
  let groups = 0;
  let whole = true;
  for (let i = 0; i < n; i++) {
    if (i > 0 && utcS[i] === utcS[i - 1] && (i < 2 || utcS[i - 1] !== utcS[i - 2])) groups++;
    if (whole && !Number.isInteger(utcS[i]!)) whole = false;
  }
  if (groups === 0) return track;
  if (!whole || groups < HABIT) {
    return filterTrack(track, (i) => {
      if (i === 0 || utcS[i] !== utcS[i - 1]) return true;
      log.note(
        'same-time',
        'warning',
        (many) => `${counted(many, 'fix', 'fixes')} with the time of the one before but another place left out`,
        placeOf(fixes, file, rows[i]!, utcS[i]!),
        1,
      );
      return false;
    });
  }
  const spread = utcS.slice();
  for (let i = 0; i < n; ) {
    let end = i + 1;
    while (end < n && utcS[end] === utcS[i]) end++;
    const size = end - i;
    if (size > 1) {
      const gap = end < n ? utcS[end]! - utcS[i]! : 1;
      const span = size === 2 && gap === 2 ? 2 : Math.min(1, gap);
      for (let j = 1; j < size; j++) spread[i + j] = utcS[i]! + (span * j) / size;
      log.note(
        'shared-second',
        'warning',
        (many) =>
          `${counted(many, 'fix', 'fixes')} share a whole-second time with others (the recorder lost the fractions): spread evenly`,
        placeOf(fixes, file, rows[i]!, utcS[i]!),
        0,
        size,
      );
    }
    i = end;
  }
  return { rows, utcS: spread };
}

/**
 * Fixes of one vehicle with strictly increasing times: clock jumps repaired, order restored, repeats left out,
 * shared stamps spread. Each change and loss is noted.
 */
export function orderInTime(track: Track, fixes: FixColumns, file: string, log: FindingLog): Track {
  const repaired = repairJumps(track, fixes, file, log);
  const sorted = sortByTime(repaired, fixes, file, log);
  return spreadShared(dropRepeats(sorted, fixes, file, log), fixes, file, log);
}
