import type { RunPassages } from '../model/passage.ts';
import type { Setup } from '../schema/setup.ts';
import { kmhToMps } from '../units.ts';
import { drivableSpeedMps, timeLostS } from '../curving/speed-profile.ts';
import { assessRun } from './assess-run.ts';
import type { ProfileInput } from './profile.ts';

/** What slowing for one curve costs and brings. */
interface CurveAdvice {
  readonly curve: number;
  /** Speed that complies at the chosen confidence, km/h; null when the curve needs none or no speed cures it. */
  readonly permittedKmh: number | null;
  /** Running time lost when only this curve is obeyed, s. */
  readonly lostS: number;
  readonly utilisation: number | null;
  /** Utilisation of the governing criterion when the curve is passed at the permitted speed. */
  readonly utilisationAfter: number | null;
  /** Utilisation given back per second lost; Infinity when it costs nothing. */
  readonly gainPerS: number;
}

export interface LineAdvice {
  /** Permitted speed at each station, m/s; Infinity where no curve limits. */
  readonly permittedMps: Float64Array;
  /** The recorded run slowed so that it obeys everywhere, with the vehicle's braking and acceleration, m/s. */
  readonly drivenMps: Float64Array;
  /** Running time lost against the recorded run, all curves together, s. Less than the sum when curves share a braking. */
  readonly lostS: number;
  /** Curves that are to be slowed for, those first that buy the most comfort for the least time. */
  readonly order: readonly CurveAdvice[];
  /** Curves that are not within their limits and that slowing does not bring within them all. */
  readonly uncured: readonly number[];
}

/** Speed column with the permitted speed of some curves, Infinity elsewhere. */
function permittedColumn(
  profile: ProfileInput,
  limits: readonly { fromM: number; toM: number; mps: number }[],
): Float64Array {
  const out = new Float64Array(profile.count).fill(Infinity);
  for (const { fromM, toM, mps } of limits) {
    for (let i = 0; i < profile.count; i++) {
      const s = profile.chainageM[i]!;
      if (s >= fromM && s <= toM && mps < out[i]!) out[i] = mps;
    }
  }
  return out;
}

/** The recorded speeds held under a drivable envelope of permitted ones. */
function slowed(profile: ProfileInput, permitted: Float64Array, setup: Setup): Float64Array {
  const { accelerationMps2, brakingMps2 } = setup.vehicle;
  const envelope = drivableSpeedMps(profile.chainageM, permitted, accelerationMps2, brakingMps2);
  return envelope.map((v, i) => Math.min(v, profile.speedMps[i]!));
}

/**
 * Advice for the line: the recorded run slowed where, and only where, a curve is over or undecided, so that it complies with
 * all criteria at the chosen confidence; what that costs, curve by curve and in total; and the order in which curves buy the most comfort
 * for the least time. A curve within its limits keeps its recorded speed. The advice never runs faster than recorded.
 */
export function adviseLine(profile: ProfileInput, passages: RunPassages, setup: Setup): LineAdvice {
  const before = assessRun(passages, setup, { working: false }).curves;
  const limits: { index: number; fromM: number; toM: number; mps: number }[] = [];
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

  const permittedMps = permittedColumn(profile, limits);
  const drivenMps = slowed(profile, permittedMps, setup);
  const capped: RunPassages = {
    ...passages,
    passages: passages.passages.map((passage, index) => {
      const limit = limits.find((l) => l.index === index);
      return limit === undefined
        ? passage
        : { ...passage, speedMps: passage.speedMps.map((v) => Math.min(v, limit.mps)) };
    }),
  };
  const after = assessRun(capped, setup, { working: false }).curves;

  const order = limits.map(({ index, fromM, toM, mps }): CurveAdvice => {
    const { row } = before[index]!;
    const alone = slowed(profile, permittedColumn(profile, [{ fromM, toM, mps }]), setup);
    const lostS = timeLostS(profile.chainageM, profile.speedMps, alone);
    const utilisationAfter = after[index]!.row.utilisation;
    const gain = Math.max((row.utilisation ?? 0) - (utilisationAfter ?? 0), 0);
    return {
      curve: row.curve,
      permittedKmh: mps * 3.6,
      lostS,
      utilisation: row.utilisation,
      utilisationAfter,
      gainPerS: lostS > 0 ? gain / lostS : gain > 0 ? Infinity : 0,
    };
  });
  order.sort((a, b) => b.gainPerS - a.gainPerS || a.curve - b.curve);
  return { permittedMps, drivenMps, lostS: timeLostS(profile.chainageM, profile.speedMps, drivenMps), order, uncured };
}
