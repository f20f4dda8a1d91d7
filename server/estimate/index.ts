import type { Finding } from '../../shared/model/finding.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { Run } from '../../shared/model/run.ts';
import { adaptProcessNoise } from './adapt-noise.ts';
import { writeChainage } from './chainage.ts';
import { advanceDoppler, dropMissing } from './lag.ts';
import { describe } from './findings.ts';
import { USE, observe } from './observations.ts';
import { describeQuality } from './quality.ts';
import { reviewFix, weighDoppler } from './robust.ts';
import { screen } from './screen.ts';
import { smooth, smoothedCovariances } from './smoother.ts';
import { GATE, tune } from './tuning.ts';
import { WANDER_TIME_S, walkAt } from './parameters.ts';
import { wrapAngle } from './motion-filter.ts';

export interface EstimateOptions {
  readonly signal?: AbortSignal;
  readonly onProgress?: (share: number) => void;
}

/** White position error taken for granted before the noise is known, m. */
const SCREENING_WHITE_M = 1;
/** Gate of the last pass, where the robust weights already carry the outliers. */
const LAST_GATE = 25;

/**
 * Smoothed motion of a run: position, heading, speed, acceleration and curvature at every fix with standard deviations, from a
 * fixed-interval smoother whose noise levels are estimated from the run itself.
 *
 * Two passes: the second is linearised about the first, with robust weights and with the strength of the curvature walk
 * adapted to what the first pass found locally.
 */
export function estimateMotion(run: Run, options: EstimateOptions = {}): { motion: Motion; findings: Finding[] } {
  const { count } = run.fixes;
  const report = (share: number): void => {
    options.signal?.throwIfAborted();
    options.onProgress?.(share);
  };
  const columns = {
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
  let observations = observe(run, columns.positionVarianceFactor, columns.dopplerVarianceFactor);
  screen(observations, SCREENING_WHITE_M);
  report(0);
  const tuned = tune(observations, run.intervalS, run.resolution.timeS >= 0.5);
  const { parameters } = tuned;
  if (tuned.lags.courseS !== 0 || tuned.lags.speedS !== 0) {
    observations = { ...observations, ...advanceDoppler(observations, tuned.lags, null) };
    dropMissing(observations);
  }
  report(0.2);
  const walk = { walk: 0, lengthM: 1 };
  const residuals = { speed: new Float32Array(count), course: new Float32Array(count) };
  const walkScore = { found: new Float32Array(count), expected: new Float32Array(count) };
  const jerkScore = { found: new Float32Array(count), expected: new Float32Array(count) };
  const first = smooth(
    observations,
    parameters,
    null,
    GATE,
    (i, state, _record, _at, lambda, Lambda) => {
      columns.xM[i] = state[0]!;
      columns.yM[i] = state[1]!;
      columns.headingRad[i] = state[2]!;
      columns.speedMps[i] = Math.max(0, state[3]!);
      columns.accelerationMps2[i] = state[4]!;
      columns.curvaturePerM[i] = state[5]!;
      // Score of the curvature's noise in the step into i: of c itself, which carries nearly all of it.
      const dt = i > 0 ? observations.timeS[i]! - observations.timeS[i - 1]! : 0;
      const d = state[3]! * dt;
      walkAt(parameters, state[3]!, walk);
      const k = (walk.walk / (2 * walk.lengthM)) * (1 - Math.exp((-2 * Math.max(0, d)) / walk.lengthM));
      walkScore.found[i] = k * lambda[6]! ** 2;
      walkScore.expected[i] = k * Lambda[27]!;
      jerkScore.found[i] = parameters.jerkNoise * dt * lambda[4]! ** 2;
      jerkScore.expected[i] = parameters.jerkNoise * dt * Lambda[14]!;
      reviewFix(observations, parameters, i, state, residuals);
    },
    (share) => report(0.2 + 0.35 * share),
  );
  weighDoppler(residuals, columns.dopplerVarianceFactor);
  adaptProcessNoise(observations, parameters, columns.speedMps, walkScore, jerkScore);
  const pairs = [
    [0, [0]],
    [1, [1]],
    [2, [2]],
    [3, [3]],
    [5, [5, 3]],
  ] as const;
  const out = new Float64Array(6);
  const wanderVariance = (parameters.diffusion * WANDER_TIME_S) / 2;
  const last = smooth(
    observations,
    parameters,
    columns,
    LAST_GATE,
    (i, state, record, at, _lambda, Lambda) => {
      columns.xM[i] = state[0]!;
      columns.yM[i] = state[1]!;
      columns.headingRad[i] = state[2]!;
      columns.speedMps[i] = (observations.use[i]! & USE.STANDING) !== 0 ? 0 : Math.max(0, state[3]!);
      columns.accelerationMps2[i] = state[4]!;
      columns.curvaturePerM[i] = state[5]!;
      smoothedCovariances(record, at, Lambda, pairs, out);
      columns.positionSdM[i] = Math.sqrt(Math.max(0, (out[0]! + out[1]!) / 2) + wanderVariance);
      columns.headingSdRad[i] = Math.sqrt(Math.max(0, out[2]!));
      columns.speedSdMps[i] = Math.sqrt(Math.max(0, out[3]!));
      columns.curvatureSdPerM[i] = Math.sqrt(Math.max(0, out[4]!));
      columns.speedCurvatureCorrelation[i] = out[5]! / Math.sqrt(Math.max(1e-30, out[3]! * out[4]!));
    },
    (share) => report(0.55 + 0.4 * share),
  );
  writeChainage(run.fixes.timeS, columns.speedMps, columns.accelerationMps2, columns.chainageM);
  for (let i = 1; i < count; i++)
    columns.headingRad[i] = columns.headingRad[i - 1]! + wrapAngle(columns.headingRad[i]! - columns.headingRad[i - 1]!);
  const motion: Motion = {
    count,
    timeS: run.fixes.timeS,
    ...columns,
    quality: describeQuality(run, observations, tuned, columns.speedMps),
  };
  return { motion, findings: describe(run, motion, first, last) };
}
