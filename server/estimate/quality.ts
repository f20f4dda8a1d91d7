import type { LogQuality, NoiseModel } from '../../shared/model/motion.ts';
import type { Run } from '../../shared/model/run.ts';
import { courseCurvatureVariance, effectiveVariance, positionCurvatureVariance, wanderSd } from './noise.ts';
import type { Observations } from './observations.ts';
import { USE } from './observations.ts';
import { WANDER_TIME_S } from './parameters.ts';
import type { Tuned } from './tuning.ts';

/** Length over which the smallest curvature is stated, m. */
const STATED_LENGTH_M = 100;
const NINETY_FIVE = 1.96;
/** A fix moves when faster than this, m/s. */
const MOVING_MPS = 1;

/** Log quality in the numbers the user sees, from the tuned noise and the smoothed speed. */
export function describeQuality(
  run: Run,
  observations: Observations,
  tuned: Tuned,
  speedMps: Float64Array,
): LogQuality {
  const { parameters } = tuned;
  const { count, use } = observations;
  let moving = 0;
  let withCourse = 0;
  let withSpeed = 0;
  const sample: number[] = [];
  const stride = Math.max(1, Math.floor(count / 20_000));
  for (let i = 0; i < count; i++) {
    if (speedMps[i]! < MOVING_MPS) continue;
    moving++;
    if ((use[i]! & USE.COURSE) !== 0) withCourse++;
    if ((use[i]! & USE.SPEED) !== 0) withSpeed++;
    if (i % stride === 0) sample.push(speedMps[i]!);
  }
  sample.sort((a, b) => a - b);
  const median = sample[Math.floor(sample.length / 2)] ?? MOVING_MPS;
  const interval = run.intervalS;
  const share = (n: number): number => (moving === 0 ? 0 : n / moving);

  const position = positionCurvatureVariance(
    parameters.whiteM,
    parameters.diffusion,
    STATED_LENGTH_M,
    median,
    interval,
  );
  const courseEffective = effectiveVariance(
    parameters.courseWhiteMps,
    parameters.courseSlowMps,
    interval,
    parameters.dopplerTimeS,
  );
  const courseTotal = parameters.courseWhiteMps ** 2 + parameters.courseSlowMps ** 2;
  const course = courseCurvatureVariance(courseEffective, STATED_LENGTH_M, median, interval);
  const positionInformation = 1 / (position.white + position.wander);
  const courseInformation = share(withCourse) / course;
  const useful = share(withCourse) > 0.5 ? courseTotal / courseEffective : position.white * positionInformation;
  const { courseS, courseSdS, speedS, speedSdS } = tuned.lags;
  const noise: NoiseModel = {
    sigmaWhiteM: parameters.whiteM,
    sigmaWanderM: wanderSd(parameters.diffusion, WANDER_TIME_S),
    wanderTimeS: WANDER_TIME_S,
    sigmaDopplerWhiteMps: withCourse > 0 ? parameters.courseWhiteMps : 0,
    sigmaDopplerSlowMps: withCourse > 0 ? parameters.courseSlowMps : 0,
    dopplerTimeS: parameters.dopplerTimeS,
    sigmaSpeedMps: withSpeed > 0 ? tuned.speedSdMps : 0,
    lagS: withCourse > 0 ? courseS : speedS,
    lagSdS: withCourse > 0 ? courseSdS : withSpeed > 0 ? speedSdS : 0,
  };
  return {
    noise,
    fixCount: count,
    rateHz: 1 / interval,
    effectiveFixes: Math.round(moving * Math.min(1, Math.max(0, Number.isFinite(useful) ? useful : 0))),
    courseShare: share(withCourse),
    speedShare: share(withSpeed),
    smallestCurvaturePerM: NINETY_FIVE / Math.sqrt(positionInformation + courseInformation),
  };
}
