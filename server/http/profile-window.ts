import type { ProfileTable } from '../report/index.ts';
import type { ProfileWindow } from '../../shared/schema/api.ts';

/** A window with this many places at most is sent whole. */
const MOST_POINTS = 20_000;

/**
 * A window of a profile thinned to about `points` places. Places are grouped in order; of each group the
 * one of largest |utilisation| is kept, else of largest |lateral acceleration|, so that no hotspot is lost at any zoom.
 * NaN becomes null.
 */
export function profileWindow(table: ProfileTable, fromM: number, toM: number, points: number): ProfileWindow {
  const s = table.s_m ?? [];
  const first = lowerBound(s, fromM);
  const end = Math.min(s.length, lowerBound(s, toM) + 1);
  const begin = Math.max(0, first - 1);
  const count = Math.max(0, end - begin);
  const wanted = Math.max(2, Math.min(MOST_POINTS, Math.floor(points)));
  const keep = count <= wanted ? range(begin, end) : worstOfGroups(table, begin, end, wanted);
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

function worstOfGroups(table: ProfileTable, begin: number, end: number, groups: number): number[] {
  const { utilisation = [], lateral_track_ms2: lateral = [], observed = [] } = table;
  const keep: number[] = [];
  for (let g = 0; g < groups; g++) {
    const a = begin + Math.floor((g * (end - begin)) / groups);
    const b = begin + Math.floor(((g + 1) * (end - begin)) / groups);
    let best = a;
    let bestRank = -1;
    for (let i = a; i < b; i++) {
      const u = utilisation[i]!;
      // Utilisation where there is one outranks lateral acceleration; an unobserved place is kept before a calm one.
      const rank = Number.isFinite(u) ? 1000 + Math.abs(u) : Math.abs(lateral[i]!) + (observed[i] === 0 ? 100 : 0);
      if (rank > bestRank) {
        bestRank = rank;
        best = i;
      }
    }
    keep.push(best);
  }
  if (keep[0] !== begin) keep.unshift(begin);
  if (keep.at(-1) !== end - 1) keep.push(end - 1);
  return keep;
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
