import type { AssessedCurve, BodyDynamics, CurveRow } from '../schema/curve-row.ts';
import type { Setup } from '../schema/setup.ts';
import type { Verdict } from '../schema/common.ts';
import { mpsToKmh, radToDeg } from '../units.ts';
import { comfortCurveTransitionPct, comfortDiscreteEventPct } from '../curving/comfort-index.ts';
import { staticStabilityFactor } from '../curving/static-stability.ts';
import { CRITERIA, criterionOf } from '../limits/criteria.ts';
import { entryOf } from '../limits/lookup.ts';
import type { BodyModel, BodyMotion } from './body-motion.ts';
import { bodyMotion, comfortOf } from './body-motion.ts';
import type { ComfortFigures } from './common-criteria.ts';
import * as common from './common-criteria.ts';
import { cureText, curesOf, needsOf } from './cures.ts';
import type { CurveCase } from './lateral-frame.ts';
import type { Measured, Unmeasured } from './measured.ts';
import { isMeasured } from './measured.ts';
import * as rail from './rail-criteria.ts';
import * as road from './road-criteria.ts';
import { RUNNING_MPS } from './curve-facts.ts';
import { slowerCurveCostS } from './running-time.ts';
import type { Judged } from './verdict.ts';
import { finite, judge } from './verdict.ts';
import { num } from './text.ts';

/** Entry transitions shorter than this are discrete events, not curve transitions, s. EN 12299:2009 (from memory). */
const SHORTEST_TRANSITION_S = 2;
/** Below this share of good fixes a curve is not well observed. */
const WELL_OBSERVED = 0.7;

const SEVERITY: Record<Verdict, number> = { over: 3, undecided: 2, within: 1, 'not assessed': 0 };

/** The vehicle as the body model takes it; null when its roll coefficient is unknown. */
function bodyModel(setup: Setup): BodyModel | null {
  const { rollCoefficient, rollFrequencyHz, dampingRatio, tiltCompensation } = setup.vehicle;
  if (rollCoefficient === null) return null;
  const roll =
    rollFrequencyHz === null || dampingRatio === null
      ? null
      : { rollCoefficient, frequencyHz: rollFrequencyHz, dampingRatio };
  return { rollCoefficient, roll, tiltCompensation };
}

function motionAt(curveCase: CurveCase, model: BodyModel, speedScale: number): BodyMotion {
  const { facts, cantRatio, beyondRatio } = curveCase;
  return bodyMotion(facts, model, cantRatio, beyondRatio[0], beyondRatio[1], speedScale);
}

function comfortFigures(curveCase: CurveCase, model: BodyModel | null, motion: BodyMotion | null): ComfortFigures {
  if (model === null || motion === null) return "the vehicle's roll coefficient is not known";
  const entry = curveCase.facts.ends[0];
  if (entry.fastest.mps < RUNNING_MPS) return rail.NEVER_RAN;
  const event = {
    seated: comfortDiscreteEventPct(motion.eventPeakToPeakMps2, motion.eventMeanMps2, 'seated'),
    standing: comfortDiscreteEventPct(motion.eventPeakToPeakMps2, motion.eventMeanMps2, 'standing'),
  };
  if (motion.entryS < SHORTEST_TRANSITION_S) {
    return (
      `the entry lasts ${num(motion.entryS, 1)} s and the index holds from ${String(SHORTEST_TRANSITION_S)} s on; as a discrete event ` +
      `over 2 s (EN 12299:2009) P_DE is ${num(event.seated, 1)} % seated and ${num(event.standing, 1)} % standing`
    );
  }
  const index = (scale: number): { seated: number; standing: number } =>
    comfortOf(scale === 1 ? motion : motionAt(curveCase, model, scale));
  return {
    motion,
    event,
    index,
    indexOf: (body, jerk, roll) => ({
      seated: comfortCurveTransitionPct(body, jerk, roll, 'seated'),
      standing: comfortCurveTransitionPct(body, jerk, roll, 'standing'),
    }),
    // The index rises with speed; a share of the measured speed is enough for a posting step.
    speedFor: (limit, posture) => {
      let low = 0.1;
      let high = 2;
      if (index(high)[posture] <= limit) return Infinity;
      for (let i = 0; i < 10; i++) {
        const middle = (low + high) / 2;
        if (index(middle)[posture] <= limit) low = middle;
        else high = middle;
      }
      return low * entry.fastest.mps;
    },
  };
}

