import type { Vehicle } from '../schema/vehicle.ts';
import type { Limit } from '../schema/limit-set.ts';
import type { Setup } from '../schema/setup.ts';
import { mpsToKmh, STANDARD_GRAVITY_MPS2 } from '../units.ts';
import { bodyAccelerationMps2 } from '../curving/body-acceleration.ts';
import { entryDecelerationMps2 } from '../curving/entry-deceleration.ts';
import { verticalAccelerationMps2 } from '../curving/vertical-curve.ts';
import type { CurveCase } from './lateral-frame.ts';
import { cantRatioChange, lateralInterval, planeChangeMps2, rateInterval } from './lateral-frame.ts';
import type { Interval } from './confidence.ts';
import { combine, intervalAt } from './confidence.ts';
import type { EndFacts } from './curve-facts.ts';
import type { Measured, Unmeasured } from './measured.ts';
import { largestBelow, NEVER_RAN, unresolvedLength } from './rail-criteria.ts';
import { num, radiusText } from './text.ts';
import { verticalCurvature } from './vertical-profile.ts';

const G = `${STANDARD_GRAVITY_MPS2} m/s²`;

/** Acceleration in the plane of track or road at a |curvature|: v^2 kappa cos(theta) - g sin(theta). */
function planeMps2(speedMps: number, curvaturePerM: number, cantRatio: number): number {
  return speedMps * speedMps * curvaturePerM * Math.sqrt(1 - cantRatio * cantRatio) - STANDARD_GRAVITY_MPS2 * cantRatio;
}

function planeSpeed(limitMps2: number, curvaturePerM: number, cantRatio: number): number {
  const horizontal = (limitMps2 + STANDARD_GRAVITY_MPS2 * cantRatio) / Math.sqrt(1 - cantRatio * cantRatio);
  return horizontal <= 0 ? 0 : Math.sqrt(horizontal / curvaturePerM);
}

/** Cant (mm) or superelevation (percent) at which the plane acceleration is just `limitMps2`. */
function planeCant(curveCase: CurveCase, speedMps: number, limitMps2: number): number {
  const { facts, mode } = curveCase;
  const horizontal = speedMps * speedMps * facts.curvaturePerM;
  const total = Math.hypot(horizontal, STANDARD_GRAVITY_MPS2);
  const theta = Math.atan2(horizontal, STANDARD_GRAVITY_MPS2) - Math.asin(Math.min(limitMps2 / total, 1));
  return mode === 'rail' ? facts.baseMm * Math.sin(theta) : 100 * Math.tan(theta);
}

function planeName(curveCase: CurveCase): string {
  return curveCase.mode === 'rail' ? 'D/b' : 'sin(atan e)';
}

function planeSubstituted(curveCase: CurveCase, speedMps: number): string {
  const { facts, cantRatio, cant, mode } = curveCase;
  const unknown = cant.source === 'unknown' ? ' (unknown)' : '';
  const ratio =
    mode === 'rail'
      ? `${num(cant.mm ?? 0, 0)} mm${unknown} / ${num(facts.baseMm, 0)} mm`
      : `e = ${num(100 * (cant.ratio ?? 0), 1)} %${unknown}`;
  const cosine = Math.sqrt(1 - cantRatio * cantRatio);
  return `(${num(speedMps, 2)} m/s)² / ${radiusText(facts.radiusM)} × ${num(cosine, 4)} - ${G} × ${num(cantRatio, 4)}, sin θ = ${ratio}`;
}

export function lateralTrack(curveCase: CurveCase): Measured | Unmeasured {
  const { facts, cantRatio, isBound } = curveCase;
  const speed = facts.fastest;
  if (speed === null) return { criterion: 'lateral_track', missing: NEVER_RAN };
  return {
    criterion: 'lateral_track',
    ...lateralInterval(facts, isBound, (k) => planeMps2(speed.mps, k, cantRatio)),
    isBound,
    speedMps: speed.mps,
    speedSdMps: speed.sdMps,
    formula: `a_q = v²/R cos θ - g sin θ, sin θ = ${planeName(curveCase)}`,
    substituted: () => planeSubstituted(curveCase, speed.mps),
    remarks: [],
    speedFor: (limit, sure) => planeSpeed(limit, sure ? facts.curvatureHighPerM : facts.curvaturePerM, cantRatio),
    cantFor: (limit) => planeCant(curveCase, speed.mps, limit),
  };
}

