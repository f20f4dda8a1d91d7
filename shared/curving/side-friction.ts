import { STANDARD_GRAVITY_MPS2 } from '../units.ts';

/**
 * Side friction demand on a banked curve, exact: f = (x - e) / (1 + e x), x = v^2 |kappa| / g.
 * superelevation e as a ratio (0.04 = 4 %), positive in favour of the curve. Result dimensionless.
 * Source: point mass on a banked curve; AASHTO Green Book, chapter 3 (form from memory), which then drops e x.
 */
export function sideFriction(
  speedMps: number,
  curvaturePerM: number,
  superelevation: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  const x = (speedMps * speedMps * Math.abs(curvaturePerM)) / g;
  return (x - superelevation) / (1 + superelevation * x);
}

/**
 * Speed at which the side friction demand is just f: x = (f + e) / (1 - e f), v = sqrt(x g / |kappa|), m/s; 0 when
 * none.
 */
export function speedForSideFrictionMps(
  friction: number,
  curvaturePerM: number,
  superelevation: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  const x = (friction + superelevation) / (1 - superelevation * friction);
  return x <= 0 ? 0 : Math.sqrt((x * g) / Math.abs(curvaturePerM));
}

/** Superelevation at which the side friction demand is just f at a speed: e = (x - f) / (1 + x f), a ratio. */
export function superelevationForSideFriction(
  friction: number,
  speedMps: number,
  curvaturePerM: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  const x = (speedMps * speedMps * Math.abs(curvaturePerM)) / g;
  return (x - friction) / (1 + x * friction);
}

/**
 * Least design radius by the customary road formulas, which round g * 3.6^2 to 127 (m, km/h) and to 15 (ft, mph):
 * R = V^2 / (k (e + f)). Source: AASHTO Green Book, chapter 3 (from memory); 127 and 15 as printed (read).
 */
export function designRadius(speed: number, superelevation: number, friction: number, system: 'metric' | 'us'): number {
  return (speed * speed) / ((system === 'metric' ? 127 : 15) * (superelevation + friction));
}
