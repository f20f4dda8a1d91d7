import type { StretchFit } from './fit-stretch.ts';
import { changeLength, copyStretch, type Stretch } from './stretch-model.ts';

/** Chi-square below which a level or a difference of levels is not told from nothing. */
const LEAST_EVIDENCE = 9;
/** What deflection must exceed beyond that, since it is chosen from among the arcs that noise offers. */
const DEFLECTION_TOLL = 7;

/** Value of a level over its variance, of its deflection likewise, whichever speaks more for the curve. */
function evidenceOf(fit: StretchFit, k: number): number {
  const kappa = fit.stretch.levels[k]!;
  const { deflection, deflectionVariance, variance } = deflectionOf(fit, k);
  return Math.max((kappa * kappa) / variance, (deflection * deflection) / deflectionVariance - DEFLECTION_TOLL);
}

/** Deflection kappa (c2 - c1) of level k with its variance, and the variance of kappa. */
export function deflectionOf(fit: StretchFit, k: number) {
  const { stretch, layout, covariance } = fit;
  const n = layout.size;
  const level = layout.level[k]!;
  const [c1, c2] = [layout.middle[k]!, layout.middle[k + 1]!];
  const kappa = stretch.levels[k]!;
  const length = stretch.middles[k + 1]! - stretch.middles[k]!;
  const at = (p: number, q: number) => covariance[p * n + q]!;
  const deflectionVariance =
    length * length * at(level, level) +
    kappa * kappa * (at(c1, c1) + at(c2, c2) - 2 * at(c1, c2)) +
    2 * length * kappa * (at(level, c2) - at(level, c1));
  return {
    deflection: kappa * length,
    deflectionVariance: Math.max(1e-12, deflectionVariance),
    variance: at(level, level),
  };
}

/** Rise of the objective that a simpler stretch may cost: three parameters fewer at about ln n each. */
export const ALLOWED_RISE = 13;
/** For a short straight between two curves: it is told from none at the 5 % level, chi-square with two degrees of freedom. */
const ALLOWED_WITHOUT_STRAIGHT = 6;

/** A simpler stretch with the evidence against it: small where the part that falls is hardly told from nothing. */
export interface Simplification {
  readonly evidence: number;
  readonly stretch: Stretch;
  /** Rise of the objective that it may cost. */
  readonly allowed: number;
}

/**
 * Simpler stretches that a fit suggests, the least missed first: a level that is not told from nothing falls, neighbours that
 * hardly differ become one, a level in the middle of a change belongs to the change, a straight shorter than it is sure of goes.
 * The refit decides: these are linear approximations, and those of a bad fit mislead.
 */
export function simplifications(fit: StretchFit): Simplification[] {
  const { stretch, layout, covariance } = fit;
  const n = layout.size;
  const found: Simplification[] = [];
  for (let k = 0; k < stretch.levels.length; k++) {
    if (stretch.straight[k]!) {
      if (k === 0 || k + 1 === stretch.levels.length) continue;
      const [c1, c2] = [layout.middle[k]!, layout.middle[k + 1]!];
      const taken = (changeLength(stretch.squares[k]!) + changeLength(stretch.squares[k + 1]!)) / 2;
      const gap = stretch.middles[k + 1]! - stretch.middles[k]! - taken;
      const variance = covariance[c1 * n + c1]! + covariance[c2 * n + c2]! - 2 * covariance[c1 * n + c2]!;
      const evidence = (gap * gap) / Math.max(1e-6, variance);
      if (evidence < 4)
        found.push({ evidence, stretch: withoutStraight(stretch, k), allowed: ALLOWED_WITHOUT_STRAIGHT });
      continue;
    }
    const evidence = evidenceOf(fit, k);
    if (evidence < LEAST_EVIDENCE) found.push({ evidence, stretch: withoutLevel(stretch, k), allowed: ALLOWED_RISE });
    if (isTransient(fit, k))
      found.push({ evidence: LEAST_EVIDENCE / 2, stretch: withoutLevel(stretch, k), allowed: ALLOWED_RISE });
    const next = k + 1;
    if (next >= stretch.levels.length || stretch.straight[next]!) continue;
    const [p, q] = [layout.level[k]!, layout.level[next]!];
    const difference = stretch.levels[next]! - stretch.levels[k]!;
    const variance = covariance[p * n + p]! + covariance[q * n + q]! - 2 * covariance[p * n + q]!;
    const contrast = (difference * difference) / Math.max(1e-20, variance);
    if (contrast < LEAST_EVIDENCE)
      found.push({ evidence: contrast, stretch: merged(stretch, k), allowed: ALLOWED_RISE });
  }
  return found.sort((a, b) => a.evidence - b.evidence);
}

/** A level between two others that goes on in the same sense and is shorter than it is sure of: part of a transition. */
function isTransient(fit: StretchFit, k: number): boolean {
  const { stretch, layout, covariance } = fit;
  const n = layout.size;
  const before = k > 0 ? stretch.levels[k - 1]! : 0;
  const own = stretch.levels[k]!;
  const after = stretch.levels[k + 1] ?? 0;
  if ((own - before) * (after - own) <= 0) return false;
  const [c1, c2] = [layout.middle[k]!, layout.middle[k + 1]!];
  const length = stretch.middles[k + 1]! - stretch.middles[k]!;
  const variance = covariance[c1 * n + c1]! + covariance[c2 * n + c2]! - 2 * covariance[c1 * n + c2]!;
  return length * length <= 6.25 * Math.max(0, variance);
}

