import { Cholesky } from './cholesky.ts';
import type { PointNoise } from './noise.ts';
import type { NormalEquations, Origin, Use } from './normal-equations.ts';
import { copyStretch, layoutOf, POSE, settle, type Layout, type Stretch } from './stretch-model.ts';

/** A fitted stretch with the covariance of its parameters. */
export interface StretchFit {
  readonly stretch: Stretch;
  readonly layout: Layout;
  readonly pose: Float64Array;
  readonly origin: Origin;
  /** Row-major, layout.size squared; scaled by the residual variance where that exceeds one. */
  readonly covariance: Float64Array;
  readonly chi2PerDof: number;
  /** Chi-square plus ln det of the residual covariance: what models of one window are compared by. */
  readonly objective: number;
  readonly observations: number;
  /** Points [first, end) of the window. */
  readonly first: number;
  readonly end: number;
}

/** Prior sd of the along-track offset: free where speed carries the chainage, tied where positions do, m. */
const FREE_OFFSET_M = 20;
const TIED_OFFSET_M = 0.3;
/** A step that promises to lower the objective by less than this is not taken: before and after outliers are weighted down. */
const ROUGHLY = 0.03;
const WELL = 0.02;
const ROBUST_ROUNDS = 2;
const FIRST_DAMPING = 1e-3;
/** Robust factors that change by less leave the solution where it is. */
const SAME_FACTOR = 1.15;

/**
 * Levenberg-Marquardt fit of a stretch on the points of its window: first with the smoother's weights alone, since a robust
 * loss from a poor start settles in a false minimum, then with outlying residuals weighted down.
 *
 * @returns null when the points do not determine the stretch
 */
export function fitStretch(
  equations: NormalEquations,
  start: Stretch,
  origin: Origin,
  window: readonly [first: number, end: number],
  noise: PointNoise,
  use: Use,
  startPose: Float64Array | null,
): StretchFit | null {
  const stretch = copyStretch(start);
  settle(stretch);
  const layout = layoutOf(stretch);
  const { size } = layout;
  equations.open(window[0], window[1]);
  const pose = startPose === null ? new Float64Array(POSE) : startPose.slice();
  const cholesky = new Cholesky();
  const problem: Problem = {
    equations,
    stretch,
    layout,
    pose,
    origin,
    noise,
    use,
    cholesky,
    keptA: new Float64Array(size * size),
    linearised: false,
  };
  evaluate(problem);
  if (!iterate(problem, 40, ROUGHLY)) return null;
  for (let round = 0; round < ROBUST_ROUNDS; round++) {
    whiten(problem, true);
    if (equations.factorChange < SAME_FACTOR) break;
    whiten(problem, false);
    if (!iterate(problem, 15, WELL)) return null;
  }
  const { chi2, logDet, observations } = equations;
  if (observations < size + 2 || !cholesky.factor(equations.A, size, 0)) return null;
  const covariance = cholesky.inverse();
  const chi2PerDof = chi2 / (observations - size);
  const inflation = Math.max(1, chi2PerDof);
  for (let i = 0; i < covariance.length; i++) covariance[i]! *= inflation;
  return {
    stretch,
    layout,
    pose,
    origin,
    covariance,
    chi2PerDof,
    objective: chi2 + logDet,
    observations,
    first: window[0],
    end: window[1],
  };
}

interface Problem {
  readonly equations: NormalEquations;
  readonly stretch: Stretch;
  readonly layout: Layout;
  readonly pose: Float64Array;
  readonly origin: Origin;
  readonly noise: PointNoise;
  readonly use: Use;
  readonly cholesky: Cholesky;
  /** Information matrix of the last accepted parameters. */
  readonly keptA: Float64Array;
  /** Whether the residuals that `whiten` reads are those of the present parameters. */
  linearised: boolean;
}

/** Normal equations at the present parameters, the prior of the along-track offset included. */
function evaluate(problem: Problem): void {
  const { equations, stretch, layout, pose, origin } = problem;
  equations.linearise(stretch, layout, pose, origin);
  problem.linearised = true;
  whiten(problem, false);
}

