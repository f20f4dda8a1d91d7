import type { LimitSet } from '../schema/limit-set.ts';
import type { Setup } from '../schema/setup.ts';
import type { Vehicle } from '../schema/vehicle.ts';
import { mpsToKmh, radToDeg, STANDARD_GRAVITY_MPS2 } from '../units.ts';
import { abruptDeficiencyChangeMm } from '../curving/abrupt-change.ts';
import { cantDeficiencyMm, speedForDeficiencyMps } from '../curving/cant-deficiency.ts';
import { cantGradientMmPerM } from '../curving/cant-gradient.ts';
import { equilibriumCantMm, equilibriumSpeedMps } from '../curving/equilibrium-cant.ts';
import { rateOfChange, speedForDeficiencyRateMps, transitionLengthForRateM } from '../curving/rate-of-change.ts';
import { entryOf, limitFor } from '../limits/lookup.ts';
import type { EndFacts, SpeedAt } from './curve-facts.ts';
import type { Interval } from './confidence.ts';
import type { CurveCase } from './lateral-frame.ts';
import { cantRatioChange, rateInterval, lateralInterval } from './lateral-frame.ts';
import type { Measured, Unmeasured } from './measured.ts';
import { num, radiusText } from './text.ts';

const NO_CANT = 'the cant is not known: give a cant register or a rule';
export const NEVER_RAN = 'the vehicle stood or crawled on the whole curve';

const G = `${STANDARD_GRAVITY_MPS2} m/s²`;

function cantText(curveCase: CurveCase): string {
  return curveCase.cant.mm === null ? '0 mm (cant unknown)' : `${num(curveCase.cant.mm, 0)} mm`;
}

function speedText(speed: SpeedAt): string {
  return `(${num(speed.mps, 2)} m/s)²`;
}

/** Fields that every figure at a speed carries. */
function at(speed: SpeedAt): Pick<Measured, 'speedMps' | 'speedSdMps'> {
  return { speedMps: speed.mps, speedSdMps: speed.sdMps };
}

export function cantDeficiency(curveCase: CurveCase): Measured | Unmeasured {
  const { facts, cant, isBound } = curveCase;
  const { fastest: speed, baseMm } = facts;
  if (speed === null) return { criterion: 'cant_deficiency', missing: NEVER_RAN };
  const cantMm = cant.mm ?? 0;
  return {
    criterion: 'cant_deficiency',
    ...lateralInterval(facts, isBound, (k) => cantDeficiencyMm(speed.mps, k, cantMm, baseMm)),
    isBound,
    ...at(speed),
    formula: 'I = b v² / (g R) - D',
    substituted: () =>
      `${num(baseMm, 0)} mm × ${speedText(speed)} / (${G} × ${radiusText(facts.radiusM)}) - ${cantText(curveCase)}`,
    remarks:
      cantMm > 0
        ? [
            `Equilibrium cant ${num(equilibriumCantMm(speed.mps, facts.curvaturePerM, baseMm), 1)} mm; equilibrium speed of ${num(cantMm, 0)} mm ` +
              `${num(mpsToKmh(equilibriumSpeedMps(cantMm, facts.curvaturePerM, baseMm)), 1)} km/h.`,
          ]
        : [],
    speedFor: (limit, sure) =>
      speedForDeficiencyMps(limit, sure ? facts.curvatureHighPerM : facts.curvaturePerM, cantMm, baseMm),
    cantFor: (limit) => equilibriumCantMm(speed.mps, facts.curvaturePerM, baseMm) - limit,
  };
}

export function cantExcess(curveCase: CurveCase): Measured | Unmeasured {
  const { facts, cant } = curveCase;
  const { slowest: speed, baseMm } = facts;
  if (cant.mm === null) return { criterion: 'cant_excess', missing: NO_CANT };
  if (speed === null) return { criterion: 'cant_excess', missing: NEVER_RAN };
  const cantMm = cant.mm;
  return {
    criterion: 'cant_excess',
    ...lateralInterval(facts, false, (k) => -cantDeficiencyMm(speed.mps, k, cantMm, baseMm)),
    isBound: false,
    ...at(speed),
    formula: 'E = D - b v² / (g R), at the lowest running speed on the curve',
    substituted: () =>
      `${num(cantMm, 0)} mm - ${num(baseMm, 0)} mm × ${speedText(speed)} / (${G} × ${radiusText(facts.radiusM)})`,
    remarks: ['Holds for this run: slower trains on the line have more excess.'],
  };
}

