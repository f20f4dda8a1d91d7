import type { Alignment, Curve, Estimate } from '../../shared/model/alignment.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { RunPassages } from '../../shared/model/passage.ts';
import { errorFunction } from 'simple-statistics';
import type { SimulatedRun } from '../../data/synthetic/simulate.ts';
import { curveBounds, type CurveBound, type EndBound } from './bound.ts';
import { matchCurves, placeCurves, trueChainage } from './match.ts';

/** Curves seen by good fixes for less than this share of their time are counted apart. */
const HIDDEN_BELOW = 0.7;
/** A curve this many bound sd from straight must be found. */
const CLEAR_SIGMA = 6;
/** A false hotspot: lateral acceleration that its own 95 % interval puts this far above the truth nearby, m/s^2. */
const HOTSPOT_MPS2 = 0.3;
const HOTSPOT_NEAR_M = 40;
/** Peaks are judged on curves passed in less than this, s. */
const SHORT_PASSAGE_S = 8;

/** Error, and whether the 95 % interval held the truth. */
interface Judged {
  readonly error: number;
  readonly held: boolean;
}

/** Everything counted over any number of runs; merged by addition. */
export interface Score {
  curves: number;
  found: number;
  clear: number;
  clearFound: number;
  hidden: number;
  invented: number;
  splits: number;
  lengthKm: number;
  hotspots: number;
  fixes: number;
  estimateMs: number;
  alignmentMs: number;
  failures: number;
  /** Relative errors of radius. */
  readonly radius: Judged[];
  /** (kappa_hat - kappa) / bound. */
  readonly overBound: number[];
  /** Bound of each found curve's relative error of radius, one sd. */
  readonly boundRelative: number[];
  /** Relative errors of v^2 |kappa| on the arc, and those over their bound. */
  readonly lateral: Judged[];
  readonly lateralOverBound: number[];
  /** Peak over the arc on short passages: (peak_hat - peak) / sd. */
  readonly peak: number[];
  /** Middles of transitions, m, and over their bound. */
  readonly tangent: Judged[];
  readonly tangentOverBound: number[];
  readonly length: Judged[];
  /** Share of moving fixes whose 95 % interval holds the truth is counted / total. */
  curvatureHeld: number;
  speedHeld: number;
  moving: number;
  readonly notes: string[];
}

export function emptyScore(): Score {
  return {
    curves: 0,
    found: 0,
    clear: 0,
    clearFound: 0,
    hidden: 0,
    invented: 0,
    splits: 0,
    lengthKm: 0,
    hotspots: 0,
    fixes: 0,
    estimateMs: 0,
    alignmentMs: 0,
    failures: 0,
    radius: [],
    overBound: [],
    boundRelative: [],
    lateral: [],
    lateralOverBound: [],
    peak: [],
    tangent: [],
    tangentOverBound: [],
    length: [],
    curvatureHeld: 0,
    speedHeld: 0,
    moving: 0,
    notes: [],
  };
}

/**
 * Median of absolute relative errors of radius that an estimator on the bound would show: curves differ, so that of the
 * mixture of normal errors, solved for by bisection.
 */
