import type { RunFixes } from '../../shared/model/run.ts';

/** Longest step over which the accelerations at its ends say how speed ran between, s. */
const SHORT_STEP_S = 3;
/** Longest step trusted to the speeds at its ends alone, s; beyond, positions bound the distance. */
const LONG_STEP_S = 6;
/** Greatest plausible length of a way over its chord. */
const DETOUR = 1.5;
/** Shorter than the noise of two positions a chord is no displacement, m. */
const CHORD_NOISE_M = 10;

/**
 * Distance along the line from the smoothed speed, never from the positions (their errors would lengthen it): trapezoid with
 * the end correction (a0 - a1) dt^2 / 12. Across a long gap the speeds at its ends say little of what lay between: there the
 * distance is kept between the chord and half as much again. Never decreases.
 */
export function writeChainage(
  { timeS, xM, yM }: RunFixes,
  speedMps: Float64Array,
  accelerationMps2: Float64Array,
  out: Float64Array,
): void {
  if (out.length > 0) out[0] = 0;
  for (let i = 1; i < out.length; i++) {
    const dt = timeS[i]! - timeS[i - 1]!;
    const standing = speedMps[i]! === 0 && speedMps[i - 1]! === 0;
    let increment = (dt * (speedMps[i - 1]! + speedMps[i]!)) / 2;
    if (dt > LONG_STEP_S) {
      const chord = Math.hypot(xM[i]! - xM[i - 1]!, yM[i]! - yM[i - 1]!);
      const least = chord > CHORD_NOISE_M ? chord : 0;
      increment = Math.min(Math.max(increment, least), DETOUR * chord + CHORD_NOISE_M);
    } else if (dt < SHORT_STEP_S && !standing) {
      increment += ((accelerationMps2[i - 1]! - accelerationMps2[i]!) * dt * dt) / 12;
    }
    out[i] = out[i - 1]! + Math.max(0, increment);
  }
}

/** Takes whole turns out of the steps of the heading, so that it is continuous. */
export function unwrapHeading(headingRad: Float64Array): void {
  const turn = 2 * Math.PI;
  for (let i = 1; i < headingRad.length; i++) {
    headingRad[i]! -= turn * Math.round((headingRad[i]! - headingRad[i - 1]!) / turn);
  }
}
