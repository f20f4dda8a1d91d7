import { STANDARD_GRAVITY_MPS2 } from '../units.ts';
import { equilibriumCantMm } from './equilibrium-cant.ts';

/**
 * Cant deficiency I = D_eq - D, mm; negative is cant excess.
 *
 * speedMps m/s; curvaturePerM 1/m, either sign; cantMm mm, positive in favour of the curve; baseMm mm.
 * NaN in, NaN out; never throws.
 * Source: EN 13803-1:2010, 5.2 (from memory); 49 CFR 213.57 uses the same sum of cant and deficiency (read).
 */
export function cantDeficiencyMm(
  speedMps: number,
  curvaturePerM: number,
  cantMm: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  return equilibriumCantMm(speedMps, curvaturePerM, baseMm, g) - cantMm;
}

/**
 * Speed at which the cant deficiency is just `deficiencyMm`: v = sqrt(g (D + I) / (b |kappa|)), m/s.
 * 0 when D + I <= 0; Infinity on a straight.
 * Source: inverse of cantDeficiencyMm.
 */
export function speedForDeficiencyMps(
  deficiencyMm: number,
  curvaturePerM: number,
  cantMm: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  const sumMm = cantMm + deficiencyMm;
  return sumMm <= 0 ? 0 : Math.sqrt((g * sumMm) / (baseMm * Math.abs(curvaturePerM)));
}

/**
 * Track-plane acceleration that a cant deficiency stands for, small angles: a = g I / b, m/s^2.
 * 153 mm on 1500 mm is 1.00 m/s^2. Source: EN 13803-1:2010, annex (from memory).
 */
export function deficiencyToAccelerationMps2(
  deficiencyMm: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  return (g * deficiencyMm) / baseMm;
}
