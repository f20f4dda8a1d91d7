import type { RunPassages } from '../../model/passage.ts';
import type { CantRegister } from '../../schema/cant-register.ts';

/** A register laid onto a run: offset and stretch, and how well they match. */
export interface RegisterFit {
  readonly offsetM: number;
  readonly stretch: number;
  /** Curves that a canted entry fell on. */
  readonly matched: number;
  /** Root mean square distance of curve and entry middles, m. */
  readonly rmsM: number;
}

/** Chainages of road or railway never stretch more than this against the measured line. */
const MOST_STRETCH = 0.02;

/** Entries that propose offsets; spread over the register, they are enough to meet the right one. */
const PROPOSERS = 30;

/**
 * Offset, stretch and direction that lay a register's canted entries onto the curves of a run, found from their
 * middles alone:
 * pairs of an entry and a curve propose an offset for either direction; the proposal that matches most curves within
 * `toleranceM` is refined by least squares. Null when fewer than three entries or curves match: then nothing but the
 * user knows.
 * Time O(curves^2 log entries).
 * Source: own method, common practice of matching landmarks; no source.
 */
export function fitRegister(register: CantRegister, run: RunPassages, toleranceM = 60): RegisterFit | null {
  const entries = register.entries
    .filter(
      (e) => e.fromM !== undefined && Math.max(Math.abs(e.cantMm ?? 0), 10 * Math.abs(e.superelevationPct ?? 0)) > 5,
    )
    .map((e) => (e.fromM! + (e.toM ?? e.fromM!)) / 2)
    .sort((a, b) => a - b);
  const curves = run.passages.map(({ curve }) => (curve.startM + curve.endM) / 2);
  if (entries.length < 3 || curves.length < 3) return null;
  const every = Math.ceil(entries.length / PROPOSERS);
  const proposers = entries.filter((_, i) => i % every === 0);
  let best: RegisterFit | null = null;
  for (const direction of [1, -1] as const) {
    for (const entry of proposers) {
      for (const curve of curves) {
        const offsetM = entry - direction * curve;
        const pairs = match(entries, curves, offsetM, direction, toleranceM);
        if (pairs.length < 3 || (best !== null && pairs.length < best.matched)) continue;
        const fit = refine(pairs, direction, offsetM);
        if (best === null || fit.matched > best.matched || fit.rmsM < best.rmsM) best = fit;
      }
    }
  }
  return best;
}

/** Each curve with the nearest entry within the tolerance; the tolerance grows with distance as a stretch would. */
function match(
  entries: readonly number[],
  curves: readonly number[],
  offsetM: number,
  direction: 1 | -1,
  toleranceM: number,
): [curve: number, entry: number][] {
  const pairs: [number, number][] = [];
  for (const curve of curves) {
    const wanted = offsetM + direction * curve;
    let low = 0;
    let high = entries.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (entries[middle]! < wanted) low = middle + 1;
      else high = middle;
    }
    const near = [entries[low - 1], entries[low]].filter((e) => e !== undefined);
    const entry = near.reduce((a, b) => (Math.abs(b - wanted) < Math.abs(a - wanted) ? b : a));
    if (Math.abs(entry - wanted) <= toleranceM) pairs.push([curve, entry]);
  }
  return pairs;
}

function refine(pairs: readonly [number, number][], direction: 1 | -1, offsetM: number): RegisterFit {
  const n = pairs.length;
  const meanCurve = pairs.reduce((sum, [c]) => sum + c, 0) / n;
  const meanEntry = pairs.reduce((sum, [, e]) => sum + e, 0) / n;
  let across = 0;
  let along = 0;
  for (const [c, e] of pairs) {
    across += (c - meanCurve) * (e - meanEntry);
    along += (c - meanCurve) ** 2;
  }
  const free = along > 0 ? across / along : direction;
  const stretch = Math.abs(free - direction) <= MOST_STRETCH ? free : direction;
  const offset = along > 0 ? meanEntry - stretch * meanCurve : offsetM;
  const square = pairs.reduce((sum, [c, e]) => sum + (e - offset - stretch * c) ** 2, 0);
  return { offsetM: offset, stretch, matched: n, rmsM: Math.sqrt(square / n) };
}
