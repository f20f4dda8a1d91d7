/**
 * Makes a permitted speed drivable: the highest speed profile that nowhere exceeds `permittedMps` and whose speed
 * changes
 * stay within the vehicle's acceleration and braking: v_i^2 <= v_{i-1}^2 + 2 a ds (forward pass) and
 * v_i^2 <= v_{i+1}^2 + 2 b ds (backward pass).
 *
 * chainageM: m, never falling; permittedMps: m/s, Infinity where nothing limits; same length n; accelerationMps2 and
 * brakingMps2 > 0. Returns a new column of length n. Time O(n).
 * Errors: RangeError when lengths differ or a rate is not positive.
 * Source: two-pass speed envelope, common practice, no source; checked against brute force in the tests.
 */
export function drivableSpeedMps(
  chainageM: ArrayLike<number>,
  permittedMps: ArrayLike<number>,
  accelerationMps2: number,
  brakingMps2: number,
): Float64Array {
  const n = chainageM.length;
  if (permittedMps.length !== n) throw new RangeError('A speed profile needs one permitted speed a station');
  if (!(accelerationMps2 > 0) || !(brakingMps2 > 0)) throw new RangeError('Acceleration and braking must be positive');
  const speed = Float64Array.from(permittedMps);
  for (let i = 1; i < n; i++) {
    const before = speed[i - 1]!;
    const reach = Math.sqrt(before * before + 2 * accelerationMps2 * (chainageM[i]! - chainageM[i - 1]!));
    if (reach < speed[i]!) speed[i] = reach;
  }
  for (let i = n - 2; i >= 0; i--) {
    const after = speed[i + 1]!;
    const reach = Math.sqrt(after * after + 2 * brakingMps2 * (chainageM[i + 1]! - chainageM[i]!));
    if (reach < speed[i]!) speed[i] = reach;
  }
  return speed;
}

/**
 * Time lost by driving `slowerMps` instead of `recordedMps` over the stations: sum of 2 ds / (v_i + v_{i+1}), the
 * exact time
 * at constant acceleration within a step, of the one less the other, s. Steps where a speed is unknown or both ends
 * stand
 * still cost nothing: standing time is not part of it.
 */
export function timeLostS(
  chainageM: ArrayLike<number>,
  recordedMps: ArrayLike<number>,
  slowerMps: ArrayLike<number>,
): number {
  let lost = 0;
  for (let i = 1; i < chainageM.length; i++) {
    const recorded = recordedMps[i - 1]! + recordedMps[i]!;
    const slower = slowerMps[i - 1]! + slowerMps[i]!;
    if (!(recorded > 0) || !(slower > 0)) continue;
    lost += 2 * (chainageM[i]! - chainageM[i - 1]!) * (1 / slower - 1 / recorded);
  }
  return lost;
}

/**
 * Time lost outside a slow stretch in braking to it or regaining the speed, at constant rate from or to a steady speed:
 * (v - u)^2 / (2 a v), s; 0 when nothing is to be changed. Source: kinematics.
 */
export function speedChangeCostS(steadyMps: number, reducedMps: number, rateMps2: number): number {
  if (!(steadyMps > reducedMps)) return 0;
  const drop = steadyMps - reducedMps;
  return (drop * drop) / (2 * rateMps2 * steadyMps);
}