export function lateralBody(curveCase: CurveCase, vehicle: Vehicle): Measured | Unmeasured {
  const { facts, cantRatio, isBound } = curveCase;
  const speed = facts.fastest;
  const s = vehicle.rollCoefficient;
  if (speed === null) return { criterion: 'lateral_body', missing: NEVER_RAN };
  if (s === null) return { criterion: 'lateral_body', missing: "the vehicle's roll coefficient is not known" };
  const tilt = vehicle.tiltCompensation;
  const share = bodyAccelerationMps2(1, s, tilt);
  return {
    criterion: 'lateral_body',
    ...lateralInterval(facts, isBound, (k) => share * planeMps2(speed.mps, k, cantRatio)),
    isBound,
    speedMps: speed.mps,
    speedSdMps: speed.sdMps,
    formula: tilt > 0 ? 'a_b = (1 + s) (1 - c) a_q, quasi-static' : 'a_b = (1 + s) a_q, quasi-static',
    substituted: () => {
      const track = num(planeMps2(speed.mps, facts.curvaturePerM, cantRatio), 3);
      return `(1 + ${num(s, 2)})${tilt > 0 ? ` × (1 - ${num(tilt, 2)})` : ''} × ${track} m/s², a_q = ${planeSubstituted(curveCase, speed.mps)}`;
    },
    remarks: [],
    speedFor: (limit, sure) =>
      planeSpeed(limit / share, sure ? facts.curvatureHighPerM : facts.curvaturePerM, cantRatio),
    cantFor: (limit) => planeCant(curveCase, speed.mps, limit / share),
  };
}

export function jerk(curveCase: CurveCase): Measured | Unmeasured {
  const { facts, isBound } = curveCase;
  let worst: { end: EndFacts; ratioChange: number; interval: Interval } | null = null;
  const figure = (v: number, dk: number, ratioChange: number, length: number): number =>
    (Math.abs(planeChangeMps2(v, dk, ratioChange)) * v) / length;
  for (const index of [0, 1] as const) {
    const end = facts.ends[index];
    const ratioChange = cantRatioChange(curveCase, index);
    const interval = rateInterval(facts, end, isBound, (dk, length) =>
      figure(end.fastest.mps, dk, ratioChange, length),
    );
    if (worst === null || interval.value > worst.interval.value) worst = { end, ratioChange, interval };
  }
  const { end, ratioChange, interval } = worst!;
  const v = end.fastest.mps;
  const change = planeChangeMps2(v, end.curvatureChangePerM, ratioChange);
  return {
    criterion: 'jerk',
    ...interval,
    isBound,
    speedMps: v,
    speedSdMps: end.fastest.sdMps,
    formula: `j = Δa_q v / L at the ${end.place}, Δa_q = v² Δ(1/R) - g Δ(sin θ)`,
    substituted: () => `${num(change, 3)} m/s² × ${num(v, 2)} m/s / ${num(end.lengthM, 1)} m`,
    remarks: end.isVirtual
      ? [
          `The ${end.place} is shorter than the vehicle's virtual length of ${num(end.lengthM, 1)} m, which is taken instead.`,
        ]
      : [],
    ...unresolvedLength(end),
    speedFor: (limit, sure) => {
      const dk = end.curvatureChangePerM * (sure ? facts.curvatureHighPerM / facts.curvaturePerM : 1);
      const length = sure ? end.lengthLowM : end.lengthM;
      return largestBelow((speed) => figure(speed, dk, ratioChange, length), limit, v);
    },
    transitionFor: (limit) => (Math.abs(change) * v) / limit,
    // More cant takes off the change of the plane acceleration, g dD / b.
    ...(end.kind === 'abrupt' || curveCase.mode === 'road'
      ? {}
      : {
          cantFor: (limit: number) =>
            facts.baseMm * (curveCase.cantRatio + (change - (limit * end.lengthM) / v) / STANDARD_GRAVITY_MPS2),
        }),
  };
}

/**
 * The station where the speed stands worst against the permitted speed of the line, with that speed; null without one
 * here.
 */
