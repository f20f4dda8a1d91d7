import { BendbookError } from '../../shared/model/fault.ts';
import type { Finding } from '../../shared/model/finding.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { Run } from '../../shared/model/run.ts';
import type { NoiseScore } from './adapt-noise.ts';
import { adaptProcessNoise } from './adapt-noise.ts';
import { unwrapHeading, writeChainage } from './chainage.ts';
import { describe } from './findings.ts';
import { advanceDoppler, advanceDopplerFactor, dropMissing } from './lag.ts';
import type { Observations } from './observations.ts';
import { USE, observe } from './observations.ts';
import { WANDER_TIME_S, walkAt } from './parameters.ts';
import { describeQuality } from './quality.ts';
import type { DopplerResiduals } from './robust.ts';
import { reviewFix, weighDoppler } from './robust.ts';
import { screen } from './screen.ts';
import type { FixSink } from './smoother.ts';
import { smooth, smoothedCovariances } from './smoother.ts';
import type { Tuned } from './tuning.ts';
import { GATE, tune } from './tuning.ts';

export interface EstimateOptions {
  readonly signal?: AbortSignal;
  readonly onProgress?: (share: number) => void;
}

/** Shares of the work done after tuning and after the first pass. */
const AFTER_TUNING = 0.15;
const AFTER_FIRST_PASS = 0.5;

type Columns = ReturnType<typeof makeColumns>;

/**
 * Smoothed motion of a run: position, heading, speed, acceleration and curvature at every fix with standard deviations, from a
 * fixed-interval smoother whose noise levels are estimated from the run itself.
 *
 * Two passes: the second is linearised about the first, with robust weights and with the strengths of the process noise
 * adapted to what the first pass found locally. Time and memory grow in proportion to the run; the tuning is capped.
 *
 * @throws BendbookError estimate/not-finite when no pass stays finite (the fixes contradict any motion of a vehicle)
 */
export function estimateMotion(run: Run, options: EstimateOptions = {}): { motion: Motion; findings: Finding[] } {
  const report = (share: number): void => {
    options.signal?.throwIfAborted();
    options.onProgress?.(share);
  };
  report(0);
  const columns = makeColumns(run.fixes.count);
  const asRead = observe(run, columns.positionVarianceFactor, columns.dopplerVarianceFactor);
  const suspects = screen(asRead);
  const tuned = tune(asRead, run.intervalS, run.resolution.timeS >= 0.5);
  const observations = correctLags(asRead, tuned);
  report(AFTER_TUNING);

  firstPass(observations, tuned, columns, (share) => report(AFTER_TUNING + (AFTER_FIRST_PASS - AFTER_TUNING) * share));
  lastPass(observations, tuned, columns, (share) => report(AFTER_FIRST_PASS + (1 - AFTER_FIRST_PASS) * share));

  unwrapHeading(columns.headingRad);
  writeChainage(run.fixes, columns.speedMps, columns.accelerationMps2, columns.chainageM);
  const quality = describeQuality(run, observations, tuned, columns.speedMps);
  const motion: Motion = { count: run.fixes.count, timeS: run.fixes.timeS, ...columns, quality };
  return { motion, findings: describe(run, observations, motion, suspects, tuned) };
}

function makeColumns(count: number) {
  return {
    chainageM: new Float64Array(count),
    xM: new Float64Array(count),
    yM: new Float64Array(count),
    headingRad: new Float64Array(count),
    speedMps: new Float64Array(count),
    accelerationMps2: new Float64Array(count),
    curvaturePerM: new Float64Array(count),
    positionSdM: new Float32Array(count),
    headingSdRad: new Float32Array(count),
    speedSdMps: new Float32Array(count),
    curvatureSdPerM: new Float32Array(count),
    speedCurvatureCorrelation: new Float32Array(count),
    positionVarianceFactor: new Float32Array(count),
    dopplerVarianceFactor: new Float32Array(count),
  };
}

function correctLags(observations: Observations, { lags }: Tuned): Observations {
  if (lags.courseS === 0 && lags.speedS === 0) return observations;
  const advanced = { ...observations, ...advanceDoppler(observations, lags, null) };
  dropMissing(advanced);
  advanceDopplerFactor(advanced, lags);
  return advanced;
}

