/**
 * Distance along the line from the smoothed speed, never from the positions (their errors would lengthen it):
 * trapezoid with the end correction (a0 - a1) dt^2 / 12. Never decreases.
 */
export function writeChainage(
  timeS: Float64Array,
  speedMps: Float64Array,
  accelerationMps2: Float64Array,
  out: Float64Array,
): void {
  if (out.length > 0) out[0] = 0;
  for (let i = 1; i < out.length; i++) {
    const dt = timeS[i]! - timeS[i - 1]!;
    const standing = speedMps[i]! === 0 && speedMps[i - 1]! === 0;
    const correction = ((accelerationMps2[i - 1]! - accelerationMps2[i]!) * dt * dt) / 12;
    const mean = (dt * (speedMps[i - 1]! + speedMps[i]!)) / 2;
    // The correction belongs to short steps; across a gap the accelerations at its ends say little of what lay between.
    out[i] = out[i - 1]! + (standing ? 0 : Math.max(0, mean + (dt < 3 ? correction : 0)));
  }
}