function againstPermitted(curveCase: CurveCase, setup: Setup): { index: number; permittedKmh: number } | null {
  const { chainageM, speedMps } = curveCase.facts.passage;
  let worst: { index: number; permittedKmh: number } | null = null;
  for (const { fromM, toM, speedKmh } of setup.permittedSpeeds ?? []) {
    for (let i = 0; i < chainageM.length; i++) {
      if (chainageM[i]! < fromM || chainageM[i]! > toM) continue;
      const share = speedMps[i]! / speedKmh;
      if (worst === null || share > speedMps[worst.index]! / worst.permittedKmh)
        worst = { index: i, permittedKmh: speedKmh };
    }
  }
  return worst;
}

function permittedLimit(permittedKmh: number): Limit {
  return {
    criterion: 'speed',
    bands: [{ normal: permittedKmh, exceptional: null }],
    source: { document: 'operator', clause: 'permitted speed profile of the line', year: null, status: 'operator' },
  };
}

export function speed(curveCase: CurveCase, setup: Setup): Measured {
  const { facts } = curveCase;
  const permitted = againstPermitted(curveCase, setup);
  const { passage } = facts;
  const { mps, sdMps, chainageM } =
    permitted === null
      ? facts.top
      : {
          mps: passage.speedMps[permitted.index]!,
          sdMps: passage.speedSdMps[permitted.index]!,
          chainageM: passage.chainageM[permitted.index]!,
        };
  const value = mpsToKmh(mps);
  const half = mpsToKmh(facts.z * sdMps);
  return {
    criterion: 'speed',
    value,
    low: value - half,
    high: value + half,
    isBound: false,
    speedMps: mps,
    speedSdMps: sdMps,
    formula:
      permitted === null
        ? 'V, highest over the curve and its transitions'
        : 'V where it stands highest against the permitted speed',
    substituted: () => `${num(mps, 2)} m/s × 3.6 at ${num(chainageM, 0)} m`,
    remarks: [],
    ...(permitted === null ? {} : { placeLimit: permittedLimit(permitted.permittedKmh) }),
    speedFor: (limit) => limit / 3.6,
  };
}

export function elementLength(curveCase: CurveCase): Measured {
  const { facts } = curveCase;
  const { curve } = facts.passage;
  const value = Math.max(curve.arcEndM - curve.arcStartM, 0);
  // Each end of the arc lies half a transition from the transition's middle.
  const parts = [curve.entry, curve.exit].flatMap((end) => {
    const middle = intervalAt(end.middleM, facts.z);
    const length = intervalAt(end.lengthM, facts.z);
    return [(middle.high - middle.low) / 2, (length.high - length.low) / 4];
  });
  const half = Math.hypot(...parts.filter((part) => Number.isFinite(part)));
  return {
    criterion: 'element_length',
    value,
    low: Math.max(value - half, 0),
    high: value + half,
    isBound: false,
    speedMps: (facts.fastest ?? facts.top).mps,
    speedSdMps: (facts.fastest ?? facts.top).sdMps,
    formula: 'length of the circular part',
    substituted: () => `${num(curve.arcEndM, 1)} m - ${num(curve.arcStartM, 1)} m`,
    remarks: [],
  };
}

export function entryDeceleration(curveCase: CurveCase): Measured {
  const { facts } = curveCase;
  const { passage } = facts;
  const { curve } = passage;
  // Braking that reaches into the arc is braking in the curve: up to the middle of the arc.
  const untilM = (curve.arcStartM + curve.arcEndM) / 2;
  const value = entryDecelerationMps2(passage.chainageM, passage.accelerationMps2, curve.startM, untilM);
  // Two speeds about 2 s apart make one deceleration; shorter brakings are not seen by the usual log.
  const half = (facts.z * Math.SQRT2 * facts.ends[0].fastest.sdMps) / 2;
  return {
    criterion: 'entry_deceleration',
    value,
    low: Math.max(value - half, 0),
    high: value + half,
    isBound: false,
    speedMps: facts.ends[0].fastest.mps,
    speedSdMps: facts.ends[0].fastest.sdMps,
    formula: '-dv/dt, largest from the start of the curve to the middle of its arc',
    substituted: () => `largest of ${num(curve.startM, 0)} to ${num(untilM, 0)} m`,
    remarks: value > 0 ? ['Brake before the curve instead of in its entry.'] : [],
  };
}