function whiten({ equations, stretch, layout, pose, noise, use }: Problem, updateFactors: boolean): void {
  equations.whiten(noise, use, updateFactors);
  const sd = use.along ? FREE_OFFSET_M : TIED_OFFSET_M;
  equations.A[0]! += 1 / (sd * sd);
  equations.g[0]! -= pose[0]! / (sd * sd);
  // Weak hold on lengths: where nothing determines one, the matrix stays regular and the interval wide.
  for (let j = 0; j < stretch.middles.length; j++) {
    const p = layout.middle[j]! + 1;
    equations.A[p * layout.size + p]! += 1e-12;
  }
}

function objective(problem: Problem): number {
  const sd = problem.use.along ? FREE_OFFSET_M : TIED_OFFSET_M;
  return problem.equations.chi2 + problem.equations.logDet + (problem.pose[0]! / sd) ** 2;
}

/**
 * Levenberg-Marquardt steps from evaluated normal equations; leaves those of the solution.
 *
 * @param enough stops when a step promises, or has brought, less than this
 */
function iterate(problem: Problem, most: number, enough: number): boolean {
  const { equations, stretch, layout, pose, cholesky, keptA } = problem;
  const { size } = layout;
  if (equations.observations < size + 2) return false;
  const step = new Float64Array(size);
  const keptG = new Float64Array(size);
  const keptPose = new Float64Array(POSE);
  let value = objective(problem);
  if (!Number.isFinite(value)) return false;
  let damping = FIRST_DAMPING;
  for (let k = 0; k < most; k++) {
    if (!cholesky.factor(equations.A, size, damping)) {
      damping = Math.max(1e-3, damping * 10);
      if (damping > 1e6) return false;
      continue;
    }
    cholesky.solve(equations.g, step);
    let promised = 0;
    for (let p = 0; p < size; p++) {
      promised += step[p]! * (equations.g[p]! + damping * step[p]! * equations.A[p * size + p]!);
    }
    if (promised < enough) break;
    const kept = { stretch: copyStretch(stretch), chi2: equations.chi2 };
    for (let i = 0; i < size * size; i++) keptA[i] = equations.A[i]!;
    for (let p = 0; p < size; p++) keptG[p] = equations.g[p]!;
    keptPose.set(pose);
    move(stretch, layout, pose, step);
    evaluate(problem);
    const gained = value - objective(problem);
    if (gained >= -1e-9) {
      value -= gained;
      damping = gained > 0.25 * promised ? Math.max(1e-7, damping * 0.1) : damping * 2;
      if (gained < enough) break;
      continue;
    }
    restore(stretch, kept.stretch);
    pose.set(keptPose);
    equations.A.set(keptA);
    equations.g.set(keptG);
    equations.chi2 = kept.chi2;
    problem.linearised = false;
    damping = Math.max(1e-4, damping * 8);
    if (damping > 1e5) break;
  }
  if (!problem.linearised) evaluate(problem);
  return true;
}

function restore(stretch: Stretch, from: Stretch): void {
  stretch.levels = [...from.levels];
  stretch.middles = [...from.middles];
  stretch.squares = [...from.squares];
}

/** Applies a step within limits: a level by 30 % (never through zero at once), a middle by 40 m, a square by -75 to +300 %. */
function move(stretch: Stretch, layout: Layout, pose: Float64Array, step: Float64Array): void {
  for (let p = 0; p < POSE; p++) pose[p]! += step[p]!;
  for (let k = 0; k < stretch.levels.length; k++) {
    const p = layout.level[k]!;
    if (p < 0) continue;
    const level = stretch.levels[k]!;
    const most = Math.max(0.3 * Math.abs(level), 2e-5);
    stretch.levels[k] = level + Math.max(-most, Math.min(most, step[p]!));
  }
  for (let j = 0; j < stretch.middles.length; j++) {
    const p = layout.middle[j]!;
    stretch.middles[j]! += Math.max(-40, Math.min(40, step[p]!));
    const square = stretch.squares[j]!;
    const floor = 4;
    stretch.squares[j] = square + Math.max(-0.75 * square, Math.min(3 * Math.max(square, floor), step[p + 1]!));
  }
  settle(stretch);
}
