import type { Alignment } from '../../shared/model/alignment.ts';
import type { Finding } from '../../shared/model/finding.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { Run } from '../../shared/model/run.ts';
import { ALLOWED_RISE, divisions, partedReverse, restarts, simplifications } from './choose-model.ts';
import { whyNotCredible } from './credible.ts';
import { buildCurves, curveCandidates, elementsOf, type CurveContext } from './curves.ts';
import { fitStretch, type StretchFit } from './fit-stretch.ts';
import { parametersOf, pointNoise, refinedModel, type PointNoise } from './noise.ts';
import { NormalEquations, type Origin, type Use } from './normal-equations.ts';
import { normalPoints, pointFrom, type NormalPoints } from './points.ts';
import { estimateNoise } from './reml.ts';
import { curvatureGrid, POSITIONS_ONLY, segmentCurvature, WITH_COURSE } from './segment.ts';
import { stretchesFrom } from './stretches.ts';
import type { Stretch } from './stretch-model.ts';

export { buildPassages } from './passages.ts';
export { buildProfile } from './profile.ts';

/** A channel counts as present when this share of moving fixes has it. */
const PRESENT = 0.5;
/** Simplifications of one stretch, at most. */
const MOST_STEPS = 24;

/**
 * The alignment of a run: straights, transitions and circular curves with standard errors, fitted to the fixes themselves.
 *
 * Candidates come from a piecewise-linear description of the smoothed curvature; each stretch between two straights is fitted by
 * generalised least squares with the wandering errors modelled; the noise levels are then read on those fits, the stretches fitted
 * again, and whatever is not told from nothing falls away.
 */
export function fitAlignment(run: Run, motion: Motion): { alignment: Alignment; motion: Motion; findings: Finding[] } {
  const lengthM = motion.count > 0 ? motion.chainageM[motion.count - 1]! : 0;
  const { quality } = motion;
  const use: Use = { along: quality.speedShare > PRESENT, course: quality.courseShare > PRESENT };
  const points = normalPoints(run, motion);
  const equations = new NormalEquations(points);
  const grid = curvatureGrid(motion);
  const segments = segmentCurvature(grid, use.course ? WITH_COURSE : POSITIONS_ONLY);
  const stretches = stretchesFrom(segments, grid, motion);
  let parameters = parametersOf(quality);
  let noise = pointNoise(parameters, points.binS);
  let fits = fitAll(stretches, equations, points, motion, noise, use);
  const read = estimateNoise(fits, equations, points.binS, use, parameters);
  parameters = read.parameters;
  noise = pointNoise(parameters, points.binS);
  fits = fits.flatMap((fit) => settleStretch(fit.stretch, fit.pose, equations, points, motion, noise, use));
  const candidates = curveCandidates(fits);
  const context: CurveContext = {
    motion,
    scaleSdMps: quality.noise.sigmaSpeedMps,
    hasCourse: use.course,
    lagSdS: use.course ? quality.noise.lagSdS : 0,
    noiseDof: Math.max(10, read.observations / 4),
    goodShare(fit, fromM, toM) {
      return observedShare(points, fit, fromM, toM);
    },
  };
  const reasons = buildCurves(candidates, context).map((curve) => whyNotCredible(curve, points));
  // Built again without those that cannot be: numbers and joins follow what is left.
  const curves = buildCurves(
    candidates.filter((_, i) => reasons[i] === null),
    context,
  );
  const alignment: Alignment = { lengthM, elements: elementsOf(curves, lengthM), curves };
  const refined: Motion = {
    ...motion,
    quality: { ...quality, noise: refinedModel(quality.noise, parameters, use.course) },
  };
  return { alignment, motion: refined, findings: [...findingsOf(alignment), ...discarded(reasons)] };
}

function fitAll(
  stretches: readonly Stretch[],
  equations: NormalEquations,
  points: NormalPoints,
  motion: Motion,
  noise: PointNoise,
  use: Use,
): StretchFit[] {
  return stretches.flatMap((stretch) => settleStretch(stretch, null, equations, points, motion, noise, use));
}

/** Fall of the objective that a richer stretch must bring. */
const REQUIRED_FALL = 16;
/** Fall of the objective that the second slope of a reverse must bring: chi-square with two degrees of freedom. */
const PARTED_FALL = 4;
/** Residual variance beyond which other starts and divisions are tried. */
const POOR_FIT = 1.7;
/** Points times squared parameters spent on one stretch, all attempts together; a hopeless one must not hold up the rest. */
const MOST_WORK = 6e5;
/** Simplifications tried before a fit is taken to stand. */
const MOST_TRIES = 4;

