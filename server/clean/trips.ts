import type { FixColumns } from '../../shared/model/recording.ts';
import { counted, type FindingLog } from '../ingest/finding-log.ts';
import { distanceM } from './distance.ts';
import { sampledQuantile } from './quantiles.ts';
import { pickTrack, placeOf, type Track } from './track.ts';

/** No fix for longer than this ends a trip, s. Station stops and tunnels are shorter. */
const TRIP_GAP_S = 1200;
/** No vehicle of interest is faster, m/s. */
const MOST_SPEED_MPS = 120;
/** Change of speed that no vehicle of interest exceeds in a moment, and one that none keeps up, m/s². */
const MOST_ACCELERATION_MPS2 = 6;
const LASTING_ACCELERATION_MPS2 = 2;
const MOMENT_S = 2;
/** Error of position allowed between two fixes before motion has to explain their distance, m. */
const POSITION_SLACK_M = 25;
/** A receiver whose positions lagged behind catches up by leaps ahead of at most this, m, ... */
const MOST_CATCH_UP_M = 1000;
/** ... no farther beside the line of travel than this, m, or this share of the leap. */
const CATCH_UP_ASIDE_M = 25;
const CATCH_UP_ASIDE = 0.5;
/** Fixes that a chain must gain to take such a leap: a lone false fix ahead is left out instead. */
const CATCH_UP_COST = 3;
/** Way over which the direction of travel is read, m. */
const DIRECTION_WAY_M = 30;
/** Pieces back that a piece may join to. */
const LOOK_BACK = 60;

/** Stretch of a track without a jump, `start`..`end` exclusive. */
interface Piece {
  readonly start: number;
  readonly end: number;
}

function between(track: Track, fixes: FixColumns, i: number, j: number): number {
  const [a, b] = [track.rows[i]!, track.rows[j]!];
  return distanceM(fixes.latDeg[a]!, fixes.lonDeg[a]!, fixes.latDeg[b]!, fixes.lonDeg[b]!);
}

/** Speed at fix `i` within its piece, from the fixes a few seconds beside it; 0 for a lone fix. */
function speedNear(track: Track, fixes: FixColumns, piece: Piece, i: number): number {
  let a = i;
  let b = i;
  while (a > piece.start && track.utcS[i]! - track.utcS[a]! < 3) a--;
  while (b < piece.end - 1 && track.utcS[b]! - track.utcS[i]! < 3) b++;
  const dt = track.utcS[b]! - track.utcS[a]!;
  return dt > 0 ? Math.min(MOST_SPEED_MPS, between(track, fixes, a, b) / dt) : 0;
}

/** True when a vehicle near `speed` at either end can have gone `distance` in `dt` seconds. */
function reachable(distance: number, dt: number, speed: number): boolean {
  const gained =
    MOST_ACCELERATION_MPS2 * Math.min(dt, MOMENT_S) + LASTING_ACCELERATION_MPS2 * Math.max(0, dt - MOMENT_S);
  const fastest = Math.min(MOST_SPEED_MPS, speed + gained);
  return distance <= fastest * dt + POSITION_SLACK_M;
}

/** Cuts where the position jumps by more than motion explains. */
function cutAtJumps(track: Track, fixes: FixColumns): Piece[] {
  const pieces: Piece[] = [];
  let start = 0;
  const n = track.rows.length;
  // Speed of the last seconds, from an anchor a few seconds back.
  let anchor = 0;
  for (let i = 1; i < n; i++) {
    const dt = track.utcS[i]! - track.utcS[i - 1]!;
    const step = between(track, fixes, i - 1, i);
    if (step > POSITION_SLACK_M) {
      while (anchor < i - 2 && track.utcS[i - 1]! - track.utcS[anchor]! > 5) anchor++;
      anchor = Math.max(anchor, start);
      const span = track.utcS[i - 1]! - track.utcS[anchor]!;
      // At the start of a piece the speed is not known yet: look ahead instead.
      const speed =
        span > 0
          ? between(track, fixes, anchor, i - 1) / span
          : speedNear(track, fixes, { start: i, end: Math.min(n, i + 20) }, i);
      if (!reachable(step, dt, speed)) {
        pieces.push({ start, end: i });
        start = anchor = i;
      }
    }
  }
  if (n > 0) pieces.push({ start, end: n });
  return pieces;
}

