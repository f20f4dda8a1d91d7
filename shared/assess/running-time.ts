import type { Passage } from '../model/passage.ts';
import type { Vehicle } from '../schema/vehicle.ts';
import { speedChangeCostS } from '../curving/speed-profile.ts';

/** Time to run over stations at their speeds, s; standing stations (below 0.1 m/s) count as 0.1 m/s. */
export function timeAlongS(chainageM: ArrayLike<number>, speedMps: ArrayLike<number>): number {
  let time = 0;
  for (let i = 1; i < chainageM.length; i++) {
    const sum = Math.max(speedMps[i - 1]!, 0.1) + Math.max(speedMps[i]!, 0.1);
    time += (2 * (chainageM[i]! - chainageM[i - 1]!)) / sum;
  }
  return time;
}

/**
 * Running time that passing one curve at no more than `limitMps` costs, s: inside the curve from station to station,
 * outside
 * by braking from and accelerating back to the speeds recorded at its ends with the vehicle's rates. What the
 * neighbouring
 * curves cost is not shared out here; the line's advice does that.
 */
export function slowerCurveCostS(passage: Passage, limitMps: number, vehicle: Vehicle): number {
  const { chainageM, speedMps } = passage;
  if (!(limitMps > 0)) return NaN;
  let cost = 0;
  for (let i = 1; i < chainageM.length; i++) {
    const recorded = speedMps[i - 1]! + speedMps[i]!;
    const slower = Math.min(speedMps[i - 1]!, limitMps) + Math.min(speedMps[i]!, limitMps);
    if (recorded > 0 && slower > 0) cost += 2 * (chainageM[i]! - chainageM[i - 1]!) * (1 / slower - 1 / recorded);
  }
  return (
    cost +
    speedChangeCostS(speedMps[0]!, limitMps, vehicle.brakingMps2) +
    speedChangeCostS(speedMps[speedMps.length - 1]!, limitMps, vehicle.accelerationMps2)
  );
}