export function attainableMedian({ boundRelative }: Score): number {
  if (boundRelative.length === 0) return Number.NaN;
  let low = 0;
  // A curve that its fixes do not determine has an infinite bound; no median error is shown above 100 %.
  let high = 1;
  for (let i = 0; i < 50; i += 1) {
    const middle = (low + high) / 2;
    // Share of |error| below `middle`: 2 Phi(x / sd) - 1 = erf(x / (sd sqrt 2)).
    const below = boundRelative.reduce((sum, sd) => sum + errorFunction(middle / (sd * Math.SQRT2)), 0);
    if (below < boundRelative.length / 2) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

export interface Fitted {
  readonly motion: Motion;
  readonly alignment: Alignment;
  readonly passages: RunPassages;
}

const holds = (estimate: Estimate, truth: number) => estimate.low <= truth && truth <= estimate.high;

/** Compares one fitted run with its truth and adds to the score. */
export function addRun(score: Score, sim: SimulatedRun, fit: Fitted): void {
  const { truth } = sim;
  const bounds = new Map(curveBounds(sim).map((bound) => [bound.curve.number, bound]));
  const placed = placeCurves(fit.alignment.curves, fit.motion, truth);
  const matching = matchCurves(truth.curves, placed);
  const hidden = new Set(
    truth.curves.filter((curve) => curve.observedShare < HIDDEN_BELOW).map((curve) => curve.number),
  );
  const toTrue = trueChainage(fit.motion.chainageM, truth);
  score.lengthKm += truth.line.lengthM / 1000;
  score.fixes += sim.run.fixes.count;
  score.hidden += hidden.size;
  score.invented += matching.invented.length;
  score.splits += matching.splits.length;
  for (const fitted of matching.invented) {
    score.notes.push(
      `${sim.run.recordingName} invented ${describeCurve(fitted.source)} at true ${fitted.fromM.toFixed(0)} m`,
    );
  }
  for (const curve of truth.curves) {
    if (hidden.has(curve.number)) continue;
    const bound = bounds.get(curve.number)!;
    score.curves += 1;
    const clear = Math.abs(curve.curvaturePerM) > CLEAR_SIGMA * bound.curvatureSdPerM;
    if (clear) score.clear += 1;
    const pair = matching.pairs.find((one) => one.truth === curve);
    if (!pair) {
      if (clear) {
        score.notes.push(
          `${sim.run.recordingName} missed R ${(1 / curve.curvaturePerM).toFixed(0)} arc ${(curve.arcEndM - curve.arcStartM).toFixed(0)} m at ${curve.arcStartM.toFixed(0)} m`,
        );
      }
      continue;
    }
    score.found += 1;
    if (clear) score.clearFound += 1;
    judgeCurve(score, sim, fit, pair.fitted.source, bound, toTrue);
  }
  judgeMotion(score, sim, fit.motion);
}

function judgeCurve(
  score: Score,
  sim: SimulatedRun,
  fit: Fitted,
  curve: Curve,
  bound: CurveBound,
  toTrue: (chainageM: number) => number,
): void {
  const { curve: truth } = bound;
  const trueKappa = truth.curvaturePerM;
  const { curvaturePerM, speedMps } = curve;
  score.radius.push({
    error: Math.abs(trueKappa / curvaturePerM.value) - 1,
    held: holds(curvaturePerM, trueKappa),
  });
  score.overBound.push((curvaturePerM.value - trueKappa) / bound.curvatureSdPerM);
  score.boundRelative.push(bound.curvatureSdPerM / Math.abs(trueKappa));
  if (Math.abs(curvaturePerM.value - trueKappa) > 5 * bound.curvatureSdPerM) {
    score.notes.push(
      `${sim.run.recordingName} far off: ${describeCurve(curve)} for R ${(1 / trueKappa).toFixed(0)} arc ${(truth.arcEndM - truth.arcStartM).toFixed(0)} m at ${truth.arcStartM.toFixed(0)} m, ${(Math.abs(curvaturePerM.value - trueKappa) / bound.curvatureSdPerM).toFixed(1)} bounds`,
    );
  }

  // The speed that was driven over the stretch which the fit calls circular: near a stop the mean depends on its ends.
  const trueLateral = meanSpeed(sim, toTrue(curve.arcStartM), toTrue(curve.arcEndM)) ** 2 * Math.abs(trueKappa);
  const lateral = speedMps.value ** 2 * Math.abs(curvaturePerM.value);
  const relative = lateral / trueLateral - 1;
  score.lateral.push({
    error: relative,
    held: Math.abs(lateral - trueLateral) <= 1.96 * curve.lateralRelativeSd * lateral,
  });
  score.lateralOverBound.push((relative * truth.arcSpeedMps ** 2 * Math.abs(trueKappa)) / bound.lateralSdMps2);

  const passage = fit.passages.passages.find((one) => one.curve.number === curve.number);
  const travel = sim.truth.travel;
  const onArc = travel.timeAt(truth.arcEndM) - travel.timeAt(truth.arcStartM);
  if (passage && onArc < SHORT_PASSAGE_S) {
    let fastest = 0;
    passage.chainageM.forEach((s, i) => {
      if (s >= curve.arcStartM && s <= curve.arcEndM) fastest = Math.max(fastest, passage.speedMps[i]!);
    });
    if (fastest > 0) {
      const peak = fastest ** 2 * Math.abs(curvaturePerM.value);
      score.peak.push((peak - truth.peakLateralMps2) / (curve.lateralRelativeSd * peak));
    }
  }

  const ends = [
    [curve.entry, truth.entry, bound.entry],
    [curve.exit, truth.exit, bound.exit],
  ] as const;
  for (const [end, trueEnd, endBound] of ends) judgeEnd(score, end, trueEnd, endBound, toTrue);
}

/** Mean speed by distance, m/s. */
function meanSpeed(sim: SimulatedRun, fromM: number, toM: number): number {
  const steps = 100;
  let sum = 0;
  for (let k = 0; k <= steps; k += 1) sum += sim.truth.travel.speedAt(fromM + ((toM - fromM) * k) / steps);
  return sum / (steps + 1);
}

function judgeEnd(
  score: Score,
  end: Curve['entry'],
  truth: { readonly middleM: number; readonly lengthM: number },
  bound: EndBound,
  toTrue: (chainageM: number) => number,
): void {
  const error = toTrue(end.middleM.value) - truth.middleM;
  const margin = error > 0 ? end.middleM.value - end.middleM.low : end.middleM.high - end.middleM.value;
  score.tangent.push({ error, held: Math.abs(error) <= margin });
  score.tangentOverBound.push(error / bound.middleSdM);
  score.length.push({ error: end.lengthM.value - truth.lengthM, held: holds(end.lengthM, truth.lengthM) });
}

/** Pointwise coverage of the smoothed motion, and hotspots that are not there. */
function judgeMotion(score: Score, sim: SimulatedRun, motion: Motion): void {
  const { truth } = sim;
  let inHotspot = false;
  for (let i = 0; i < motion.count; i += 1) {
    const v = truth.speedMps[i]!;
    if (v < 2) {
      inHotspot = false;
      continue;
    }
    score.moving += 1;
    const s = truth.chainageM[i]!;
    const kappa = truth.line.curvatureAt(s);
    const kappaHat = motion.curvaturePerM[i]!;
    const kappaSd = motion.curvatureSdPerM[i]!;
    if (Math.abs(kappaHat - kappa) <= 1.96 * kappaSd) score.curvatureHeld += 1;
    if (Math.abs(motion.speedMps[i]! - v) <= 1.96 * motion.speedSdMps[i]!) score.speedHeld += 1;
    const lateral = motion.speedMps[i]! ** 2 * Math.abs(kappaHat);
    const sd = Math.hypot(
      motion.speedMps[i]! ** 2 * kappaSd,
      2 * motion.speedMps[i]! * Math.abs(kappaHat) * motion.speedSdMps[i]!,
    );
    const supported = lateral - 1.96 * sd;
    if (supported > HOTSPOT_MPS2) {
      let near = 0;
      for (let d = -HOTSPOT_NEAR_M; d <= HOTSPOT_NEAR_M; d += 10) {
        const at = Math.min(Math.max(s + d, 0), truth.line.lengthM);
        near = Math.max(near, v ** 2 * Math.abs(truth.line.curvatureAt(at)));
      }
      if (supported > near + HOTSPOT_MPS2) {
        if (!inHotspot) {
          score.hotspots += 1;
          score.notes.push(
            `${sim.run.recordingName} hotspot at true ${s.toFixed(0)} m, t ${motion.timeS[i]!.toFixed(0)} s: ${lateral.toFixed(2)} m/s2 (sd ${sd.toFixed(2)}), true ${near.toFixed(2)}`,
          );
        }
        inHotspot = true;
        continue;
      }
    }
    inHotspot = false;
  }
}

function describeCurve(curve: Curve): string {
  return `R ${curve.radiusM.value.toFixed(0)} [${curve.radiusM.low.toFixed(0)}, ${curve.radiusM.high.toFixed(0)}] ${curve.hand} ${(curve.arcEndM - curve.arcStartM).toFixed(0)} m chi2 ${curve.chi2PerDof.toFixed(2)}`;
}
