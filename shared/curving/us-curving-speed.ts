/**
 * Maximum curving speed, mph: V = sqrt((Ea + Eu) / (0.0007 D)), elevation and unbalance in inches, degrees of curve.
 * The printed tables round to the nearest mph. Source: 49 CFR 213.57(b) and Appendix A (read).
 */
export function usCurvingSpeedMph(degree: number, elevationIn: number, unbalanceIn: number): number {
  return Math.sqrt((elevationIn + unbalanceIn) / (0.0007 * degree));
}

/** Unbalance at a speed, inches: 0.0007 D V^2 - Ea. Source: inverse of usCurvingSpeedMph. */
export function usUnbalanceIn(degree: number, speedMph: number, elevationIn: number): number {
  return 0.0007 * degree * speedMph * speedMph - elevationIn;
}
