import { PACKED, STATES } from './covariance-kernels.ts';
import type { Observations } from './observations.ts';
import { USE } from './observations.ts';
import type { Parameters } from './parameters.ts';

/** Displacement that fixes a first heading; two noisy fixes close together can point the wrong way, m. */
const LEAST_DISPLACEMENT_M = 12;
const HEADING_VARIANCE = 0.6;
const HEADING_VARIANCE_WITH_COURSE = 0.1;
const POSITION_VARIANCE_M2 = 100;
const SPEED_VARIANCE = 9;
const ACCELERATION_VARIANCE = 0.25;
/** Curvature before anything is known of it: a radius of 40 m, or a lateral acceleration of 1.5 m/s^2, is one standard deviation. */
const CURVATURE_SD_PER_M = 0.025;
const LATERAL_SD_MPS2 = 1.5;

/** Writes the state and covariance before fix i is taken in. The heading comes from the first course or the first displacement of 12 m. */
export function writeStart(
  observations: Observations,
  parameters: Parameters,
  i: number,
  state: Float64Array,
  covariance: Float64Array,
): void {
  const { xM, yM, timeS, use, northRad, courseRad, speedMps, count } = observations;
  let heading = 0;
  let headingVariance = HEADING_VARIANCE;
  let speed = 0;
  for (let j = i; j < count; j++) {
    if ((use[j]! & USE.COURSE) !== 0 && courseRad !== null && (j === i || (use[j]! & USE.RESTART) === 0)) {
      heading = northRad[j]! - courseRad[j]!;
      headingVariance = HEADING_VARIANCE_WITH_COURSE;
      break;
    }
    const dx = xM[j]! - xM[i]!;
    const dy = yM[j]! - yM[i]!;
    if (j > i && (use[j]! & USE.RESTART) !== 0) {
      // The stretch ends before the vehicle has gone far: what displacement there is must do.
      heading = Math.atan2(dy, dx);
      break;
    }
    if (dx * dx + dy * dy >= LEAST_DISPLACEMENT_M ** 2) {
      heading = Math.atan2(dy, dx);
      if ((use[i]! & USE.STANDING) === 0) speed = Math.min(60, Math.hypot(dx, dy) / (timeS[j]! - timeS[i]!));
      break;
    }
  }
  if ((use[i]! & USE.SPEED) !== 0 && speedMps !== null) speed = speedMps[i]!;
  state.fill(0, 0, STATES);
  state[0] = xM[i]!;
  state[1] = yM[i]!;
  state[2] = heading;
  state[3] = speed;
  covariance.fill(0, 0, PACKED);
  covariance[0] = POSITION_VARIANCE_M2;
  covariance[2] = POSITION_VARIANCE_M2;
  covariance[5] = headingVariance;
  covariance[9] = SPEED_VARIANCE;
  covariance[14] = ACCELERATION_VARIANCE;
  covariance[20] = Math.min(CURVATURE_SD_PER_M, LATERAL_SD_MPS2 / Math.max(1, speed * speed)) ** 2;
  covariance[27] = parameters.curvatureWalk / (2 * parameters.changeLengthM);
  covariance[35] = parameters.courseSlowMps ** 2;
}
