import type { StretchFit } from './fit-stretch.ts';
import { changeLength, copyStretch, type Stretch } from './stretch-model.ts';

/** Chi-square below which a level or a difference of levels is not told from nothing. */
const LEAST_EVIDENCE = 9;
/** What deflection must exceed beyond that, since it is chosen from among the arcs that noise offers. */
const DEFLECTION_TOLL = 7;

/** Value of a level over its variance, of its deflection likewise, whichever speaks more for the curve. */
export function evidenceOf(fit: StretchFit, k: number): number {
  const { stretch, layout } = fit;
  const kappa = stretch.levels[k]!;
  const { deflection, deflectionVariance, variance } = deflectionOf(fit, k);
  void layout;
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

/**
 * The next simpler stretch, when some part of a fit is not told from nothing: the weakest level falls, or the two neighbours that
 * differ least become one. Null when everything stands; a stretch without levels when nothing is left of it.
 */
export function simplify(fit: StretchFit): Stretch | null {
  const { stretch, layout, covariance } = fit;
  const n = layout.size;
  let weakest = LEAST_EVIDENCE;
  let act: (() => Stretch) | null = null;
  for (let k = 0; k < stretch.levels.length; k++) {
    if (stretch.straight[k]!) continue;
    const evidence = evidenceOf(fit, k);
    if (evidence < weakest) {
      weakest = evidence;
      act = () => withoutLevel(stretch, k);
    }
    const next = k + 1;
    if (next < stretch.levels.length && !stretch.straight[next]!) {
      const [p, q] = [layout.level[k]!, layout.level[next]!];
      const difference = stretch.levels[next]! - stretch.levels[k]!;
      const variance = covariance[p * n + p]! + covariance[q * n + q]! - 2 * covariance[p * n + q]!;
      const contrast = (difference * difference) / Math.max(1e-20, variance);
      if (contrast < weakest) {
        weakest = contrast;
        act = () => merged(stretch, k);
      }
      const between = transient(fit, k);
      if (between !== null) act ??= between;
    }
  }
  for (let k = 0; k < stretch.levels.length; k++) {
    if (!stretch.straight[k]!) continue;
    // A straight in the middle shorter than twice its own sd: the neighbours join directly.
    const [c1, c2] = [layout.middle[k]!, layout.middle[k + 1]!];
    const gap =
      stretch.middles[k + 1]! -
      stretch.middles[k]! -
      (changeLength(stretch.squares[k]!) + changeLength(stretch.squares[k + 1]!)) / 2;
    const sd = Math.sqrt(
      Math.max(0, covariance[c1 * n + c1]! + covariance[c2 * n + c2]! - 2 * covariance[c1 * n + c2]!),
    );
    if (gap < 2 * sd && k > 0 && k + 1 < stretch.levels.length) act ??= () => withoutStraight(stretch, k);
  }
  return act === null ? null : act();
}

/** A level between two others that goes on in the same sense and is shorter than it is sure of: part of a transition. */
function transient(fit: StretchFit, k: number): (() => Stretch) | null {
  const { stretch, layout, covariance } = fit;
  const n = layout.size;
  const before = k > 0 ? stretch.levels[k - 1]! : 0;
  const own = stretch.levels[k]!;
  const after = stretch.levels[k + 1] ?? 0;
  if ((own - before) * (after - own) <= 0) return null;
  const [c1, c2] = [layout.middle[k]!, layout.middle[k + 1]!];
  const length = stretch.middles[k + 1]! - stretch.middles[k]!;
  const sd = Math.sqrt(Math.max(0, covariance[c1 * n + c1]! + covariance[c2 * n + c2]! - 2 * covariance[c1 * n + c2]!));
  if (length > 2.5 * sd) return null;
  return () => withoutLevel(stretch, k);
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