/** Every criterion of the mode on one curve, measured or with what is missing. */
function measureAll(curveCase: CurveCase, setup: Setup, figures: ComfortFigures): (Measured | Unmeasured)[] {
  const { vehicle, limits } = setup;
  const shared = [
    common.speed(curveCase, setup),
    common.lateralTrack(curveCase),
    common.lateralBody(curveCase, vehicle),
    common.jerk(curveCase),
    common.vertical(curveCase),
    common.elementLength(curveCase),
    common.entryDeceleration(curveCase),
  ];
  const own =
    setup.mode === 'rail'
      ? [
          rail.cant(curveCase),
          rail.cantDeficiency(curveCase),
          rail.cantExcess(curveCase),
          rail.deficiencyRate(curveCase, limits),
          rail.abruptChange(curveCase, setup),
          rail.cantRate(curveCase),
          rail.cantGradient(curveCase),
          rail.rollRate(curveCase, vehicle),
          common.comfort(curveCase, setup, 'seated', figures),
          common.comfort(curveCase, setup, 'standing', figures),
        ]
      : [road.sideFriction(curveCase), road.ballBank(curveCase, vehicle)];
  const order = new Map(CRITERIA.map((c, i) => [c.id, i]));
  return [...shared, ...own].sort((a, b) => order.get(a.criterion)! - order.get(b.criterion)!);
}

/** The criterion that decides a curve: the worst verdict, and among those the highest utilisation. */
function governing(judged: readonly Judged[]): Judged | null {
  let worst: Judged | null = null;
  for (const candidate of judged) {
    const { verdict, utilisation } = candidate.result;
    if (verdict === 'not assessed') continue;
    const difference = worst === null ? 1 : SEVERITY[verdict] - SEVERITY[worst.result.verdict];
    if (difference > 0 || (difference === 0 && (utilisation ?? 0) > (worst?.result.utilisation ?? 0)))
      worst = candidate;
  }
  return worst;
}

/** Table values are rounded here, once, so that page, files and command line show the same digits. */
function round(value: number | null | undefined, decimals: number): number | null {
  const known = finite(value);
  if (known === null) return null;
  const factor = 10 ** decimals;
  return Math.round(known * factor) / factor;
}

function notesOf(
  curveCase: CurveCase,
  setup: Setup,
  judged: readonly Judged[],
  cures: readonly string[],
  motion: BodyMotion | null,
): string {
  const { curve } = curveCase.facts.passage;
  const notes: string[] = [];
  if (curveCase.isBound) {
    notes.push(
      `${setup.mode === 'rail' ? 'Cant' : 'Superelevation'} unknown: values hold for zero and are upper bounds.`,
    );
    const open = judged.find((j) => j.result.verdict === 'undecided' && j.measured?.isBound === true);
    if (open !== undefined) notes.push(`${criterionOf(open.result.criterion).name}: ${open.result.reason}.`);
  }
  if (curve.observedShare < WELL_OBSERVED) {
    notes.push(`Seen by good fixes on ${num(100 * curve.observedShare, 0)} % of the passage only.`);
  }
  notes.push(...cures, ...curve.remarks.map((remark) => (/[.!?]$/.test(remark) ? remark : `${remark}.`)));
  if (motion !== null && motion.dynamicFactor > 1.15) {
    notes.push(`Modelled roll overshoots the quasi-static one by ${num(100 * (motion.dynamicFactor - 1), 0)} %.`);
  }
  const rollover = rolloverNote(curveCase, setup);
  if (rollover !== '') notes.push(rollover);
  return notes.join(' ');
}

/** Rollover margin as a caution, from a third of the static stability factor on; never a clearance. */
function rolloverNote(curveCase: CurveCase, setup: Setup): string {
  const { trackWidthM, centreOfGravityHeightM } = setup.vehicle;
  const { fastest } = curveCase.facts;
  if (setup.mode !== 'road' || trackWidthM === null || centreOfGravityHeightM === null || fastest === null) return '';
  const factor = staticStabilityFactor(trackWidthM, centreOfGravityHeightM);
  const friction = road.sideFriction(curveCase);
  if (!isMeasured(friction) || friction.high < factor / 3) return '';
  return (
    `Caution: side force of up to ${num(friction.high, 2)} g against a static stability factor of ${num(factor, 2)}; ` +
    'real rollover thresholds are lower and this is no clearance.'
  );
}

