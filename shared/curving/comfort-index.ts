export type Posture = 'seated' | 'standing';

/** Coefficients for accelerations in m/s^2, jerk in m/s^3 and roll velocity in DEGREES per second, percent. */
const CURVE_TRANSITION = {
  standing: { a: 28.54, b: 20.69, c: 11.1, d: 0.185, e: 2.283 },
  seated: { a: 8.97, b: 9.68, c: 5.9, d: 0.12, e: 1.626 },
} as const;

const DISCRETE_EVENT = {
  standing: { a: 16.62, b: 27.01, c: 37.0 },
  seated: { a: 8.46, b: 13.05, c: 21.7 },
} as const;

/**
 * Comfort index of a curve transition, percent of passengers dissatisfied:
 * P_CT = max(A a + B j - C, 0) + D r^E, at most 100.
 *
 * bodyMps2: largest lateral body acceleration, 1 s mean, from the start of the transition to 1.6 s after its end,
 * m/s^2;
 * jerkMps3: its largest change over 1 s, m/s^3; rollDegS: largest 1 s mean roll velocity within the transition, deg/s.
 * Units trap: the standard prints the roll term as 100 (D w)^E with w in rad/s and D = 3.64 / 0.916; the D used here
 * goes with deg/s.
 * Source: EN 12299:2009, curve transitions (coefficients and windows from memory; replaced by EN 12299:2024, read).
 */
export function comfortCurveTransitionPct(
  bodyMps2: number,
  jerkMps3: number,
  rollDegS: number,
  posture: Posture,
): number {
  const k = CURVE_TRANSITION[posture];
  const lateral = Math.max(k.a * Math.abs(bodyMps2) + k.b * Math.abs(jerkMps3) - k.c, 0);
  return Math.min(lateral + k.d * Math.abs(rollDegS) ** k.e, 100);
}

/**
 * Comfort index of a discrete event, percent dissatisfied: P_DE = max(a p + b m - c, 0), at most 100, p the
 * peak-to-peak and m the mean of lateral body acceleration over 2 s, m/s^2.
 * Source: EN 12299:2009, discrete events (from memory).
 */
export function comfortDiscreteEventPct(peakToPeakMps2: number, meanMps2: number, posture: Posture): number {
  const k = DISCRETE_EVENT[posture];
  return Math.min(Math.max(k.a * peakToPeakMps2 + k.b * Math.abs(meanMps2) - k.c, 0), 100);
}
