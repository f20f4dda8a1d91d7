import type { RunPassages } from '../model/passage.ts';
import type { Setup } from '../schema/setup.ts';
import { kmhToMps, mpsToKmh } from '../units.ts';
import { drivableSpeedMps, timeLostS } from '../curving/speed-profile.ts';
import { assessRun } from './assess-run.ts';
import type { ProfileInput } from './profile.ts';
import { stationFrom } from './stations.ts';

/** What slowing for one curve costs and brings. */
interface CurveAdvice {
  readonly curve: number;
  /** Speed that complies at the chosen confidence, km/h. */
  readonly permittedKmh: number;
  /** Running time lost when only this curve is obeyed, s. */
  readonly lostS: number;
  readonly utilisation: number | null;
  /** Utilisation of whichever criterion governs when the curve is passed at the permitted speed. */
  readonly utilisationAfter: number | null;
  /** Utilisation given back per second lost; Infinity when it costs nothing. */
  readonly gainPerS: number;
}

export interface LineAdvice {
  /** Permitted speed at each station, m/s; Infinity where no curve limits. */
  readonly permittedMps: Float64Array;
  /** The recorded run slowed so that it obeys everywhere, with the vehicle's braking and acceleration, m/s. */
  readonly drivenMps: Float64Array;
  /**
   * Running time lost against the recorded run, all curves together, s. Less than the sum when curves share a
   * braking.
   */
  readonly lostS: number;
  /** Curves that are to be slowed for, those first that buy the most comfort for the least time. */
  readonly order: readonly CurveAdvice[];
  /** Curves that are not within their limits and that slowing does not bring within them all. */
  readonly uncured: readonly number[];
}

interface SlowStretch {
  readonly fromM: number;
  readonly toM: number;
  readonly mps: number;
}

/** Stations [from, to) of a profile as plain columns. */
interface Stations {
  readonly chainageM: Float64Array;
  readonly speedMps: Float64Array;
}

function stationsOf(profile: ProfileInput, from: number, to: number): Stations {
  const cut = (column: ArrayLike<number>): Float64Array =>
    Float64Array.from({ length: to - from }, (_, i) => column[from + i]!);
  return { chainageM: cut(profile.chainageM), speedMps: cut(profile.speedMps) };
}

/** Speed column with the permitted speed of some stretches, Infinity elsewhere. */
function permittedColumn({ chainageM }: Stations, stretches: readonly SlowStretch[]): Float64Array {
  const out = new Float64Array(chainageM.length).fill(Infinity);
  for (const { fromM, toM, mps } of stretches) {
    for (let i = stationFrom(chainageM, fromM); i < out.length && chainageM[i]! <= toM; i++) {
      out[i] = Math.min(out[i]!, mps);
    }
  }
  return out;
}

/** The recorded speeds held under a drivable envelope of permitted ones. */
function slowed(stations: Stations, permitted: Float64Array, setup: Setup): Float64Array {
  const { accelerationMps2, brakingMps2 } = setup.vehicle;
  const envelope = drivableSpeedMps(stations.chainageM, permitted, accelerationMps2, brakingMps2);
  return envelope.map((v, i) => Math.min(v, stations.speedMps[i]!));
}

/**
 * Time lost when one stretch alone is obeyed: only the stations within braking and accelerating distance of it are
 * looked at.
 */
function lostAloneS(profile: ProfileInput, stretch: SlowStretch, topMps: number, setup: Setup): number {
  const { accelerationMps2, brakingMps2 } = setup.vehicle;
  const square = topMps * topMps;
  const from = Math.max(stationFrom(profile.chainageM, stretch.fromM - square / (2 * brakingMps2)) - 1, 0);
  const to = Math.min(stationFrom(profile.chainageM, stretch.toM + square / (2 * accelerationMps2)) + 1, profile.count);
  const near = stationsOf(profile, from, to);
  return timeLostS(near.chainageM, near.speedMps, slowed(near, permittedColumn(near, [stretch]), setup));
}

/**
 * Advice for the line: the recorded run slowed where, and only where, a curve is over or undecided, so that it
 * complies with
 * all criteria at the chosen confidence; what that costs, curve by curve and in total; and the order in which curves
 * buy the most comfort
 * for the least time. A curve within its limits keeps its recorded speed. The advice never runs faster than recorded.
 */
export function adviseLine(profile: ProfileInput, passages: RunPassages, setup: Setup): LineAdvice {
  const before = assessRun(passages, setup, { working: false }).curves;
  const limits: (SlowStretch & { readonly index: number })[] = [];
  const uncured: number[] = [];
  before.forEach(({ row, cures }, index) => {
    if (row.verdict !== 'over' && row.verdict !== 'undecided') return;
    const cure = cures?.find((c) => c.kind === 'speed');
    // A curve that slowing helps without curing it whole is slowed for and listed.
    if (cure?.feasible !== true) uncured.push(row.curve);
    if (cure === undefined || !(cure.value > 0)) return;
    const { curve } = passages.passages[index]!;
    limits.push({ index, fromM: curve.startM, toM: curve.endM, mps: kmhToMps(cure.value) });
  });

  const all = stationsOf(profile, 0, profile.count);
  const permittedMps = permittedColumn(all, limits);
  const drivenMps = slowed(all, permittedMps, setup);
  const topMps = all.speedMps.reduce((top, v) => (v > top ? v : top), 0);
  const byIndex = new Map(limits.map((limit) => [limit.index, limit]));
  const capped: RunPassages = {
    ...passages,
    passages: passages.passages.map((passage, index) => {
      const limit = byIndex.get(index);
      return limit === undefined
        ? passage
        : { ...passage, speedMps: passage.speedMps.map((v) => Math.min(v, limit.mps)) };
    }),
  };
  const after = assessRun(capped, setup, { working: false }).curves;

  const order = limits.map(({ index, ...stretch }): CurveAdvice => {
    const { row } = before[index]!;
    const lostS = lostAloneS(profile, stretch, topMps, setup);
    const utilisationAfter = after[index]!.row.utilisation;
    const gain = Math.max((row.utilisation ?? 0) - (utilisationAfter ?? 0), 0);
    return {
      curve: row.curve,
      permittedKmh: mpsToKmh(stretch.mps),
      lostS,
      utilisation: row.utilisation,
      utilisationAfter,
      gainPerS: lostS > 0 ? gain / lostS : gain > 0 ? Infinity : 0,
    };
  });
  order.sort((a, b) => b.gainPerS - a.gainPerS || a.curve - b.curve);
  return { permittedMps, drivenMps, lostS: timeLostS(all.chainageM, all.speedMps, drivenMps), order, uncured };
}
