import { STANDARD_GRAVITY_MPS2 } from '../units.ts';
import { cantAngleRad } from './conventions.ts';

/**
 * Lateral acceleration in the track plane, exact: a_q = v^2 |kappa| cos(theta) - g sin(theta), sin(theta) = D / b.
 *
 * speedMps m/s; curvaturePerM 1/m, either sign; cantMm mm, positive in favour of the curve; baseMm mm.
 * Result m/s^2, positive pushes passengers outwards. The small-angle form g I / b is larger by
 * (v^2 kappa)(1 - cos theta), at most 0.5 % of v^2 kappa at 150 mm on 1500 mm.
 * NaN in, NaN out; never throws.
 * Source: mechanics; the convention is drawn in conventions.ts.
 */
export function trackPlaneAccelerationMps2(
  speedMps: number,
  curvaturePerM: number,
  cantMm: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  const theta = cantAngleRad(cantMm, baseMm);
  return speedMps * speedMps * Math.abs(curvaturePerM) * Math.cos(theta) - g * Math.sin(theta);
}

/**
 * Speed at which the track-plane acceleration is just `limitMps2`: v = sqrt((a + g sin theta) / (|kappa| cos theta)),
 * m/s.
 * 0 when no speed complies; Infinity on a straight.
 * Source: inverse of trackPlaneAccelerationMps2.
 */
export function speedForTrackPlaneMps(
  limitMps2: number,
  curvaturePerM: number,
  cantMm: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  const theta = cantAngleRad(cantMm, baseMm);
  const horizontal = (limitMps2 + g * Math.sin(theta)) / Math.cos(theta);
  return horizontal <= 0 ? 0 : Math.sqrt(horizontal / Math.abs(curvaturePerM));
}

/**
 * Cant at which the track-plane acceleration is just `limitMps2` at a speed, mm:
 * a_h cos(theta) - g sin(theta) = a, solved as sqrt(a_h^2 + g^2) sin(psi - theta) = a with tan(psi) = a_h / g.
 * Negative when even adverse cant would comply.
 * Source: inverse of trackPlaneAccelerationMps2.
 */
export function cantForTrackPlaneMm(
  limitMps2: number,
  speedMps: number,
  curvaturePerM: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  const horizontal = speedMps * speedMps * Math.abs(curvaturePerM);
  const theta = Math.atan2(horizontal, g) - Math.asin(limitMps2 / Math.hypot(horizontal, g));
  return baseMm * Math.sin(theta);
}
