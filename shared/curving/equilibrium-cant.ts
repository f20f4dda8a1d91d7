import { STANDARD_GRAVITY_MPS2 } from '../units.ts';

/**
 * Equilibrium cant, the cant at which no lateral acceleration is felt: D_eq = b v^2 |kappa| / g.
 *
 * speedMps m/s; curvaturePerM 1/m, either sign; baseMm mm; result mm, >= 0.
 * Small-angle form (tangent taken for sine), the customary one: with b = 1500 mm, V in km/h and R in m it reads
 * 11.80 V^2 / R. NaN in, NaN out; never throws.
 * Source: EN 13803-1:2010, 5.2 (from memory); derivation 1500/(9.80665 * 3.6^2) = 11.802.
 */
export function equilibriumCantMm(
  speedMps: number,
  curvaturePerM: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  return (baseMm * speedMps * speedMps * Math.abs(curvaturePerM)) / g;
}

/**
 * Speed at which a cant is exactly right: v = sqrt(g D / (b |kappa|)), m/s. Infinity on a straight with cant.
 * Source: inverse of equilibriumCantMm.
 */
export function equilibriumSpeedMps(
  cantMm: number,
  curvaturePerM: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  return Math.sqrt((g * cantMm) / (baseMm * Math.abs(curvaturePerM)));
}