/** Heights that bound the vertical acceleration no closer than this, m/s², say nothing of limits of 0.2 to 0.4 m/s². */
const WORST_VERTICAL_MPS2 = 0.1;

export function vertical(curveCase: CurveCase): Measured | Unmeasured {
  const { facts } = curveCase;
  const found = verticalCurvature(facts.passage);
  if (found === null)
    return { criterion: 'vertical', missing: 'the log has no elevation, or too little of it, on this curve' };
  const v = facts.top.mps;
  const value = verticalAccelerationMps2(v, found.curvaturePerM);
  const half = facts.z * v * v * found.sdPerM;
  if (half > WORST_VERTICAL_MPS2) {
    return {
      criterion: 'vertical',
      missing: `the elevation is not good enough: it bounds the vertical acceleration only to ±${num(half, 2)} m/s²`,
    };
  }
  return {
    criterion: 'vertical',
    value,
    low: Math.max(value - half, 0),
    high: value + half,
    isBound: false,
    speedMps: v,
    speedSdMps: facts.top.sdMps,
    formula: 'a_v = v² / R_v, R_v from a parabola through the elevations',
    substituted: () => `(${num(v, 2)} m/s)² × ${num(found.curvaturePerM * 1000, 4)} /km`,
    remarks: [],
    speedFor: (limit, sure) => Math.sqrt(limit / (Math.abs(found.curvaturePerM) + (sure ? facts.z * found.sdPerM : 0))),
  };
}

/** Comfort figures in percent with their interval: acceleration and jerk move with v^2 kappa. */
export function comfort(
  curveCase: CurveCase,
  setup: Setup,
  posture: 'seated' | 'standing',
  figures: ComfortFigures,
): Measured | Unmeasured {
  const criterion = posture === 'seated' ? 'pct_seated' : 'pct_standing';
  if (typeof figures === 'string') return { criterion, missing: figures };
  const { facts } = curveCase;
  const { motion } = figures;
  const value = figures.index(1)[posture];
  const plane = Math.abs(planeMps2(facts.ends[0].fastest.mps, facts.curvaturePerM, curveCase.cantRatio));
  const horizontal = facts.ends[0].fastest.mps ** 2 * facts.curvaturePerM;
  const spread = (facts.lateralHighPerM / facts.curvaturePerM - 1) * (horizontal / Math.max(plane, 1e-6));
  const at = (factor: number): number =>
    figures.indexOf(motion.meanBodyMps2 * factor, motion.meanJerkMps3 * factor, motion.meanRollDegS)[posture];
  const interval = combine(value, [at(Math.max(1 - spread, 0))], [at(1 + spread)]);
  const event = figures.event[posture];
  return {
    criterion,
    ...interval,
    low: curveCase.isBound ? null : interval.low,
    isBound: curveCase.isBound,
    speedMps: facts.ends[0].fastest.mps,
    speedSdMps: facts.ends[0].fastest.sdMps,
    formula: 'P_CT = max(A a + B j - C, 0) + D r^E (EN 12299:2009), on the entry transition',
    substituted: () =>
      `with a = ${num(motion.meanBodyMps2, 3)} m/s², j = ${num(motion.meanJerkMps3, 3)} m/s³, r = ${num(motion.meanRollDegS, 2)} °/s`,
    remarks: [
      'Modelled from the fitted geometry and the vehicle figures, not measured in the body.',
      `As a discrete event over 2 s: P_DE = ${num(event, 1)} %.`,
      ...(setup.vehicle.rollFrequencyHz === null
        ? ["Quasi-static: the vehicle's natural frequency is not known."]
        : []),
    ],
    ...unresolvedLength(facts.ends[0]),
    speedFor: (limit) => figures.speedFor(limit, posture),
  };
}

/** Comfort of one entry, or why there is none. */
export type ComfortFigures =
  | string
  | {
      readonly motion: { readonly meanBodyMps2: number; readonly meanJerkMps3: number; readonly meanRollDegS: number };
      readonly event: { readonly seated: number; readonly standing: number };
      /** Index at a multiple of the measured speed. */
      readonly index: (speedScale: number) => { seated: number; standing: number };
      readonly indexOf: (bodyMps2: number, jerkMps3: number, rollDegS: number) => { seated: number; standing: number };
      readonly speedFor: (limit: number, posture: 'seated' | 'standing') => number;
    };
