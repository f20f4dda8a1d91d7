import Flatbush from 'flatbush';
import type { LineMember } from '../../shared/model/line.ts';
import type { RunTrace } from './input.ts';

/** Metres per radian of latitude, mean Earth radius: matching tolerates the 0.3 % of the sphere. */
const EARTH_RADIUS_M = 6371008.8;
/** Places farther apart than this are not the same track: receivers wander by a few metres, parallel lines stand further off. */
const REACH_M = 40;
/** Places of the run that are looked up, m apart. */
const STEP_M = 20;
/** Along a run the chainage on the reference may drift from dead reckoning by this before another branch is considered. */
const DRIFT_M = 300;

/** A run's places as a searchable index. */
export interface TraceIndex {
  readonly trace: RunTrace;
  readonly tree: Flatbush;
  readonly cosLat0: number;
  readonly lon0Deg: number;
}

/** Index of the reference's places for `matchRun`. */
export function indexTrace(trace: RunTrace): TraceIndex {
  const count = trace.chainageM.length;
  const tree = new Flatbush(Math.max(1, count));
  const lat0 = count > 0 ? trace.latDeg[count >> 1]! : 0;
  const lon0Deg = count > 0 ? trace.lonDeg[count >> 1]! : 0;
  const cosLat0 = Math.cos(radians(lat0));
  for (let i = 0; i < count; i++) {
    const x = eastM(trace.lonDeg[i]!, lon0Deg, cosLat0);
    const y = radians(trace.latDeg[i]!) * EARTH_RADIUS_M;
    tree.add(x, y, x, y);
  }
  if (count === 0) tree.add(0, 0, 0, 0);
  tree.finish();
  return { trace, tree, cosLat0, lon0Deg };
}

/**
 * Lays a run on a reference: for places every 20 m the nearest place of the reference within 40 m
 * whose course agrees (or is opposite), continuity along the run preferred where the reference
 * passes twice; then the longest part that never turns back. Null when less than two places match.
 *
 * @returns chainage pairs and the share of the run's places that lie on the reference.
 */
export function matchRun(reference: TraceIndex, run: RunTrace): LineMember | null {
  const same = collect(reference, run, 1);
  const opposite = collect(reference, run, -1);
  const direction = same.runM.length >= opposite.runM.length ? 1 : -1;
  const found = direction === 1 ? same : opposite;
  const keep = longestMonotone(found.lineM, direction);
  if (keep.length < 2) return null;
  return {
    runId: run.runId,
    direction,
    overlap: keep.length / found.lookedUp,
    chainageM: keep.map((i) => found.runM[i]!),
    lineChainageM: keep.map((i) => found.lineM[i]!),
  };
}

interface Pairs {
  readonly runM: number[];
  readonly lineM: number[];
  readonly lookedUp: number;
}

function collect(reference: TraceIndex, run: RunTrace, direction: 1 | -1): Pairs {
  const { trace, tree, cosLat0, lon0Deg } = reference;
  const pairs = { runM: [] as number[], lineM: [] as number[], lookedUp: 0 };
  let next = -Infinity;
  for (let i = 0; i < run.chainageM.length; i++) {
    const s = run.chainageM[i]!;
    if (s < next) continue;
    next = s + STEP_M;
    pairs.lookedUp++;
    const lat = run.latDeg[i]!;
    const x = eastM(run.lonDeg[i]!, lon0Deg, cosLat0);
    const y = radians(lat) * EARTH_RADIUS_M;
    // The index scales easting by one cosine for the whole line: widen the box where that is short.
    const stretch = cosLat0 / Math.max(0.05, Math.cos(radians(lat)));
    const reach = REACH_M * Math.max(1, stretch);
    const expected = pairs.runM.length > 0 ? pairs.lineM.at(-1)! + direction * (s - pairs.runM.at(-1)!) : NaN;
    let best = -1;
    let bestCost = Infinity;
    for (const j of tree.search(x - reach, y - REACH_M, x + reach, y + REACH_M)) {
      if (Math.cos(run.courseRad[i]! - trace.courseRad[j]!) * direction < 0.7) continue;
      const east = (eastM(trace.lonDeg[j]!, lon0Deg, cosLat0) - x) / stretch;
      const distance = Math.hypot(east, radians(trace.latDeg[j]! - lat) * EARTH_RADIUS_M);
      if (distance > REACH_M) continue;
      const drift = Number.isNaN(expected) ? 0 : Math.abs(trace.chainageM[j]! - expected);
      const cost = distance + (drift > DRIFT_M ? REACH_M : 0);
      if (cost < bestCost) {
        bestCost = cost;
        best = j;
      }
    }
    if (best >= 0) {
      pairs.runM.push(s);
      pairs.lineM.push(trace.chainageM[best]!);
    }
  }
  return pairs;
}

/** Indices of a longest subsequence of `values` that ascends (direction 1) or descends (-1); patience sorting, O(n log n). */
export function longestMonotone(values: readonly number[], direction: 1 | -1): number[] {
  const tails: number[] = [];
  const before = new Int32Array(values.length).fill(-1);
  for (let i = 0; i < values.length; i++) {
    const v = direction * values[i]!;
    let low = 0;
    let high = tails.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (direction * values[tails[middle]!]! < v) low = middle + 1;
      else high = middle;
    }
    if (low > 0) before[i] = tails[low - 1]!;
    tails[low] = i;
  }
  const chain: number[] = [];
  for (let i = tails.at(-1) ?? -1; i >= 0; i = before[i]!) chain.push(i);
  return chain.reverse();
}

/** Chainage on the reference for a chainage of the run; NaN outside the matched part. */
export function toLineChainage(member: LineMember, runM: number): number {
  const s = member.chainageM;
  if (s.length < 2 || runM < s[0]! - STEP_M || runM > s.at(-1)! + STEP_M) return NaN;
  let low = 1;
  let high = s.length - 1;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (s[middle]! < runM) low = middle + 1;
    else high = middle;
  }
  const [s0, s1] = [s[low - 1]!, s[low]!];
  const [l0, l1] = [member.lineChainageM[low - 1]!, member.lineChainageM[low]!];
  return l0 + ((runM - s0) / (s1 - s0)) * (l1 - l0);
}

function eastM(lonDeg: number, lon0Deg: number, cosLat0: number): number {
  const d = lonDeg - lon0Deg;
  return radians(d > 180 ? d - 360 : d < -180 ? d + 360 : d) * cosLat0 * EARTH_RADIUS_M;
}

function radians(deg: number): number {
  return (deg * Math.PI) / 180;
}
