import { wrapAngle } from './motion-filter.ts';
import type { Observations } from './observations.ts';
import { USE } from './observations.ts';
import type { Parameters } from './parameters.ts';

/** Residuals beyond this many sd enlarge the variance. */
const SIGMAS = 3;
const LARGEST_FACTOR = 100;

/** Multiplies the variance factors of fix i by max(1, (r / 3 sigma)^2), at most 100, from its residual against the smoothed state. */
export function reweigh(observations: Observations, parameters: Parameters, i: number, state: Float64Array): void {
  const o = observations;
  const use = o.use[i]!;
  const excess = (square: number, variance: number): number =>
    Math.min(LARGEST_FACTOR, square / (SIGMAS * SIGMAS * variance));
  if ((use & USE.POSITION) !== 0) {
    const dx = o.xM[i]! - state[0]!;
    const dy = o.yM[i]! - state[1]!;
    const white = (parameters.whiteM ** 2 + o.positionRoundingM2) * o.positionFactor[i]!;
    const stamp = (parameters.stampSdS * state[3]!) ** 2;
    const factor = excess(dx * dx + dy * dy, 1.3 * white + stamp);
    if (factor > 1) o.positionFactor[i]! *= factor;
  }
  let doppler = 1;
  if ((use & (USE.SPEED | USE.STANDING)) === USE.SPEED) {
    const residual = o.speedMps![i]! - (state[3]! - parameters.lagS * state[4]!);
    doppler = excess(residual * residual, parameters.speedMps ** 2 + o.speedRounding);
  }
  if ((use & USE.COURSE) !== 0) {
    const v = Math.max(1.2, state[3]!);
    const expected = state[2]! - parameters.lagS * v * state[5]! + state[7]! / v;
    const residual = v * wrapAngle(o.northRad[i]! - o.courseRad![i]! - expected);
    doppler = Math.max(
      doppler,
      excess(residual * residual, parameters.courseWhiteMps ** 2 + o.courseRoundingRad2 * v * v),
    );
  }
  if (doppler > 1) o.dopplerFactor[i]! *= doppler;
}