export function cant(curveCase: CurveCase): Measured | Unmeasured {
  const { facts } = curveCase;
  const mm = curveCase.cant.mm;
  if (mm === null) return { criterion: 'cant', missing: NO_CANT };
  return {
    criterion: 'cant',
    value: Math.abs(mm),
    low: Math.abs(mm),
    high: Math.abs(mm),
    isBound: false,
    ...at(facts.fastest ?? facts.top),
    formula: `D as ${curveCase.cant.source}`,
    substituted: () => `${num(mm, 0)} mm`,
    remarks: ['A register or a rule, not a measurement: it carries no interval.'],
  };
}

/** The end where a rate is largest, with its interval; null when none qualifies. */
function worstEnd(
  curveCase: CurveCase,
  qualifies: (end: EndFacts) => boolean,
  interval: (end: EndFacts, ratioChange: number) => Interval,
): { end: EndFacts; ratioChange: number; interval: Interval } | null {
  let worst: { end: EndFacts; ratioChange: number; interval: Interval } | null = null;
  for (const index of [0, 1] as const) {
    const end = curveCase.facts.ends[index];
    if (!qualifies(end)) continue;
    const ratioChange = cantRatioChange(curveCase, index);
    const found = interval(end, ratioChange);
    if (worst === null || found.value > worst.interval.value) worst = { end, ratioChange, interval: found };
  }
  return worst;
}

/** Why an end's length deserves a word. */
function lengthRemarks(end: EndFacts): string[] {
  if (end.isVirtual && end.kind === 'abrupt') {
    return [`No transition at the ${end.place}: the customary virtual length of ${num(end.lengthM, 1)} m is taken.`];
  }
  return [];
}

/** What is missing where the recording cannot tell a transition from none. */
export function unresolvedLength(end: EndFacts): Pick<Measured, 'unresolved'> {
  if (end.kind !== 'undetermined') return {};
  return {
    unresolved:
      `the recording does not tell the length of the ${end.place} transition (at most ${num(end.lengthHighM, 0)} m); ` +
      'the track record, more runs or a faster log decide it',
  };
}

export function deficiencyRate(curveCase: CurveCase, limits: LimitSet): Measured | Unmeasured {
  const { facts, isBound } = curveCase;
  const { baseMm } = facts;
  // Where the set judges abrupt changes by their own criterion, a rate over a virtual length would judge them twice.
  const judgedElsewhere = entryOf(limits, 'abrupt_deficiency_change') !== null;
  const change = (end: EndFacts, ratioChange: number, dk: number): number =>
    (baseMm * end.fastest.mps * end.fastest.mps * dk) / STANDARD_GRAVITY_MPS2 - baseMm * ratioChange;
  const worst = worstEnd(
    curveCase,
    (end) => !(judgedElsewhere && end.kind === 'abrupt'),
    (end, ratioChange) =>
      rateInterval(facts, end, isBound, (dk, length) =>
        Math.abs(rateOfChange(change(end, ratioChange, dk), end.fastest.mps, length)),
      ),
  );
  if (worst === null) return { criterion: 'deficiency_rate', missing: 'the curve has no transition' };
  const { end, ratioChange, interval } = worst;
  const changeMm = change(end, ratioChange, end.curvatureChangePerM);
  const cantMm = curveCase.cant.mm ?? 0;
  return {
    criterion: 'deficiency_rate',
    ...interval,
    isBound,
    ...at(end.fastest),
    formula: `dI/dt = ΔI v / L at the ${end.place}`,
    substituted: () => `${num(changeMm, 1)} mm × ${num(end.fastest.mps, 2)} m/s / ${num(end.lengthM, 1)} m`,
    remarks: lengthRemarks(end),
    ...unresolvedLength(end),
    speedFor: (limit, sure) => deficiencyRateSpeed(curveCase, end, ratioChange, limit, sure),
    ...(end.kind === 'abrupt'
      ? {}
      : { cantFor: (limit: number) => cantMm + changeMm - (limit * end.lengthM) / end.fastest.mps }),
    transitionFor: (limit) => transitionLengthForRateM(changeMm, end.fastest.mps, limit),
  };
}

