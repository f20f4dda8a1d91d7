import { wrapAngle } from './motion-filter.ts';
import type { Observations } from './observations.ts';
import { LEAST_SPEED_FOR_COURSE_MPS, USE } from './observations.ts';
import type { Parameters } from './parameters.ts';

/** Residuals beyond this many sd enlarge the variance. */
const SIGMAS = 3;
const LARGEST_FACTOR = 100;

/** Weight of a fix against its neighbours' residuals: a manoeuvre that the first pass missed shows in several in a row, an outlier in one. */
const ALONE = 0.5;

/** Standardised residuals of the first pass, kept for each channel of Doppler. */
export interface DopplerResiduals {
  readonly speed: Float32Array;
  readonly course: Float32Array;
}

/**
 * Residuals of fix i against the smoothed state: the variance factor of the position is multiplied by max(1, (r / 3 sigma)^2), at
 * most 100; the standardised residuals of speed and course are written out for weighDoppler.
 */
export function reviewFix(
  observations: Observations,
  parameters: Parameters,
  i: number,
  state: Float64Array,
  residuals: DopplerResiduals,
): void {
  const o = observations;
  const use = o.use[i]!;
  if ((use & USE.POSITION) !== 0) {
    const dx = o.xM[i]! - state[0]!;
    const dy = o.yM[i]! - state[1]!;
    const white = (parameters.whiteM ** 2 + o.positionRoundingM2) * o.positionFactor[i]!;
    const stamp = (parameters.stampSdS * state[3]!) ** 2;
    const factor = Math.min(LARGEST_FACTOR, (dx * dx + dy * dy) / (SIGMAS * SIGMAS * (1.3 * white + stamp)));
    if (factor > 1) o.positionFactor[i]! *= factor;
  }
  if ((use & (USE.SPEED | USE.STANDING)) === USE.SPEED) {
    const residual = o.speedMps![i]! - state[3]!;
    residuals.speed[i] = residual / Math.sqrt(parameters.speedMps ** 2 + o.speedRounding);
  }
  if ((use & USE.COURSE) !== 0) {
    const v = Math.max(LEAST_SPEED_FOR_COURSE_MPS, state[3]!);
    const residual = v * wrapAngle(o.northRad[i]! - o.courseRad![i]! - state[2]! - state[7]! / v);
    residuals.course[i] = residual / Math.sqrt(parameters.courseWhiteMps ** 2 + o.courseRoundingRad2 * v * v);
  }
}

/** Variance factors of the Doppler readings: max(1, (r / 3)^2), at most 100, where a residual stands alone among its neighbours. */
export function weighDoppler(residuals: DopplerResiduals, factor: Float32Array): void {
  for (let i = 0; i < factor.length; i++) {
    const excess = Math.max(lonely(residuals.speed, i), lonely(residuals.course, i)) / SIGMAS;
    if (excess > 1) factor[i]! *= Math.min(LARGEST_FACTOR, excess * excess);
  }
}

/** |r_i| where neither neighbour's residual of the same sign reaches half of it, else 0. */
function lonely(residual: Float32Array, i: number): number {
  const r = residual[i]!;
  const before = i > 0 ? residual[i - 1]! : 0;
  const after = i + 1 < residual.length ? residual[i + 1]! : 0;
  const size = Math.abs(r);
  return before * r > ALONE * r * r || after * r > ALONE * r * r ? 0 : size;
}
