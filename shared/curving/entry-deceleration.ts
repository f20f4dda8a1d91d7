/**
 * Greatest deceleration between two chainages: max(-dv/dt), m/s^2, 0 when the vehicle never slows; NaN stations are
 * passed over. chainageM m, accelerationMps2 m/s^2 (dv/dt), same length.
 * Source: definition; common practice, no source.
 */
export function entryDecelerationMps2(
  chainageM: ArrayLike<number>,
  accelerationMps2: ArrayLike<number>,
  fromM: number,
  toM: number,
): number {
  let most = 0;
  for (let i = 0; i < chainageM.length; i++) {
    const s = chainageM[i]!;
    if (s >= fromM && s <= toM && -accelerationMps2[i]! > most) most = -accelerationMps2[i]!;
  }
  return most;
}