/** Fits a stretch, divides it where too much stays unexplained, and simplifies it until everything in it stands. */
function settleStretch(
  start: Stretch,
  pose: Float64Array | null,
  equations: NormalEquations,
  points: NormalPoints,
  motion: Motion,
  noise: PointNoise,
  use: Use,
): StretchFit[] {
  const window = [pointFrom(points, start.fromM), pointFrom(points, start.toM)] as const;
  if (window[1] - window[0] < 4 || start.levels.length === 0) return [];
  const origin = poseAt(motion, start.fromM);
  let work = 0;
  const attempt = (stretch: Stretch, from: Float64Array | null) => {
    if (stretch.levels.length === 0 || work > MOST_WORK) return null;
    work += (window[1] - window[0]) * (3 + 3 * stretch.levels.length) ** 2;
    return fitStretch(equations, stretch, origin, window, noise, use, from);
  };
  const better = (a: StretchFit | null, b: StretchFit | null) =>
    a === null || (b !== null && b.objective < a.objective) ? b : a;
  let fit = attempt(start, pose);
  if (fit === null || fit.chi2PerDof > POOR_FIT) {
    for (const other of restarts(start)) fit = better(fit, attempt(other, pose));
  }
  for (let step = 0; step < 4 && fit !== null && fit.chi2PerDof > POOR_FIT; step++) {
    let richer: StretchFit | null = null;
    for (const other of divisions(fit)) richer = better(richer, attempt(other, fit.pose));
    if (richer === null || richer.objective > fit.objective - REQUIRED_FALL) break;
    fit = richer;
  }
  const nothing = straightObjective(start, origin, window, equations, noise, use);
  for (let step = 0; step < MOST_STEPS && fit !== null; step++) {
    const simpler = nextSimpler(fit, attempt, nothing);
    if (simpler === 'straight') return [];
    if (simpler === null) break;
    fit = simpler;
  }
  if (fit === null) return [];
  for (let j = 1; j < fit.stretch.levels.length; j++) {
    const other = partedReverse(fit.stretch, j);
    if (other === null) continue;
    const parted = attempt(other, fit.pose);
    if (parted === null || parted.objective > fit.objective - PARTED_FALL) continue;
    fit = parted;
    // Past the straight of no length that is level j now.
    j++;
  }
  return [fit];
}

/** The first simplification that costs no more than it may; `straight` when nothing is left. */
function nextSimpler(
  fit: StretchFit,
  attempt: (stretch: Stretch, from: Float64Array | null) => StretchFit | null,
  nothing: () => number,
): StretchFit | 'straight' | null {
  for (const { stretch, allowed } of simplifications(fit).slice(0, MOST_TRIES)) {
    if (stretch.levels.length === 0) {
      if (nothing() - fit.objective < ALLOWED_RISE) return 'straight';
      continue;
    }
    const next = attempt(stretch, fit.pose);
    if (next !== null && next.objective - fit.objective < allowed) return next;
  }
  return null;
}

/** Objective of the window as one straight, worked out when first asked for. */
function straightObjective(
  start: Stretch,
  origin: Origin,
  window: readonly [number, number],
  equations: NormalEquations,
  noise: PointNoise,
  use: Use,
): () => number {
  let value: number | null = null;
  return () => {
    const straight: Stretch = {
      levels: [],
      straight: [],
      middles: [],
      squares: [],
      fromM: start.fromM,
      toM: start.toM,
    };
    value ??= fitStretch(equations, straight, origin, window, noise, use, null)?.objective ?? Infinity;
    return value;
  };
}

/** Pose of the smoothed trajectory at a chainage. */
function poseAt(motion: Motion, chainageM: number): Origin {
  const { chainageM: s, xM, yM, headingRad, count } = motion;
  let [low, high] = [0, count - 1];
  while (low < high) {
    const middle = (low + high) >> 1;
    if (s[middle]! < chainageM) low = middle + 1;
    else high = middle;
  }
  const j = low;
  const ahead = chainageM - s[j]!;
  return {
    xM: xM[j]! + ahead * Math.cos(headingRad[j]!),
    yM: yM[j]! + ahead * Math.sin(headingRad[j]!),
    headingRad: headingRad[j]!,
  };
}

/** Share by time of a range of chainage in which good fixes lie no more than a few seconds apart. */
function observedShare(points: NormalPoints, fit: StretchFit, fromM: number, toM: number): number {
  let [good, all] = [0, 0];
  for (let i = Math.max(fit.first, 1); i < Math.min(fit.end + 1, points.count); i++) {
    const a = points.chainageM[i - 1]!;
    const b = points.chainageM[i]!;
    if (b < fromM || a > toM) continue;
    const dt = points.timeS[i]! - points.timeS[i - 1]!;
    const inside = b > a ? (Math.min(b, toM) - Math.max(a, fromM)) / (b - a) : 1;
    all += dt * inside;
    const seen = points.positionShare[i]! > 0 && points.positionShare[i]! < 4;
    if (seen && dt < MOST_INTERVAL_S) good += dt * inside;
  }
  return all > 0 ? good / all : 1;
}

/** Fixes farther apart than this leave the curve unseen between them, s. */
const MOST_INTERVAL_S = 4;

function findingsOf(alignment: Alignment): Finding[] {
  const hidden = alignment.curves.filter(({ observedShare: share }) => share < 0.7);
  if (hidden.length === 0) return [];
  return [
    {
      code: 'alignment/not-observed',
      stage: 'alignment',
      severity: 'serious',
      message: `${String(hidden.length)} curves were passed mostly without good fixes: their figures are uncertain`,
      count: hidden.length,
      dropped: 0,
      places: hidden.slice(0, 20).map(({ startM }) => ({ chainageM: startM })),
    },
  ];
}

/** Fits that were taken for errors, told with their reasons. */
function discarded(reasons: readonly (string | null)[]): Finding[] {
  const told = reasons.filter((reason) => reason !== null);
  if (told.length === 0) return [];
  const counts = [...new Set(told)].map((reason) => `${String(told.filter((r) => r === reason).length)} ${reason}`);
  return [
    {
      code: 'alignment/not-credible',
      stage: 'alignment',
      severity: 'warning',
      message: `${String(told.length)} bends in the recording cannot be curves of the line and were left out (${counts.join('; ')}): errors of the receiver at stops, in gaps or under cover`,
      count: told.length,
      dropped: 0,
      places: [],
    },
  ];
}
