import type { RandomStream } from './random.ts';
import { lastNotAbove, type SyntheticLine } from './line.ts';

export interface SpeedLimit {
  readonly startM: number;
  readonly endM: number;
  readonly speedMps: number;
}

export interface StationStop {
  readonly chainageM: number;
  readonly dwellS: number;
}

export interface SpeedPlan {
  /** Where nothing else limits, m/s. */
  readonly lineSpeedMps: number;
  readonly limits: readonly SpeedLimit[];
  readonly stops: readonly StationStop[];
  readonly accelerationMps2: number;
  readonly brakingMps2: number;
  /** Relative rms of the slow ripple of the driving. */
  readonly ripple: number;
  /** Standing at the start and at the end of the line for this long, s; null: passing there at speed. */
  readonly terminalDwellS: number | null;
}

/** Passage over a line: chainage and speed as functions of time from 0. */
export interface Travel {
  readonly durationS: number;
  at(timeS: number): { readonly chainageM: number; readonly speedMps: number; readonly accelerationMps2: number };
  /** Time of first reaching a chainage, s. */
  timeAt(chainageM: number): number;
  /** Speed when passing a chainage, m/s. */
  speedAt(chainageM: number): number;
}

const GRID_M = 1;

/**
 * Speed profile that keeps every limit, brakes before and accelerates after it at constant rates
 * (v^2 linear in distance), stands still at stops, and carries a smooth ripple.
 * Between grid points of 1 m the acceleration is constant in time.
 */
export function planTravel(line: SyntheticLine, plan: SpeedPlan, random: RandomStream): Travel {
  const cells = Math.max(1, Math.ceil(line.lengthM / GRID_M));
  const step = line.lengthM / cells;
  const speed = new Float64Array(cells + 1).fill(plan.lineSpeedMps);
  for (const limit of plan.limits) {
    const from = Math.max(0, Math.floor(limit.startM / step));
    const to = Math.min(cells, Math.ceil(limit.endM / step));
    for (let i = from; i <= to; i += 1) speed[i] = Math.min(speed[i]!, limit.speedMps);
  }
  const dwell = new Map<number, number>();
  for (const stop of plan.stops) dwell.set(Math.round(stop.chainageM / step), stop.dwellS);
  if (plan.terminalDwellS !== null) {
    dwell.set(0, plan.terminalDwellS);
    dwell.set(cells, plan.terminalDwellS);
  }
  for (const index of dwell.keys()) if (index >= 0 && index <= cells) speed[index] = 0;
  for (let i = 1; i <= cells; i += 1) {
    speed[i] = Math.min(speed[i]!, Math.sqrt(speed[i - 1]! ** 2 + 2 * plan.accelerationMps2 * step));
  }
  for (let i = cells - 1; i >= 0; i -= 1) {
    speed[i] = Math.min(speed[i]!, Math.sqrt(speed[i + 1]! ** 2 + 2 * plan.brakingMps2 * step));
  }
  const ripple = smoothRipple(random, plan.lineSpeedMps);
  for (let i = 0; i <= cells; i += 1) speed[i] = speed[i]! * (1 + plan.ripple * ripple(i * step));

  const nodeT: number[] = [];
  const nodeS: number[] = [];
  const nodeV: number[] = [];
  let time = 0;
  for (let i = 0; i <= cells; i += 1) {
    nodeT.push(time);
    nodeS.push(i * step);
    nodeV.push(speed[i]!);
    const wait = dwell.get(i);
    if (wait !== undefined && wait > 0) {
      time += wait;
      nodeT.push(time);
      nodeS.push(i * step);
      nodeV.push(0);
    }
    if (i < cells) time += (2 * step) / (speed[i]! + speed[i + 1]!);
  }

  return {
    durationS: time,
    at(timeS) {
      const t = Math.min(Math.max(timeS, 0), time);
      const i = Math.min(lastNotAbove(nodeT, t), nodeT.length - 2);
      const span = nodeT[i + 1]! - nodeT[i]!;
      const accelerationMps2 = span > 0 ? (nodeV[i + 1]! - nodeV[i]!) / span : 0;
      const d = t - nodeT[i]!;
      return {
        chainageM: nodeS[i]! + nodeV[i]! * d + (accelerationMps2 * d * d) / 2,
        speedMps: nodeV[i]! + accelerationMps2 * d,
        accelerationMps2,
      };
    },
    timeAt(chainageM) {
      let i = lastNotAbove(nodeS, chainageM);
      // First passing: of the two nodes of a stop the earlier one.
      if (i > 0 && nodeS[i - 1] === chainageM) i -= 1;
      const d = chainageM - nodeS[i]!;
      if (d <= 0 || i + 1 >= nodeS.length) return nodeT[i]!;
      const v = Math.sqrt(nodeV[i]! ** 2 + ((nodeV[i + 1]! ** 2 - nodeV[i]! ** 2) * d) / (nodeS[i + 1]! - nodeS[i]!));
      return nodeT[i]! + (2 * d) / (nodeV[i]! + v);
    },
    speedAt(chainageM) {
      const i = Math.min(lastNotAbove(nodeS, chainageM), nodeS.length - 2);
      const span = nodeS[i + 1]! - nodeS[i]!;
      if (span <= 0) return nodeV[i]!;
      const share = Math.min(1, Math.max(0, (chainageM - nodeS[i]!) / span));
      return Math.sqrt(nodeV[i]! ** 2 + (nodeV[i + 1]! ** 2 - nodeV[i]! ** 2) * share);
    },
  };
}

/** Sum of five sinusoids in distance of unit rms, periods of 15 to 90 s of travel at line speed. */
function smoothRipple(random: RandomStream, speedMps: number): (chainageM: number) => number {
  const waves = Array.from({ length: 5 }, () => ({
    perM: (2 * Math.PI) / (random.logBetween(15, 90) * speedMps),
    phase: random.between(0, 2 * Math.PI),
  }));
  const amplitude = Math.sqrt(2 / waves.length);
  return (chainageM) => waves.reduce((sum, wave) => sum + amplitude * Math.sin(wave.perM * chainageM + wave.phase), 0);
}