/** Weaker than this when the exit comes, the entry's swing no longer matters to it. */
const LEFT_OF_SWING = 0.1;

/**
 * Speed nearest to the recorded one at which entry and exit excite the roll together: changes of opposite sign add when
 * they lie an odd number of half damped periods apart, v = 2 f_d d / (2 n + 1). Null when the entry's swing has died
 * out
 * by then, or no natural frequency is known. Source: superposition of two responses, common practice, no source.
 */
function worstRollSpeedKmh(curveCase: CurveCase, setup: Setup): number | null {
  const { rollFrequencyHz, dampingRatio } = setup.vehicle;
  if (rollFrequencyHz === null || dampingRatio === null || dampingRatio >= 1) return null;
  const { curve } = curveCase.facts.passage;
  const apartM = (curve.arcEndM + curve.endM - curve.startM - curve.arcStartM) / 2;
  const dampedHz = rollFrequencyHz * Math.sqrt(1 - dampingRatio * dampingRatio);
  const ratio = (2 * dampedHz * apartM) / curveCase.facts.top.mps;
  const odd = Math.max(1, 2 * Math.round((ratio - 1) / 2) + 1);
  const apartS = odd / (2 * dampedHz);
  if (Math.exp(-dampingRatio * 2 * Math.PI * rollFrequencyHz * apartS) < LEFT_OF_SWING) return null;
  return mpsToKmh((2 * dampedHz * apartM) / odd);
}

