import { STANDARD_GRAVITY_MPS2 } from '../units.ts';

/**
 * Rate of change along a transition of linear cant and curvature: X v / L, in units of X per second.
 *
 * change: the change of cant or of cant deficiency over the transition, mm (or of acceleration, m/s^2);
 * speedMps m/s; lengthM m, > 0. Infinity for a length of 0.
 * Source: EN 13803-1:2010, 5.2 (from memory).
 */
export function rateOfChange(change: number, speedMps: number, lengthM: number): number {
  return (change * speedMps) / lengthM;
}

/**
 * Length at which a change takes place at just the rate `limit` (same unit per second), m. Source: inverse of
 * rateOfChange.
 */
export function transitionLengthForRateM(change: number, speedMps: number, limit: number): number {
  return (Math.abs(change) * speedMps) / limit;
}

/**
 * Lateral jerk in the track plane from the rate of change of cant deficiency, small angles: j = g (dI/dt) / b, m/s^3.
 * 55 mm/s on 1500 mm is 0.360 m/s^3. Source: time derivative of a = g I / b.
 */
export function jerkFromDeficiencyRateMps3(rateMmS: number, baseMm: number, g: number = STANDARD_GRAVITY_MPS2): number {
  return (g * rateMmS) / baseMm;
}

/**
 * Speed at which a transition's change of deficiency, (b/g) v^2 kappa - D, runs off at just `rateMmS`:
 * the largest root of (b/g) kappa v^3 - D v = rate L, m/s.
 *
 * curvatureChangePerM: change of |curvature| over the transition, 1/m, > 0; cantChangeMm: change of cant over it, mm.
 * Newton from above on a function that is convex and rising beyond its largest root, so it cannot overshoot below it.
 * Source: inverse of rateOfChange with the change of cantDeficiencyMm.
 */
export function speedForDeficiencyRateMps(
  rateMmS: number,
  curvatureChangePerM: number,
  cantChangeMm: number,
  lengthM: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  const k = (baseMm * Math.abs(curvatureChangePerM)) / g;
  const goal = rateMmS * lengthM;
  if (k === 0) return Infinity;
  // Above the root: v^2 >= 2 D / k keeps the cubic term dominant, v^3 >= 2 goal / k covers the right side.
  let v = Math.max(Math.sqrt((2 * Math.max(cantChangeMm, 0)) / k), Math.cbrt((2 * goal) / k));
  for (let i = 0; i < 50; i++) {
    const step = (k * v * v * v - cantChangeMm * v - goal) / (3 * k * v * v - cantChangeMm);
    v -= step;
    if (Math.abs(step) <= 1e-12 * v) break;
  }
  return v;
}
