import type { Curve } from '../../shared/model/alignment.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { SimulatedTruth, TrueCurve } from '../../data/synthetic/simulate.ts';
import { lastNotAbove } from '../../data/synthetic/line.ts';

/** A fitted curve reduced to what is compared, its places in true chainage. */
export interface FittedCurve<T> {
  readonly source: T;
  readonly curvaturePerM: number;
  readonly fromM: number;
  readonly toM: number;
}

export interface Matching<T> {
  readonly pairs: readonly { readonly truth: TrueCurve; readonly fitted: FittedCurve<T> }[];
  readonly missed: readonly TrueCurve[];
  /** Lie on no true curve of their hand. */
  readonly invented: readonly FittedCurve<T>[];
  /** Lie on a true curve that another one matches better. */
  readonly splits: readonly FittedCurve<T>[];
}

/**
 * Chainage of the fit -> true chainage: both are known at the fixes, between them linear. A constant offset or a slow
 * drift of the log's own chainage is no error of a tangent point.
 */
export function trueChainage(chainageM: ArrayLike<number>, truth: SimulatedTruth): (fitM: number) => number {
  const last = chainageM.length - 1;
  return (fitM) => {
    const i = Math.max(0, Math.min(lastNotAbove(chainageM, fitM), last - 1));
    const from = chainageM[i]!;
    const span = chainageM[i + 1]! - from;
    const own = truth.chainageM[i + 1]! - truth.chainageM[i]!;
    if (span <= 0) return truth.chainageM[i]! + (fitM - from);
    return truth.chainageM[i]! + ((fitM - from) * own) / span;
  };
}

export function placeCurves(curves: readonly Curve[], motion: Motion, truth: SimulatedTruth): FittedCurve<Curve>[] {
  const toTrue = trueChainage(motion.chainageM, truth);
  return curves.map((curve) => ({
    source: curve,
    curvaturePerM: curve.curvaturePerM.value,
    fromM: toTrue(curve.entry.middleM.value),
    toM: toTrue(curve.exit.middleM.value),
  }));
}

/** One to one by greatest overlap between the middles of the ends, same hand, over half of the shorter. */
export function matchCurves<T>(truth: readonly TrueCurve[], fitted: readonly FittedCurve<T>[]): Matching<T> {
  const candidates = truth.flatMap((curve) =>
    fitted.flatMap((fit) => {
      if (Math.sign(fit.curvaturePerM) !== Math.sign(curve.curvaturePerM)) return [];
      const from = curve.entry.middleM;
      const to = curve.exit.middleM;
      const overlap = Math.min(to, fit.toM) - Math.max(from, fit.fromM);
      const shorter = Math.min(to - from, fit.toM - fit.fromM);
      return overlap > 0.5 * shorter ? [{ curve, fit, overlap }] : [];
    }),
  );
  candidates.sort((a, b) => b.overlap - a.overlap);
  const pairs = new Map<TrueCurve, FittedCurve<T>>();
  const used = new Set<FittedCurve<T>>();
  const touching = new Set(candidates.map((candidate) => candidate.fit));
  for (const { curve, fit } of candidates) {
    if (pairs.has(curve) || used.has(fit)) continue;
    pairs.set(curve, fit);
    used.add(fit);
  }
  return {
    pairs: [...pairs].map(([curve, fit]) => ({ truth: curve, fitted: fit })),
    missed: truth.filter((curve) => !pairs.has(curve)),
    invented: fitted.filter((fit) => !touching.has(fit)),
    splits: fitted.filter((fit) => touching.has(fit) && !used.has(fit)),
  };
}
