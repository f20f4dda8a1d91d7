import { STANDARD_GRAVITY_MPS2 } from '../units.ts';

/**
 * Length over which a vehicle averages an abrupt change of curvature, m: the distance between its bogies (rail) or
 * axles (road). Used when the vehicle's own distance is not known.
 * Source: 12.2 m (40 ft) is customary in British practice (from memory).
 */
export const CUSTOMARY_VIRTUAL_LENGTH_M = 12.2;

/**
 * Abrupt change of cant deficiency where curvature changes without a transition: dI = b v^2 |dkappa| / g, mm.
 * Cant cannot change at a point, so it does not enter. curvatureChangePerM: signed difference across the point, 1/m.
 * Source: TSI INF (EU) 1299/2014, 4.2.4.4 (clause read, definition from memory).
 */
export function abruptDeficiencyChangeMm(
  speedMps: number,
  curvatureChangePerM: number,
  baseMm: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  return (baseMm * speedMps * speedMps * Math.abs(curvatureChangePerM)) / g;
}

/**
 * Length that a change of curvature effectively takes for a vehicle: the transition's own, never less than the virtual
 * length. Source: virtual transition of British practice (from memory).
 */
export function effectiveTransitionM(lengthM: number, virtualLengthM: number): number {
  return Math.max(lengthM, virtualLengthM);
}
