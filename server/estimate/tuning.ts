import type { LagCorrection } from './lag.ts';
import { advanceDoppler, dropMissing, estimateLags, lagsToCorrect } from './lag.ts';
import { MotionFilter } from './motion-filter.ts';
import { effectiveVariance } from './noise.ts';
import { nelderMead } from './nelder-mead.ts';
import type { Observations } from './observations.ts';
import { LEAST_SPEED_FOR_COURSE_MPS, USE, subset } from './observations.ts';
import type { Parameters } from './parameters.ts';

/** Fixes on which the noise is tuned, however long the log. */
const TUNING_FIXES = 1600;
/** Stretches they come from when the log is longer. */
const STRETCHES = 8;
/** Interval to which a faster log is thinned, s: Doppler errors a second apart are nearly independent. */
const THINNED_INTERVAL_S = 1;
/** Square of the standardised innovation beyond which an observation counts as an outlier. */
export const GATE = 25;

/** Gain of deviance that a dependence on speed must bring. */
const EXPONENT_MARGIN = 30;

interface Prior {
  readonly centre: number;
  /** Sd of the natural logarithm. */
  readonly spread: number;
}

/** Weak log-normal priors: they decide only what the log leaves open. */
const PRIOR = {
  jerkNoise: { centre: 0.06, spread: 1.5 },
  whiteM: { centre: 0.6, spread: Math.log(3.3) },
  diffusion: { centre: 0.04, spread: Math.log(4.5) },
  doppler: { centre: 0.08, spread: Math.log(2) },
  dopplerTimeS: { centre: 1, spread: Math.log(2.2) },
  slowRatio: { centre: 1, spread: 1 },
} as const satisfies Record<string, Prior>;

/** Curvature walks from which the search starts: the likelihood has several minima. */
const WALK_STARTS = [1e-10, 3e-9, 1e-7, 2e-6, 2e-5];

const penalty = (logarithm: number, prior: Prior): number => ((logarithm - Math.log(prior.centre)) / prior.spread) ** 2;

/**
 * The fixes to tune on: all when there are few, else stretches spread over the run, each the most moving of its part.
 * `stride` thins them.
 */
function tuningSubset(observations: Observations, stride: number): Observations {
  const { count, use } = observations;
  const indices: number[] = [];
  const restarts = new Set<number>();
  if (count / stride <= TUNING_FIXES) {
    for (let i = 0; i < count; i += stride) indices.push(i);
    restarts.add(0);
  } else {
    const length = Math.floor(TUNING_FIXES / STRETCHES) * stride;
    const part = count / STRETCHES;
    for (let k = 0; k < STRETCHES; k++) {
      let best = Math.floor(k * part);
      let bestMoving = -1;
      for (let trial = 0; trial < 4; trial++) {
        const from = Math.floor(k * part + (trial / 3) * (part - length));
        let moving = 0;
        for (let i = from; i < from + length; i += stride) if ((use[i]! & USE.STANDING) === 0) moving++;
        if (moving > bestMoving) {
          bestMoving = moving;
          best = from;
        }
      }
      restarts.add(best);
      for (let i = best; i < best + length; i += stride) indices.push(i);
    }
  }
  return subset(observations, indices, restarts);
}

/** Deviance of the subset under the parameters, with outliers counted by the logarithm of their size. */
function deviance(observations: Observations, parameters: Parameters): number {
  // The filter marks where it starts afresh: on a copy, so that no trial leaves its marks to the next.
  const filter = new MotionFilter({ ...observations, use: observations.use.slice() }, parameters, null, GATE);
  filter.advance(0, observations.count, null);
  return filter.deviance;
}

/** Has the channel enough readings to say something of its own noise? */
function channelUsed(observations: Observations, bit: number): boolean {
  let n = 0;
  for (let i = 0; i < observations.count; i++) if ((observations.use[i]! & bit) !== 0) n++;
  return n >= 20;
}

