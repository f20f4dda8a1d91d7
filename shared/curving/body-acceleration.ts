import { STANDARD_GRAVITY_MPS2 } from '../units.ts';

/**
 * Lateral acceleration felt in the body, quasi-static: a_b = (1 + s) (1 - c) a_q.
 *
 * trackMps2: a_q in the track plane, m/s^2; rollCoefficient s: body roll relative to the track plane over the
 * cant-deficiency angle (0.1 to 0.4 usual, from memory); tiltCompensation c: share of a_q taken away by tilting, 0..1.
 * Result m/s^2, sign of a_q.
 * Source: UIC 505 flexibility coefficient (from memory); tilt share as used in Persson, Goodall and Sasaki (read).
 */
export function bodyAccelerationMps2(trackMps2: number, rollCoefficient: number, tiltCompensation = 0): number {
  return (1 + rollCoefficient) * (1 - tiltCompensation) * trackMps2;
}

/**
 * Quasi-static roll of the body relative to the track plane, phi = s asin(a_q / g), radians, positive outwards.
 * NaN when |a_q| > g. Source: UIC 505 (from memory).
 */
export function quasiStaticRollRad(
  trackMps2: number,
  rollCoefficient: number,
  g: number = STANDARD_GRAVITY_MPS2,
): number {
  return rollCoefficient * Math.asin(trackMps2 / g);
}