function deficiencyRateSpeed(
  curveCase: CurveCase,
  end: EndFacts,
  ratioChange: number,
  limit: number,
  sure: boolean,
): number {
  const { facts } = curveCase;
  const dk = end.curvatureChangePerM * (sure ? facts.curvatureHighPerM / facts.curvaturePerM : 1);
  const length = sure ? end.lengthLowM : end.lengthM;
  const cantChange = facts.baseMm * ratioChange;
  // A neighbour sharper than this curve makes the change negative; the magnitude is what is limited.
  return dk < 0
    ? speedForDeficiencyRateMps(limit, -dk, -cantChange, length, facts.baseMm)
    : speedForDeficiencyRateMps(limit, dk, cantChange, length, facts.baseMm);
}

export function abruptChange(curveCase: CurveCase, setup: Setup): Measured | Unmeasured {
  const { facts } = curveCase;
  const { baseMm } = facts;
  const worst = worstEnd(
    curveCase,
    (end) => end.kind !== 'transition',
    (end) => {
      const factor = 1 / facts.curvaturePerM;
      const of = (k: number): number =>
        abruptDeficiencyChangeMm(end.fastest.mps, end.curvatureChangePerM * factor * k, baseMm);
      const found = lateralInterval(facts, false, of);
      // A transition may hide inside what the data cannot tell; then nothing is abrupt.
      return end.kind === 'undetermined' ? { ...found, low: 0 } : found;
    },
  );
  if (worst === null) return { criterion: 'abrupt_deficiency_change', missing: 'both ends have transitions' };
  const { end, interval } = worst;
  return {
    criterion: 'abrupt_deficiency_change',
    ...interval,
    isBound: false,
    ...at(end.fastest),
    formula: `ΔI = b v² |Δ(1/R)| / g at the ${end.place}`,
    substituted: () =>
      `${num(baseMm, 0)} mm × ${speedText(end.fastest)} × ${num(Math.abs(end.curvatureChangePerM) * 1000, 4)} /km / ${G}`,
    remarks: [],
    ...unresolvedLength(end),
    speedFor: (limit, sure) => {
      const dk = end.curvatureChangePerM * (sure ? facts.curvatureHighPerM / facts.curvaturePerM : 1);
      return speedForDeficiencyMps(limit, dk, 0, baseMm);
    },
    ...transitionInstead(setup, end.fastest.mps, facts.radiusM, interval.value),
  };
}

/**
 * What would take an abrupt change away is a transition long enough for the set's own rate of deficiency, where it
 * has one.
 */
function transitionInstead(
  setup: Setup,
  speedMps: number,
  radiusM: number,
  changeMm: number,
): Pick<Measured, 'transitionFor'> {
  const rate = limitFor(setup.limits, 'deficiency_rate', setup.tier, mpsToKmh(speedMps), radiusM);
  return rate === null ? {} : { transitionFor: () => transitionLengthForRateM(changeMm, speedMps, rate.value) };
}

export function cantRate(curveCase: CurveCase): Measured | Unmeasured {
  const { facts, cant: known } = curveCase;
  if (known.mm === null) return { criterion: 'cant_rate', missing: NO_CANT };
  const worst = worstEnd(
    curveCase,
    (end) => end.kind !== 'abrupt',
    (end, ratioChange) =>
      rateInterval(facts, end, false, (_dk, length) =>
        Math.abs(rateOfChange(facts.baseMm * ratioChange, end.fastest.mps, length)),
      ),
  );
  if (worst === null)
    return { criterion: 'cant_rate', missing: 'the curve has no transition; where cant runs off is not known' };
  const { end, ratioChange, interval } = worst;
  const changeMm = Math.abs(facts.baseMm * ratioChange);
  return {
    criterion: 'cant_rate',
    ...interval,
    isBound: false,
    ...at(end.fastest),
    formula: `dD/dt = ΔD v / L at the ${end.place}`,
    substituted: () => `${num(changeMm, 0)} mm × ${num(end.fastest.mps, 2)} m/s / ${num(end.lengthM, 1)} m`,
    remarks: ['Cant is taken to run off along the transition of curvature.'],
    ...unresolvedLength(end),
    speedFor: (limit, sure) => (limit * (sure ? end.lengthLowM : end.lengthM)) / changeMm,
    transitionFor: (limit) => transitionLengthForRateM(changeMm, end.fastest.mps, limit),
  };
}