/** East and north from fix `i` to fix `j`, m; for directions only. */
function offset(track: Track, fixes: FixColumns, i: number, j: number): [east: number, north: number] {
  const [a, b] = [track.rows[i]!, track.rows[j]!];
  const north = (fixes.latDeg[b]! - fixes.latDeg[a]!) * 111_195;
  let dLon = fixes.lonDeg[b]! - fixes.lonDeg[a]!;
  if (dLon > 180) dLon -= 360;
  if (dLon < -180) dLon += 360;
  return [dLon * 111_195 * Math.cos((fixes.latDeg[a]! * Math.PI) / 180), north];
}

/**
 * True when the leap from the end of `previous` to the start of `next` goes ahead along the line of travel: positions
 * that lagged behind (filtered by a phone, or propagated through a tunnel) and caught up.
 */
function isCatchUp(track: Track, fixes: FixColumns, previous: Piece, next: Piece): boolean {
  const [east, north] = offset(track, fixes, previous.end - 1, next.start);
  const leap = Math.hypot(east, north);
  if (leap > MOST_CATCH_UP_M) return false;
  const aheadOf = (from: number, to: number): boolean => {
    const [dirEast, dirNorth] = offset(track, fixes, from, to);
    const way = Math.hypot(dirEast, dirNorth);
    if (way < DIRECTION_WAY_M) return false;
    const ahead = (east * dirEast + north * dirNorth) / way;
    const aside = Math.abs(east * dirNorth - north * dirEast) / way;
    return ahead > 0 && (aside < CATCH_UP_ASIDE_M || aside < CATCH_UP_ASIDE * leap);
  };
  let from = previous.end - 1;
  while (from > previous.start && between(track, fixes, from, previous.end - 1) < DIRECTION_WAY_M) from--;
  let to = next.start;
  while (to < next.end - 1 && between(track, fixes, next.start, to) < DIRECTION_WAY_M) to++;
  return aheadOf(from, previous.end - 1) || aheadOf(next.start, to);
}

/** Fixes that may be left out on either side of a jump, where false ones crept up to it by steps small enough. */
const MOST_TRIM = 8;

/** How a piece is joined to an earlier one: fixes left out at the end of that one and at the start of this. */
interface Join {
  readonly cost: number;
  readonly trimEnd: number;
  readonly trimStart: number;
}

const NO_JOIN: Join = { cost: Infinity, trimEnd: 0, trimStart: 0 };

/** The cheapest way (in fixes lost) from `previous` to `next` that motion explains. */
function joinOf(track: Track, fixes: FixColumns, previous: Piece, next: Piece, adjacent: boolean): Join {
  const fits = (i: number, j: number): boolean => {
    const speed = Math.max(
      speedNear(track, fixes, { start: previous.start, end: i + 1 }, i),
      speedNear(track, fixes, { start: j, end: next.end }, j),
    );
    return reachable(between(track, fixes, i, j), track.utcS[j]! - track.utcS[i]!, speed);
  };
  if (fits(previous.end - 1, next.start)) return { cost: 0, trimEnd: 0, trimStart: 0 };
  if (isCatchUp(track, fixes, previous, next)) return { cost: CATCH_UP_COST, trimEnd: 0, trimStart: 0 };
  if (!adjacent) return NO_JOIN;
  for (let cost = 1; cost <= MOST_TRIM; cost++) {
    for (let trimStart = 0; trimStart <= cost; trimStart++) {
      const [i, j] = [previous.end - 1 - (cost - trimStart), next.start + trimStart];
      if (i >= previous.start && j < next.end && fits(i, j)) return { cost, trimEnd: cost - trimStart, trimStart };
    }
  }
  return NO_JOIN;
}

/**
 * The chain of pieces with most fixes in which each can be reached from the one before: the stretches of the track
 * that it takes, in order. Some fixes beside a jump may be left out of their piece.
 */
function bestChain(track: Track, fixes: FixColumns, pieces: readonly Piece[]): Piece[] {
  const score = new Float64Array(pieces.length);
  const from = new Int32Array(pieces.length).fill(-1);
  const joins: Join[] = pieces.map(() => NO_JOIN);
  let best = 0;
  for (let k = 0; k < pieces.length; k++) {
    const piece = pieces[k]!;
    const size = piece.end - piece.start;
    score[k] = size;
    for (let m = k - 1; m >= Math.max(0, k - LOOK_BACK); m--) {
      const gain = score[m]! + size;
      if (gain <= score[k]!) continue;
      const join = joinOf(track, fixes, pieces[m]!, piece, m === k - 1);
      if (gain - join.cost > score[k]!) {
        score[k] = gain - join.cost;
        from[k] = m;
        joins[k] = join;
      }
    }
    if (score[k]! > score[best]!) best = k;
  }
  const chain: Piece[] = [];
  let trimEnd = 0;
  for (let k = best; k >= 0; k = from[k]!) {
    const join = from[k]! >= 0 ? joins[k]! : { trimStart: 0, trimEnd: 0 };
    chain.push({ start: pieces[k]!.start + join.trimStart, end: pieces[k]!.end - trimEnd });
    trimEnd = join.trimEnd;
  }
  return chain.reverse();
}