function writeState(columns: Columns, i: number, state: Float64Array): void {
  columns.xM[i] = state[0]!;
  columns.yM[i] = state[1]!;
  columns.headingRad[i] = state[2]!;
  columns.speedMps[i] = Math.max(0, state[3]!);
  columns.accelerationMps2[i] = state[4]!;
  columns.curvaturePerM[i] = state[5]!;
}

/** Smoothed states, robust weights and local strengths of the process noise; no covariances. */
function firstPass(observations: Observations, tuned: Tuned, columns: Columns, report: (share: number) => void): void {
  const { parameters } = tuned;
  const { count, timeS } = observations;
  const residuals: DopplerResiduals = { speed: new Float32Array(count), course: new Float32Array(count) };
  const walkScore: NoiseScore = { found: new Float32Array(count), expected: new Float32Array(count) };
  const jerkScore: NoiseScore = { found: new Float32Array(count), expected: new Float32Array(count) };
  const local = { walk: 0, lengthM: 1 };
  const sink: FixSink = (i, state, _record, _at, lambda, Lambda) => {
    writeState(columns, i, state);
    const dt = i > 0 ? timeS[i]! - timeS[i - 1]! : 0;
    // Score of the curvature's noise in the step into i: of c itself, which carries nearly all of it.
    walkAt(parameters, state[3]!, local);
    const relaxed = 1 - Math.exp((-2 * Math.max(0, state[3]! * dt)) / local.lengthM);
    const variance = (local.walk / (2 * local.lengthM)) * relaxed;
    walkScore.found[i] = variance * lambda[6]! ** 2;
    walkScore.expected[i] = variance * Lambda[27]!;
    jerkScore.found[i] = parameters.jerkNoise * dt * lambda[4]! ** 2;
    jerkScore.expected[i] = parameters.jerkNoise * dt * Lambda[14]!;
    reviewFix(observations, parameters, i, state, residuals);
  };
  if (!smooth(observations, parameters, null, GATE, sink, report)) throw notFinite();
  weighDoppler(residuals, columns.dopplerVarianceFactor);
  adaptProcessNoise(observations, parameters, columns.speedMps, walkScore, jerkScore);
}

/** Columns of smoothedCovariances and the elements wanted of each: variances of X, Y, theta, v, kappa, covariance of v and kappa. */
const WANTED = [
  [0, [0]],
  [1, [1]],
  [2, [2]],
  [3, [3]],
  [5, [5, 3]],
] as const;

/** Smoothed states and standard deviations, linearised about the first pass; should that fail, about themselves. */
function lastPass(observations: Observations, tuned: Tuned, columns: Columns, report: (share: number) => void): void {
  const { parameters, lags } = tuned;
  const { use } = observations;
  const wanderVariance = (parameters.diffusion * WANDER_TIME_S) / 2;
  const c = new Float64Array(6);
  const sink: FixSink = (i, state, record, at, _lambda, Lambda) => {
    writeState(columns, i, state);
    if ((use[i]! & USE.STANDING) !== 0) columns.speedMps[i] = 0;
    smoothedCovariances(record, at, Lambda, WANTED, c);
    // What remains of a lag shifts course or speed in time: its sd times their rates.
    const courseLag = (use[i]! & USE.COURSE) !== 0 ? lags.courseSdS : 0;
    const speedLag = (use[i]! & USE.SPEED) !== 0 ? lags.speedSdS : 0;
    const v = state[3]!;
    columns.positionSdM[i] = Math.sqrt(Math.max(0, (c[0]! + c[1]!) / 2) + wanderVariance);
    columns.headingSdRad[i] = Math.sqrt(Math.max(0, c[2]!) + (v * state[5]! * courseLag) ** 2);
    columns.speedSdMps[i] = Math.sqrt(Math.max(0, c[3]!) + (state[4]! * speedLag) ** 2);
    columns.curvatureSdPerM[i] = Math.sqrt(Math.max(0, c[4]!) + (v * state[6]! * courseLag) ** 2);
    columns.speedCurvatureCorrelation[i] = c[5]! / (columns.speedSdMps[i] * columns.curvatureSdPerM[i] + 1e-30);
  };
  if (smooth(observations, parameters, columns, GATE, sink, report)) return;
  if (!smooth(observations, parameters, null, GATE, sink, report)) throw notFinite();
}

function notFinite(): BendbookError {
  return new BendbookError('estimate/not-finite', {
    cause: 'no motion of a vehicle agrees with the fixes of this run',
    remedy: 'check the times and coordinates of the recording',
  });
}
