import { METRES_PER_FOOT } from '../units.ts';

/**
 * Arc definition: degrees of arc on 100 ft of arc, R = 18000 / (pi D) ft. Source: US highway practice (read: formula
 * pages).
 */
export function radiusFromArcDegreeM(degree: number): number {
  return (18000 / (Math.PI * degree)) * METRES_PER_FOOT;
}

/** Degrees of curve by the arc definition from a radius in m. Source: inverse of radiusFromArcDegreeM. */
export function arcDegreeFromRadius(radiusM: number): number {
  return (18000 * METRES_PER_FOOT) / (Math.PI * radiusM);
}

/**
 * Chord definition: degrees subtended by a 100 ft chord, R = 50 / sin(D / 2) ft. Source: US railway practice (read).
 */
export function radiusFromChordDegreeM(degree: number): number {
  return (50 / Math.sin((degree * Math.PI) / 360)) * METRES_PER_FOOT;
}

/**
 * Degrees of curve by the chord definition from a radius in m; NaN below 50 ft. Source: inverse of
 * radiusFromChordDegreeM.
 */
export function chordDegreeFromRadius(radiusM: number): number {
  return (Math.asin((50 * METRES_PER_FOOT) / radiusM) * 360) / Math.PI;
}