/** Parameters before anything is known of the log. */
const STARTING_PARAMETERS: Parameters = {
  curvatureWalk: 1e-7,
  walkExponent: 0,
  typicalSpeedMps: 10,
  changeLengthM: 20,
  jerkNoise: PRIOR.jerkNoise.centre,
  whiteM: PRIOR.whiteM.centre,
  diffusion: PRIOR.diffusion.centre,
  stampSdS: 0,
  speedMps: PRIOR.doppler.centre,
  courseWhiteMps: PRIOR.doppler.centre / Math.SQRT2,
  courseSlowMps: PRIOR.doppler.centre / Math.SQRT2,
  dopplerTimeS: PRIOR.dopplerTimeS.centre,
};

export interface Tuned {
  readonly parameters: Parameters;
  readonly lags: LagCorrection;
  /** Sd of one speed reading, m/s (Parameters.speedMps is enlarged for correlation). */
  readonly speedSdMps: number;
}

/**
 * Noise levels and strengths of motion of one log by maximum likelihood of the filter's innovations
 * (sum of ln S + e^2 / S, with weak priors), on a capped subset thinned to about 1 Hz; a faster log then settles the split of its
 * errors into white and slow ones at its full rate.
 */
export function tune(observations: Observations, intervalS: number, wholeSecondStamps: boolean): Tuned {
  const stride = Math.max(1, Math.round(THINNED_INTERVAL_S / intervalS));
  const found = estimateLags(observations, intervalS);
  const thin = tuningSubset(observations, stride);
  const hasSpeed = channelUsed(thin, USE.SPEED);
  const hasCourse = channelUsed(thin, USE.COURSE);

  const typicalSpeed = typicalSpeedMps(thin);
  const start = { ...STARTING_PARAMETERS, typicalSpeedMps: typicalSpeed, changeLengthM: typicalSpeed };
  let best: Parameters = start;
  let bestValue = Infinity;
  for (const walkExponent of [0, 2, 4] as const) {
    for (const curvatureWalk of WALK_STARTS) {
      const trial = { ...start, walkExponent, curvatureWalk };
      const value = deviance(thin, trial) + (walkExponent === 0 ? 0 : EXPONENT_MARGIN);
      if (value < bestValue) {
        best = trial;
        bestValue = value;
      }
    }
  }
  best = refine(thin, best, typicalSpeed, hasSpeed, hasCourse, 100);

  if (wholeSecondStamps && hasSpeed) {
    let value = deviance(thin, best);
    for (const stampSdS of [0.05, 0.1, 0.2]) {
      const trial = deviance(thin, { ...best, stampSdS });
      if (trial < value - 4) {
        value = trial;
        best = { ...best, stampSdS };
      }
    }
  }
  if (best.stampSdS !== 0) best = refine(thin, best, typicalSpeed, hasSpeed, hasCourse, 40);
  if (stride > 1) best = splitErrors(tuningSubset(observations, 1), best, hasCourse);
  const lags = lagsToCorrect(found);
  if (lags.courseS !== 0 || lags.speedS !== 0) {
    // Doppler noise is tuned on the readings as they came: advancing them interpolates, which blurs errors without curing them.
    // The position noise had to make up for the lag until here.
    const advanced = { ...thin, ...advanceDoppler(thin, lags, null) };
    dropMissing(advanced);
    best = refinePositionNoise(advanced, best);
  }
  const ratio = best.courseSlowMps / best.courseWhiteMps;
  const inflation = effectiveVariance(1, ratio, intervalS, best.dopplerTimeS) / (1 + ratio * ratio);
  const parameters = { ...best, speedMps: best.speedMps * Math.sqrt(inflation) };
  return { parameters, lags, speedSdMps: best.speedMps };
}

/** Median speed of the moving fixes, from the speed channel or the displacements; 10 m/s where nothing moves. */
function typicalSpeedMps(thin: Observations): number {
  const speeds: number[] = [];
  for (let i = 1; i < thin.count; i++) {
    if ((thin.use[i]! & (USE.STANDING | USE.RESTART)) !== 0) continue;
    const displacement = Math.hypot(thin.xM[i]! - thin.xM[i - 1]!, thin.yM[i]! - thin.yM[i - 1]!);
    const known = (thin.use[i]! & USE.SPEED) !== 0;
    const speed = known ? thin.speedMps![i]! : displacement / (thin.timeS[i]! - thin.timeS[i - 1]!);
    if (speed > LEAST_SPEED_FOR_COURSE_MPS) speeds.push(speed);
  }
  speeds.sort((a, b) => a - b);
  return speeds[Math.floor(speeds.length / 2)] ?? 10;
}

