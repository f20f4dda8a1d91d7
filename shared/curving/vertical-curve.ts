/**
 * Vertical acceleration on a vertical curve: a_v = v^2 / R_v = v^2 |kappa_v|, m/s^2.
 * speedMps m/s; verticalCurvaturePerM: second derivative of height by chainage, 1/m.
 * Source: EN 13803-1:2010 (from memory): R_v >= 0.35 V^2 is 0.22 m/s^2.
 */
export function verticalAccelerationMps2(speedMps: number, verticalCurvaturePerM: number): number {
  return speedMps * speedMps * Math.abs(verticalCurvaturePerM);
}

/**
 * Least vertical radius for a vertical acceleration: R_v = v^2 / a_v, m. Source: inverse of verticalAccelerationMps2.
 */
export function verticalRadiusM(speedMps: number, accelerationMps2: number): number {
  return (speedMps * speedMps) / accelerationMps2;
}
