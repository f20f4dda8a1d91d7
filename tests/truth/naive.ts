import type { Run } from '../../shared/model/run.ts';
import type { SimulatedRun } from '../../data/synthetic/simulate.ts';
import { matchCurves, trueChainage, type FittedCurve } from './match.ts';

const SHORTEST_CHORD_M = 8;
const SHORTEST_CURVE_M = 10;

/** What a plain local circle fit makes of the positions: no interval, no noise model. */
interface NaiveFit {
  readonly chainageM: Float64Array;
  readonly curvaturePerM: Float64Array;
  readonly curves: readonly { readonly fromM: number; readonly toM: number; readonly curvaturePerM: number }[];
}

/**
 * Baseline: circle fitted to the positions within a time window of each fix,
 * curvature thresholds with hysteresis, radius from the median curvature over the middle half.
 *
 * @param halfWindowS half of the window, s
 * @param thresholdPerM curvature above which a curve begins; it ends below 0.7 of it, and must be SHORTEST_CURVE_M long
 */
function naiveFit(run: Run, halfWindowS: number, thresholdPerM: number): NaiveFit {
  const { xM, yM, timeS, count } = run.fixes;
  const chainageM = new Float64Array(count);
  const curvaturePerM = new Float64Array(count);
  const reach = Math.max(2, Math.round(halfWindowS / run.intervalS));
  for (let i = 1; i < count; i += 1) {
    const step = Math.hypot(xM[i]! - xM[i - 1]!, yM[i]! - yM[i - 1]!);
    const dt = timeS[i]! - timeS[i - 1]!;
    chainageM[i] = chainageM[i - 1]! + (step / dt < 0.5 ? 0 : step);
  }
  for (let i = 0; i < count; i += 1) {
    const from = Math.max(0, i - reach);
    const to = Math.min(count - 1, i + reach);
    curvaturePerM[i] = circleCurvature(xM, yM, from, to);
  }
  const curves: { fromM: number; toM: number; curvaturePerM: number }[] = [];
  let start = -1;
  for (let i = 0; i <= count; i += 1) {
    const k = i < count ? curvaturePerM[i]! : 0;
    if (start < 0) {
      if (Math.abs(k) > thresholdPerM) start = i;
    } else if (Math.abs(k) < 0.7 * thresholdPerM || Math.sign(k) !== Math.sign(curvaturePerM[start]!)) {
      // The middle half: transitions and the smeared ends would pull the median down.
      const quarter = Math.floor((i - start) / 4);
      const inside = Array.from(curvaturePerM.subarray(start + quarter, i - quarter)).sort((a, b) => a - b);
      const median = inside[inside.length >> 1]!;
      const fromM = chainageM[start]!;
      const toM = chainageM[Math.min(i, count - 1)]!;
      if (toM - fromM > SHORTEST_CURVE_M) curves.push({ fromM, toM, curvaturePerM: median });
      start = Math.abs(k) > thresholdPerM ? i : -1;
    }
  }
  return { chainageM, curvaturePerM, curves };
}

/**
 * Curvature at the middle of a window by the osculating circle of the parabola fitted by least squares in the frame of
 * the window's chord: y = a + b x + c x^2, kappa = 2 c / (1 + b^2)^1.5 with b at the middle. (An algebraic circle fit
 * is biased towards small radii as soon as the noise is no longer small against the sagitta.)
 */
function circleCurvature(xM: Float64Array, yM: Float64Array, from: number, to: number): number {
  const chord = Math.hypot(xM[to]! - xM[from]!, yM[to]! - yM[from]!);
  if (chord < SHORTEST_CHORD_M) return 0;
  const ux = (xM[to]! - xM[from]!) / chord;
  const uy = (yM[to]! - yM[from]!) / chord;
  const x0 = (xM[from]! + xM[to]!) / 2;
  const y0 = (yM[from]! + yM[to]!) / 2;
  const n = to - from + 1;
  let [s1, s2, s3, s4, t0, t1, t2] = [0, 0, 0, 0, 0, 0, 0];
  for (let i = from; i <= to; i += 1) {
    const x = (xM[i]! - x0) * ux + (yM[i]! - y0) * uy;
    const y = -(xM[i]! - x0) * uy + (yM[i]! - y0) * ux;
    const x2 = x * x;
    s1 += x;
    s2 += x2;
    s3 += x2 * x;
    s4 += x2 * x2;
    t0 += y;
    t1 += x * y;
    t2 += x2 * y;
  }
  const determinant = n * (s2 * s4 - s3 * s3) - s1 * (s1 * s4 - s2 * s3) + s2 * (s1 * s3 - s2 * s2);
  if (!(determinant > 0)) return 0;
  const b = (n * (t1 * s4 - t2 * s3) - s1 * (t0 * s4 - t2 * s2) + s2 * (t0 * s3 - t1 * s2)) / determinant;
  const c = (n * (s2 * t2 - s3 * t1) - s1 * (s1 * t2 - s2 * t1) + t0 * (s1 * s3 - s2 * s2)) / determinant;
  return (2 * c) / (1 + b * b) ** 1.5;
}

export interface NaiveScore {
  curves: number;
  found: number;
  invented: number;
  splits: number;
  milliseconds: number;
  readonly radius: number[];
  readonly tangent: number[];
}

export function emptyNaiveScore(): NaiveScore {
  return { curves: 0, found: 0, invented: 0, splits: 0, milliseconds: 0, radius: [], tangent: [] };
}

/** Runs the baseline with a threshold set from the known largest radius: help that no tool has. */
export function addNaive(score: NaiveScore, sim: SimulatedRun, halfWindowS: number, largestRadiusM: number): void {
  const begun = performance.now();
  const fit = naiveFit(sim.run, halfWindowS, 0.7 / largestRadiusM);
  score.milliseconds += performance.now() - begun;
  const toTrue = trueChainage(fit.chainageM, sim.truth);
  const placed = fit.curves.map(
    (curve): FittedCurve<null> => ({
      source: null,
      curvaturePerM: curve.curvaturePerM,
      fromM: toTrue(curve.fromM),
      toM: toTrue(curve.toM),
    }),
  );
  const matching = matchCurves(sim.truth.curves, placed);
  score.curves += sim.truth.curves.length;
  score.found += matching.pairs.length;
  score.invented += matching.invented.length;
  score.splits += matching.splits.length;
  for (const { truth, fitted } of matching.pairs) {
    score.radius.push(Math.abs(truth.curvaturePerM / fitted.curvaturePerM) - 1);
    score.tangent.push(fitted.fromM - truth.entry.middleM, fitted.toM - truth.exit.middleM);
  }
}