export function cantGradient(curveCase: CurveCase): Measured | Unmeasured {
  const { facts, cant: known } = curveCase;
  if (known.mm === null) return { criterion: 'cant_gradient', missing: NO_CANT };
  const worst = worstEnd(
    curveCase,
    (end) => end.kind !== 'abrupt',
    (end, ratioChange) =>
      rateInterval(facts, end, false, (_dk, length) => cantGradientMmPerM(facts.baseMm * ratioChange, length)),
  );
  if (worst === null) {
    return { criterion: 'cant_gradient', missing: 'the curve has no transition; where cant runs off is not known' };
  }
  const { end, ratioChange, interval } = worst;
  const changeMm = Math.abs(facts.baseMm * ratioChange);
  return {
    criterion: 'cant_gradient',
    ...interval,
    isBound: false,
    ...at(end.fastest),
    formula: `dD/ds = ΔD / L at the ${end.place}`,
    substituted: () => `${num(changeMm, 0)} mm / ${num(end.lengthM, 1)} m`,
    remarks: ['Cant is taken to run off along the transition of curvature.'],
    ...unresolvedLength(end),
    transitionFor: (limit) => changeMm / limit,
  };
}

export function rollRate(curveCase: CurveCase, vehicle: Vehicle): Measured | Unmeasured {
  const { facts, cant: known } = curveCase;
  const s = vehicle.rollCoefficient;
  if (known.mm === null) return { criterion: 'roll_rate', missing: NO_CANT };
  if (s === null) return { criterion: 'roll_rate', missing: "the vehicle's roll coefficient is not known" };
  // Body over the horizontal: the track leans inwards by dD/b while the body rolls outwards by s dI/b.
  const rate = (ratioChange: number, dk: number, length: number, v: number): number =>
    radToDeg((Math.abs((1 + s) * ratioChange - (s * v * v * dk) / STANDARD_GRAVITY_MPS2) * v) / length);
  const worst = worstEnd(
    curveCase,
    () => true,
    (end, ratioChange) =>
      rateInterval(facts, end, false, (dk, length) => rate(ratioChange, dk, length, end.fastest.mps)),
  );
  const { end, ratioChange, interval } = worst!;
  const v = end.fastest.mps;
  return {
    criterion: 'roll_rate',
    ...interval,
    isBound: false,
    ...at(end.fastest),
    formula: `r = (ΔD - s ΔI) v / (b L) at the ${end.place}, quasi-static`,
    substituted: () => {
      const dD = facts.baseMm * ratioChange;
      const dI = (facts.baseMm * v * v * end.curvatureChangePerM) / STANDARD_GRAVITY_MPS2 - dD;
      return `(${num(dD, 0)} mm - ${num(s, 2)} × ${num(dI, 1)} mm) × ${num(v, 2)} m/s / (${num(facts.baseMm, 0)} mm × ${num(end.lengthM, 1)} m)`;
    },
    remarks: lengthRemarks(end),
    ...unresolvedLength(end),
    speedFor: (limit, sure) => {
      const dk = end.curvatureChangePerM * (sure ? facts.curvatureHighPerM / facts.curvaturePerM : 1);
      const length = sure ? end.lengthLowM : end.lengthM;
      return largestBelow((speed) => rate(ratioChange, dk, length, speed), limit, v);
    },
    transitionFor: (limit) => (rate(ratioChange, end.curvatureChangePerM, end.lengthM, v) * end.lengthM) / limit,
  };
}

/**
 * Lowest speed at which a figure, 0 at standstill, first reaches its limit: scanned upwards in steps of 0.5 m/s to
 * three
 * times the recorded speed (Infinity when never reached), then halved to 1 mm/s.
 */
export function largestBelow(figure: (speedMps: number) => number, limit: number, recordedMps: number): number {
  const top = Math.max(3 * recordedMps, 20);
  let low = 0;
  while (low < top && figure(low + 0.5) <= limit) low += 0.5;
  if (low >= top) return Infinity;
  let high = low + 0.5;
  while (high - low > 1e-3) {
    const middle = (low + high) / 2;
    if (figure(middle) <= limit) low = middle;
    else high = middle;
  }
  return low;
}

/** Equilibrium cant at the highest speed on the curve, mm; null when the vehicle never ran there. */
export function equilibriumCant(curveCase: CurveCase): number | null {
  const { fastest, curvaturePerM, baseMm } = curveCase.facts;
  return fastest === null ? null : equilibriumCantMm(fastest.mps, curvaturePerM, baseMm);
}