/** Assesses one curve. `withWorking` false leaves the working lines empty. */
export function assessCurve(run: string, curveCase: CurveCase, setup: Setup, withWorking: boolean): AssessedCurve {
  const { facts, cant } = curveCase;
  const { passage } = facts;
  const { curve } = passage;
  const model = bodyModel(setup);
  const motion = model === null ? null : motionAt(curveCase, model, 1);
  const isDynamic = model !== null && model.roll !== null;
  const figures = comfortFigures(curveCase, model, motion);
  const judged = measureAll(curveCase, setup, figures).map((m) => judge(m, setup, facts.radiusM, withWorking));
  if (withWorking && motion !== null && isDynamic) addDynamics(judged, motion);

  const worst = governing(judged);
  const needs = needsOf(judged, setup.limits.speedStepKmh);
  const verdict = worst?.result.verdict ?? 'not assessed';
  const failing = judged.filter((j) => j.result.verdict === 'over' || j.result.verdict === 'undecided');
  // Slowing costs time only where it cures something.
  const slows = failing.some((j) => j.measured?.speedFor !== undefined);
  const timeCost =
    needs.speedKmh === null ? null : slows ? slowerCurveCostS(passage, needs.speedKmh / 3.6, setup.vehicle) : 0;
  const cures = curesOf(curveCase, setup, judged, finite(timeCost));
  const of = (id: Measured['criterion']): Measured | null =>
    judged.find((j) => j.result.criterion === id)?.measured ?? null;
  const at = worst?.measured ?? of('cant_deficiency') ?? of('side_friction') ?? of('speed');
  const deficiency = of('cant_deficiency');
  const comfort = typeof figures === 'string' ? null : figures.index(1);
  const half = at === null ? 0 : facts.z * at.speedSdMps;
  const ballBank = of('ball_bank');
  const lateral = of('lateral_track');

  const row: CurveRow = {
    run,
    curve: curve.number,
    hand: curve.hand,
    shape: curve.shape,
    start_m: round(curve.startM, 1) ?? 0,
    end_m: round(curve.endM, 1) ?? 0,
    lat_start: passage.start[0],
    lon_start: passage.start[1],
    lat_mid: passage.middle[0],
    lon_mid: passage.middle[1],
    lat_end: passage.end[0],
    lon_end: passage.end[1],
    radius_m: round(curve.radiusM.value, 1),
    radius_low_m: round(curve.radiusM.low, 1),
    radius_high_m: round(curve.radiusM.high, 1),
    deflection_deg: round(radToDeg(curve.deflectionRad.value), 2),
    arc_m: round(curve.arcEndM - curve.arcStartM, 1),
    entry_transition_m: round(curve.entry.lengthM.value, 1),
    exit_transition_m: round(curve.exit.lengthM.value, 1),
    speed_kmh: at === null ? null : round(mpsToKmh(at.speedMps), 1),
    speed_max_kmh: round(mpsToKmh(facts.top.mps), 1),
    speed_low_kmh: at === null ? null : round(mpsToKmh(Math.max(at.speedMps - half, 0)), 1),
    speed_high_kmh: at === null ? null : round(mpsToKmh(at.speedMps + half), 1),
    cant_mm: round(cant.mm, 1),
    superelevation_pct: cant.ratio === null ? null : round(100 * cant.ratio, 2),
    cant_source: cant.source,
    equilibrium_cant_mm: setup.mode === 'rail' ? round(rail.equilibriumCant(curveCase), 1) : null,
    cant_deficiency_mm: round(deficiency?.value, 1),
    cant_deficiency_low_mm: round(deficiency?.low, 1),
    cant_deficiency_high_mm: round(deficiency?.high, 1),
    cant_excess_mm: excessShown(of('cant_excess')),
    deficiency_rate_mm_s: round(of('deficiency_rate')?.value, 1),
    cant_rate_mm_s: round(of('cant_rate')?.value, 1),
    lateral_track_ms2: round(lateral?.value, 3),
    lateral_track_low_ms2: round(lateral?.low, 3),
    lateral_track_high_ms2: round(lateral?.high, 3),
    lateral_body_ms2: round(of('lateral_body')?.value, 3),
    jerk_ms3: round(of('jerk')?.value, 3),
    side_friction: round(of('side_friction')?.value, 3),
    ball_bank_deg: round(ballBank?.value, 1),
    pct_seated: setup.mode === 'rail' ? round(comfort?.seated, 1) : null,
    pct_standing: setup.mode === 'rail' ? round(comfort?.standing, 1) : null,
    verdict,
    governing_criterion: worst?.result.criterion ?? null,
    value: round(worst?.result.value, 3),
    limit: worst?.result.limit ?? null,
    utilisation: round(worst?.result.utilisation, 3),
    complying_speed_kmh: needs.speedKmh,
    complying_cant_mm: needs.cantMm === null ? null : Math.ceil(needs.cantMm - 1e-9),
    time_cost_s: round(timeCost, 1),
    notes: notesOf(curveCase, setup, judged, cures.map(cureText), motion),
  };
  const dynamics: BodyDynamics | null =
    motion === null || !isDynamic || !Number.isFinite(motion.peakBodyMps2)
      ? null
      : {
          peakBodyMps2: motion.peakBodyMps2,
          dynamicFactor: motion.dynamicFactor,
          peakRollDeg: motion.peakRollDeg,
          worstSpeedKmh: finite(worstRollSpeedKmh(curveCase, setup)),
        };
  return {
    row,
    criteria: judged.map((j) => j.result),
    cures,
    ...(dynamics === null ? {} : { dynamics }),
  };
}

/** Excess is shown as 0 where there is deficiency. */
function excessShown(excess: Measured | null): number | null {
  return excess === null ? null : round(Math.max(excess.value, 0), 1);
}

function addDynamics(judged: readonly Judged[], motion: BodyMotion): void {
  const body = judged.find((j) => j.result.criterion === 'lateral_body');
  body?.result.working.push(
    `With the roll as a damped oscillator the body's peak is ${num(motion.peakBodyMps2, 3)} m/s², its roll ${num(motion.dynamicFactor, 2)} times the quasi-static one (${num(motion.peakRollDeg, 2)}°).`,
  );
}

/** True when a set has any limit that this mode can meet; else nothing will be assessed. */
export function hasUsableLimit(setup: Setup): boolean {
  return CRITERIA.some(
    (c) =>
      c.modes.includes(setup.mode) &&
      (entryOf(setup.limits, c.id)?.bands.some((b) => b.normal !== null || b.exceptional !== null) ?? false),
  );
}
