import type { Run } from '../../shared/model/run.ts';
import type { SimulatedRun } from '../../data/synthetic/simulate.ts';
import { matchCurves, trueChainage, type FittedCurve } from './match.ts';

/** What a plain local circle fit makes of the positions: no interval, no noise model. */
export interface NaiveFit {
  readonly chainageM: Float64Array;
  readonly curvaturePerM: Float64Array;
  readonly curves: readonly { readonly fromM: number; readonly toM: number; readonly curvaturePerM: number }[];
}

/**
 * Baseline: circle through the positions within a time window of each fix (algebraic least squares, Kasa 1976),
 * curvature thresholds with hysteresis, radius from the median curvature between the crossings.
 *
 * @param halfWindowS half of the window, s
 * @param thresholdPerM curvature above which a curve begins; it ends below half of it
 */
export function naiveFit(run: Run, halfWindowS: number, thresholdPerM: number): NaiveFit {
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
    if (chainageM[to]! - chainageM[from]! < 5) continue;
    curvaturePerM[i] = circleCurvature(xM, yM, from, to);
  }
  const curves: { fromM: number; toM: number; curvaturePerM: number }[] = [];
  let start = -1;
  for (let i = 0; i <= count; i += 1) {
    const k = i < count ? curvaturePerM[i]! : 0;
    if (start < 0) {
      if (Math.abs(k) > thresholdPerM) start = i;
    } else if (Math.abs(k) < thresholdPerM / 2 || Math.sign(k) !== Math.sign(curvaturePerM[start]!)) {
      const inside = Array.from(curvaturePerM.subarray(start, i)).sort((a, b) => a - b);
      const median = inside[inside.length >> 1]!;
      curves.push({ fromM: chainageM[start]!, toM: chainageM[Math.min(i, count - 1)]!, curvaturePerM: median });
      start = Math.abs(k) > thresholdPerM ? i : -1;
    }
  }
  return { chainageM, curvaturePerM, curves };
}

/** Signed curvature of the circle x^2 + y^2 + a x + b y + c = 0 fitted by least squares about the mean. */
function circleCurvature(xM: Float64Array, yM: Float64Array, from: number, to: number): number {
  const n = to - from + 1;
  let mx = 0;
  let my = 0;
  for (let i = from; i <= to; i += 1) {
    mx += xM[i]! / n;
    my += yM[i]! / n;
  }
  let xx = 0;
  let yy = 0;
  let xy = 0;
  let xz = 0;
  let yz = 0;
  let zm = 0;
  for (let i = from; i <= to; i += 1) {
    const x = xM[i]! - mx;
    const y = yM[i]! - my;
    const z = x * x + y * y;
    xx += x * x;
    yy += y * y;
    xy += x * y;
    xz += x * z;
    yz += y * z;
    zm += z / n;
  }
  const determinant = xx * yy - xy * xy;
  if (!(Math.abs(determinant) > 1e-9 * xx * yy) || determinant === 0) return 0;
  const cx = (xz * yy - yz * xy) / determinant / 2;
  const cy = (yz * xx - xz * xy) / determinant / 2;
  const radius = Math.sqrt(cx * cx + cy * cy + zm);
  const tx = xM[to]! - xM[from]!;
  const ty = yM[to]! - yM[from]!;
  return Math.sign(tx * cy - ty * cx) / radius;
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
  const fit = naiveFit(sim.run, halfWindowS, 0.5 / largestRadiusM);
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