/** One search over the strengths of motion and the noise levels, the Doppler errors half white and half slow. */
function refine(
  thin: Observations,
  from: Parameters,
  typicalSpeed: number,
  hasSpeed: boolean,
  hasCourse: boolean,
  evaluations: number,
): Parameters {
  const unpack = (x: readonly number[]): Parameters => {
    let k = 5;
    const speed = hasSpeed ? Math.exp(x[k++]!) : from.speedMps;
    const course = hasCourse ? Math.exp(x[k]!) / Math.SQRT2 : from.courseWhiteMps;
    return {
      ...from,
      curvatureWalk: Math.exp(x[0]!),
      jerkNoise: Math.exp(x[1]!),
      whiteM: Math.exp(x[2]!),
      diffusion: Math.exp(x[3]!),
      changeLengthM: Math.exp(x[4]!),
      speedMps: speed,
      courseWhiteMps: course,
      courseSlowMps: course,
    };
  };
  const start = [from.curvatureWalk, from.jerkNoise, from.whiteM, from.diffusion, from.changeLengthM].map(Math.log);
  if (hasSpeed) start.push(Math.log(from.speedMps));
  if (hasCourse) start.push(Math.log(from.courseWhiteMps * Math.SQRT2));
  const objective = (x: readonly number[]): number => {
    let sum = penalty(x[1]!, PRIOR.jerkNoise) + penalty(x[2]!, PRIOR.whiteM) + penalty(x[3]!, PRIOR.diffusion);
    sum += penalty(x[4]!, { centre: typicalSpeed, spread: 1 });
    for (let k = 5; k < x.length; k++) sum += penalty(x[k]!, PRIOR.doppler);
    return sum + deviance(thin, unpack(x));
  };
  const steps = start.map((_, k) => (k === 0 ? 1.5 : 0.7));
  return unpack(nelderMead(objective, start, steps, evaluations, 0.5).x);
}

/** The position noise alone, everything else held. */
function refinePositionNoise(thin: Observations, from: Parameters): Parameters {
  const unpack = (x: readonly number[]): Parameters => ({
    ...from,
    whiteM: Math.exp(x[0]!),
    diffusion: Math.exp(x[1]!),
  });
  const objective = (x: readonly number[]): number =>
    penalty(x[0]!, PRIOR.whiteM) + penalty(x[1]!, PRIOR.diffusion) + deviance(thin, unpack(x));
  return unpack(nelderMead(objective, [Math.log(from.whiteM), Math.log(from.diffusion)], [0.4, -0.7], 24, 0.5).x);
}

/** At the full rate of a fast log: white and slow parts of the errors and their correlation time, motion held. */
function splitErrors(full: Observations, from: Parameters, hasCourse: boolean): Parameters {
  const unpack = (x: readonly number[]): Parameters => {
    const positions = { ...from, whiteM: Math.exp(x[0]!), diffusion: Math.exp(x[1]!) };
    if (!hasCourse) return positions;
    const scale = Math.exp(x[2]!);
    // Ratio of slow to white sd, total sd as scaled.
    const ratio = Math.exp(x[3]!);
    const white = (scale * Math.SQRT2) / Math.sqrt(1 + ratio * ratio);
    return {
      ...positions,
      courseWhiteMps: from.courseWhiteMps * white,
      courseSlowMps: from.courseWhiteMps * white * ratio,
      dopplerTimeS: Math.exp(x[4]!),
    };
  };
  const start = [Math.log(from.whiteM), Math.log(from.diffusion)];
  if (hasCourse) start.push(0, 0, Math.log(from.dopplerTimeS));
  const objective = (x: readonly number[]): number => {
    let sum = penalty(x[0]!, PRIOR.whiteM) + penalty(x[1]!, PRIOR.diffusion);
    if (hasCourse) {
      sum += (x[2]! / PRIOR.doppler.spread) ** 2 + penalty(x[3]!, PRIOR.slowRatio) + penalty(x[4]!, PRIOR.dopplerTimeS);
    }
    return sum + deviance(full, unpack(x));
  };
  const steps = start.map(() => 0.5);
  return unpack(nelderMead(objective, start, steps, 60, 0.5).x);
}