/** A left-over stretch is a trip of its own only when it has at least this many fixes and this long. */
const LEAST_TRIP_FIXES = 8;
const LEAST_TRIP_S = 20;
/** A left-over stretch this long inside the time of a chain splits the chain instead of being left out. */
const LEAST_SPLIT_S = 60;
/** Share of left-over fixes that lie between fixes of the chain, each within about one interval, for a second vehicle. */
const INTERLEAVED = 0.5;
/** Leaps after which a log is no journey: the rest is left out. */
const MOST_DEPTH = 40;

/**
 * One stretch of time into trips: the best chain of plausible pieces is a trip. What is left over of it is
 * - a second vehicle, when it alternates with the chain fix by fix;
 * - looked at in the same way, when it lies before or after the chain or is long: the run is split there;
 * - false fixes, left out and counted, when it is short.
 */
function untangle(track: Track, fixes: FixColumns, file: string, log: FindingLog, out: Track[], depth: number): void {
  const n = track.rows.length;
  if (n === 0) return;
  const pieces = cutAtJumps(track, fixes);
  if (pieces.length === 1) {
    out.push(track);
    return;
  }
  if (depth > MOST_DEPTH) {
    dropJumps(track, fixes, file, log);
    return;
  }
  const chain = bestChain(track, fixes, pieces);
  noteCatchUps(track, fixes, file, log, chain);
  const stretch = (from: number, to: number) =>
    pickTrack(
      track,
      Array.from({ length: to - from }, (_, i) => from + i),
    );
  const durationS = (from: number, to: number) => (to > from ? track.utcS[to - 1]! - track.utcS[from]! : 0);
  const apart = (from: number, to: number): void => {
    log.note(
      'position-leap',
      'serious',
      (many) =>
        `At ${counted(many, 'place')} the position leaps farther than any motion explains and stays there: the run is split, and one side may lie beside the line`,
      placeOf(fixes, file, track.rows[from === 0 ? to : from]!, track.utcS[from === 0 ? to : from]!),
    );
    untangle(stretch(from, to), fixes, file, log, out, depth + 1);
  };

  const second = alternating(track, chain);
  if (second !== null) {
    log.note(
      'two-vehicles',
      'warning',
      (many) => `The log alternates between ${counted(many + 1, 'vehicle')}: each is a run of its own`,
      placeOf(fixes, file, track.rows[second[0]!]!, track.utcS[second[0]!]!),
    );
    untangle(pickTrack(track, second), fixes, file, log, out, depth + 1);
  }
  let taken: number[] = [];
  let at = 0;
  for (const piece of [...chain, { start: n, end: n }]) {
    const [from, to] = [at, piece.start];
    const edge = from === 0 || to === n;
    const long = to - from >= LEAST_TRIP_FIXES && durationS(from, to) >= (edge ? LEAST_TRIP_S : LEAST_SPLIT_S);
    if (to > from && second === null) {
      if (long) {
        if (!edge) {
          out.push(pickTrack(track, taken));
          taken = [];
        }
        apart(from, to);
      } else dropJumps(stretch(from, to), fixes, file, log);
    }
    for (let i = piece.start; i < piece.end; i++) taken.push(i);
    at = piece.end;
  }
  if (taken.length > 0) out.push(pickTrack(track, taken));
}

/** What the chain leaves over, when more than half of it stands between neighbours of the chain; else null. */
function alternating(track: Track, chain: readonly Piece[]): number[] | null {
  const n = track.rows.length;
  const isTaken = new Uint8Array(n);
  let taken = 0;
  for (const { start, end } of chain) {
    isTaken.fill(1, start, end);
    taken += end - start;
  }
  const rest: number[] = [];
  let flanked = 0;
  for (let i = 0; i < n; i++) {
    if (isTaken[i] === 1) continue;
    rest.push(i);
    if (isTaken[i - 1] === 1 && isTaken[i + 1] === 1) flanked++;
  }
  return rest.length >= LEAST_TRIP_FIXES && rest.length >= 0.2 * taken && flanked >= INTERLEAVED * rest.length
    ? rest
    : null;
}

