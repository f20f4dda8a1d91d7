import type { ProfileTable } from '../report/index.ts';
import type { ProfileWindow } from '../../shared/schema/api.ts';

/** A window with this many places at most is sent whole. */
export const MOST_POINTS = 20_000;
/** Places kept of one group: the worst, and the extremes of curvature and of speed. */
const KEPT_OF_GROUP = 5;

/**
 * A window of a profile thinned to about `points` places. Places are grouped in order; of each group are kept the
 * one of largest |utilisation| (where nothing is judged: of largest |lateral acceleration|) and those of
 * least and greatest curvature and speed, so that no hotspot and no peak is lost at any zoom. NaN becomes null.
 */
export function profileWindow(table: ProfileTable, fromM: number, toM: number, points: number): ProfileWindow {
  const s = table.s_m ?? [];
  const begin = Math.max(0, lowerBound(s, fromM) - 1);
  const end = Math.min(s.length, lowerBound(s, toM) + 1);
  const count = Math.max(0, end - begin);
  const wanted = Math.max(2, Math.min(MOST_POINTS, Math.floor(points)));
  const keep = count <= wanted ? range(begin, end) : thinned(table, begin, end, wanted);
  const columns: Record<string, (number | null)[]> = {};
  for (const [name, column] of Object.entries(table)) {
    columns[name] = keep.map((i) => {
      const v = column[i] ?? NaN;
      return Number.isFinite(v) ? v : null;
    });
  }
  const stored = s.length > 1 ? (s[s.length - 1]! - s[0]!) / (s.length - 1) : 0;
  return { fromM, toM, stepM: keep.length > 0 ? (stored * count) / keep.length : 0, columns };
}

function thinned(table: ProfileTable, begin: number, end: number, wanted: number): number[] {
  const { curvature_1_m: curvature = [], speed_ms: speed = [] } = table;
  const groups = Math.max(1, Math.floor(wanted / KEPT_OF_GROUP));
  const keep = new Set<number>([begin]);
  for (let g = 0; g < groups; g++) {
    const a = begin + Math.floor((g * (end - begin)) / groups);
    const b = begin + Math.floor(((g + 1) * (end - begin)) / groups);
    keep.add(largest(a, b, (i) => badness(table, i)));
    for (const column of [curvature, speed]) {
      keep.add(largest(a, b, (i) => column[i]!));
      keep.add(largest(a, b, (i) => -column[i]!));
    }
  }
  keep.add(end - 1);
  return [...keep].sort((i, j) => i - j);
}

/** Utilisation where there is one outranks lateral acceleration; an unobserved place is kept before a calm one. */
function badness(
  { utilisation = [], lateral_track_ms2: lateral = [], observed = [] }: ProfileTable,
  i: number,
): number {
  const u = utilisation[i]!;
  return Number.isFinite(u) ? 1000 + Math.abs(u) : Math.abs(lateral[i]!) + (observed[i] === 0 ? 100 : 0);
}

/** Index in [begin, end) where `value` is largest; NaN counts as smallest. */
function largest(begin: number, end: number, value: (i: number) => number): number {
  let best = begin;
  let most = -Infinity;
  for (let i = begin; i < end; i++) {
    const v = value(i);
    if (v > most) {
      most = v;
      best = i;
    }
  }
  return best;
}

/** First index whose value is at least `value`. */
function lowerBound(ascending: ArrayLike<number>, value: number): number {
  let low = 0;
  let high = ascending.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (ascending[middle]! < value) low = middle + 1;
    else high = middle;
  }
  return low;
}

function range(begin: number, end: number): number[] {
  return Array.from({ length: Math.max(0, end - begin) }, (_, i) => begin + i);
}