/**
 * Richer stretches for a fit that leaves too much unexplained: each level in turn as two levels, or as two with a straight between.
 */
export function divisions(fit: StretchFit): Stretch[] {
  const out: Stretch[] = [];
  const { stretch } = fit;
  for (let k = 0; k < stretch.levels.length; k++) {
    const [a, b] = [stretch.middles[k]!, stretch.middles[k + 1]!];
    if (stretch.straight[k]! || b - a < 20) continue;
    const kappa = stretch.levels[k]!;
    const short = Math.min(changeLength(stretch.squares[k]!), (b - a) / 6) ** 2;
    for (const share of [0.35, 0.65]) {
      const two = copyStretch(stretch);
      two.levels.splice(k, 1, kappa * (share < 0.5 ? 1.3 : 0.8), kappa * (share < 0.5 ? 0.8 : 1.3));
      two.straight.splice(k, 1, false, false);
      two.middles.splice(k + 1, 0, a + share * (b - a));
      two.squares.splice(k + 1, 0, short);
      out.push(two);
    }
    const parted = copyStretch(stretch);
    parted.levels.splice(k, 1, kappa * 1.3, 0, kappa * 1.3);
    parted.straight.splice(k, 1, false, true, false);
    parted.middles.splice(k + 1, 0, a + 0.36 * (b - a), a + 0.64 * (b - a));
    parted.squares.splice(k + 1, 0, short, short);
    out.push(parted);
  }
  return out;
}

/**
 * The same stretch with the direct change before level j, between curves of opposite hand, as two changes that touch where the
 * curvature is zero: their slopes may differ then.
 *
 * @returns null where the change is not of that kind
 */
export function partedReverse(stretch: Stretch, j: number): Stretch | null {
  const [before, after] = [stretch.levels[j - 1]!, stretch.levels[j]!];
  if (before * after >= 0) return null;
  const length = Math.max(2, changeLength(stretch.squares[j]!));
  const from = stretch.middles[j]! - length / 2;
  const zero = from + (length * Math.abs(before)) / (Math.abs(before) + Math.abs(after));
  const to = from + length;
  const parted = copyStretch(stretch);
  parted.levels.splice(j, 0, 0);
  parted.straight.splice(j, 0, true);
  parted.middles.splice(j, 1, (from + zero) / 2, (zero + to) / 2);
  parted.squares.splice(j, 1, (zero - from) ** 2, (to - zero) ** 2);
  return parted;
}

/** The same stretch with shorter and with longer changes: other minima to start from. */
export function restarts(stretch: Stretch): Stretch[] {
  return [0.08, 5].map((factor) => {
    const other = copyStretch(stretch);
    for (let j = 0; j < other.squares.length; j++) other.squares[j] = Math.max(1, other.squares[j]! * factor);
    return other;
  });
}

/** Level k gone: its two changes become one in their middle; with nothing but straights beside it, they become one straight. */
function withoutLevel(from: Stretch, k: number): Stretch {
  const stretch = copyStretch(from);
  const straightBefore = k === 0 || stretch.straight[k - 1]!;
  const straightAfter = k === stretch.levels.length - 1 || stretch.straight[k + 1]!;
  if (straightBefore && straightAfter) {
    if (k === 0) {
      // Also the straight that follows belongs to the approach now.
      const drop = stretch.levels.length > 1 ? 2 : 1;
      stretch.levels.splice(0, drop);
      stretch.straight.splice(0, drop);
      stretch.middles.splice(0, drop === 2 ? 2 : 2);
      stretch.squares.splice(0, 2);
    } else {
      stretch.levels.splice(k - 1, 2);
      stretch.straight.splice(k - 1, 2);
      stretch.middles.splice(k, 2);
      stretch.squares.splice(k, 2);
    }
    return stretch;
  }
  joinChanges(stretch, k);
  stretch.levels.splice(k, 1);
  stretch.straight.splice(k, 1);
  return stretch;
}

/** The straight k in the middle gone: one direct change between its neighbours. */
function withoutStraight(from: Stretch, k: number): Stretch {
  const stretch = copyStretch(from);
  joinChanges(stretch, k);
  stretch.levels.splice(k, 1);
  stretch.straight.splice(k, 1);
  return stretch;
}

/** Levels k and k + 1 as one, at their mean by length. */
function merged(from: Stretch, k: number): Stretch {
  const stretch = copyStretch(from);
  const a = stretch.middles[k + 1]! - stretch.middles[k]!;
  const b = stretch.middles[k + 2]! - stretch.middles[k + 1]!;
  stretch.levels[k] = (a * stretch.levels[k]! + b * stretch.levels[k + 1]!) / (a + b);
  stretch.levels.splice(k + 1, 1);
  stretch.straight.splice(k + 1, 1);
  stretch.middles.splice(k + 1, 1);
  stretch.squares.splice(k + 1, 1);
  return stretch;
}

/** Changes k and k + 1 become one over the whole of both. */
function joinChanges(stretch: Stretch, k: number): void {
  const [a, b] = [stretch.middles[k]!, stretch.middles[k + 1]!];
  const [la, lb] = [changeLength(stretch.squares[k]!), changeLength(stretch.squares[k + 1]!)];
  const from = a - la / 2;
  const to = b + lb / 2;
  stretch.middles.splice(k, 2, (from + to) / 2);
  stretch.squares.splice(k, 2, (to - from) ** 2);
}