function noteCatchUps(track: Track, fixes: FixColumns, file: string, log: FindingLog, chain: readonly Piece[]): void {
  for (let c = 1; c < chain.length; c++) {
    const [previous, next] = [chain[c - 1]!, chain[c]!];
    if (joinOf(track, fixes, previous, next, false).cost === 0) continue;
    log.note(
      'catch-up',
      'warning',
      (many) =>
        `At ${counted(many, 'place')} the positions leap ahead along the line (the receiver lagged behind and caught up): what lies just before is less sure`,
      placeOf(fixes, file, track.rows[next.start]!, track.utcS[next.start]!),
    );
  }
}

function dropJumps(track: Track, fixes: FixColumns, file: string, log: FindingLog): void {
  for (let i = 0; i < track.rows.length; i++) {
    log.note(
      'impossible-jump',
      'warning',
      (many) => `${counted(many, 'fix', 'fixes')} too far away for any motion to explain left out`,
      placeOf(fixes, file, track.rows[i]!, track.utcS[i]!),
      1,
    );
  }
}

/**
 * Segments of the file whose times overlap for long are different vehicles; all others follow one another.
 * @returns Tracks in file order, one for each vehicle.
 */
export function separateVehicles(track: Track, fixes: FixColumns, file: string, log: FindingLog): Track[] {
  const spans = new Map<number, { from: number; to: number; members: number[] }>();
  for (let i = 0; i < track.rows.length; i++) {
    const segment = fixes.segment[track.rows[i]!]!;
    const utc = track.utcS[i]!;
    const span = spans.get(segment);
    if (span === undefined) spans.set(segment, { from: utc, to: utc, members: [i] });
    else {
      span.from = Math.min(span.from, utc);
      span.to = Math.max(span.to, utc);
      span.members.push(i);
    }
  }
  if (spans.size < 2) return [track];
  // Each vehicle takes the segments that begin after its last one ended.
  const vehicles: { to: number; members: number[] }[] = [];
  for (const span of [...spans.values()].sort((a, b) => a.from - b.from)) {
    const short = Math.min(60, 0.5 * (span.to - span.from));
    const repeats = (vehicle: { members: number[] }) => sameThere(track, fixes, vehicle.members, span.members);
    const free = vehicles.find((vehicle) => span.from >= vehicle.to - short || repeats(vehicle));
    if (free === undefined) vehicles.push({ to: span.to, members: span.members });
    else {
      free.members = free.members.concat(span.members);
      free.to = Math.max(free.to, span.to);
    }
  }
  if (vehicles.length === 1) return [track];
  log.note(
    'two-vehicles',
    'warning',
    () => `The log holds ${vehicles.length} vehicles or recorders at the same time: each is a run of its own`,
    placeOf(fixes, file, track.rows[0]!, track.utcS[0]!),
  );
  return vehicles.map(({ members }) =>
    pickTrack(
      track,
      members.sort((a, b) => a - b),
    ),
  );
}

/** True when the two sets of fixes tell the same journey: a block written twice. */
function sameThere(track: Track, fixes: FixColumns, a: readonly number[], b: readonly number[]): boolean {
  const at = new Map<number, number>();
  for (const i of a) at.set(track.utcS[i]!, i);
  let [common, same] = [0, 0];
  for (const j of b) {
    const i = at.get(track.utcS[j]!);
    if (i === undefined) continue;
    common++;
    if (between(track, fixes, i, j) < POSITION_SLACK_M) same++;
  }
  return common >= 3 && same >= 0.9 * common;
}

/** One vehicle's fixes, in time order, into trips. */
export function splitTrips(track: Track, fixes: FixColumns, file: string, log: FindingLog): Track[] {
  const trips: Track[] = [];
  const n = track.rows.length;
  const typical = sampledQuantile(n - 1, 0.5, (i) => track.utcS[i + 1]! - track.utcS[i]!);
  // A log of sparse fixes has gaps by nature.
  const tripGapS = Math.max(TRIP_GAP_S, 20 * (Number.isFinite(typical) ? typical : 0));
  let start = 0;
  for (let i = 1; i <= n; i++) {
    if (i < n && track.utcS[i]! - track.utcS[i - 1]! <= tripGapS) continue;
    if (i < n) {
      log.note(
        'trip-end',
        'info',
        (many) =>
          `${counted(many, 'gap')} of more than ${(tripGapS / 60).toFixed(0)} minutes: a new run begins after each`,
        placeOf(fixes, file, track.rows[i]!, track.utcS[i]!),
      );
    }
    const indices = Array.from({ length: i - start }, (_, k) => start + k);
    untangle(i - start === n ? track : pickTrack(track, indices), fixes, file, log, trips, 0);
    start = i;
  }
  return trips.sort((a, b) => a.utcS[0]! - b.utcS[0]!);
}
