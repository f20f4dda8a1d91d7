import type { Mode } from '../schema/common.ts';
import { STANDARD_GRAVITY_MPS2 } from '../units.ts';
import { cantAngleRad } from '../curving/conventions.ts';
import type { CurveCant } from './curve-cant.ts';
import type { CurveFacts, EndFacts } from './curve-facts.ts';
import type { Interval } from './confidence.ts';
import { combine } from './confidence.ts';

/** A curve with its cant and the cants on the far sides of its ends: what criteria are computed from. */
export interface CurveCase {
  readonly mode: Mode;
  readonly facts: CurveFacts;
  readonly cant: CurveCant;
  /** Sine of the cant angle on the curve, and beyond entry and exit; zero where the cant is unknown (see isBound). */
  readonly cantRatio: number;
  readonly beyondRatio: readonly [entry: number, exit: number];
  /** True when the cant is unknown, so that figures hold for zero cant. */
  readonly isBound: boolean;
}

/** Sine of the cant angle of a cant; 0 when unknown. */
export function ratioOf(cant: CurveCant, mode: Mode, baseMm: number): number {
  if (mode === 'road') return cant.ratio === null ? 0 : Math.sin(Math.atan(cant.ratio));
  return cant.mm === null ? 0 : Math.sin(cantAngleRad(cant.mm, baseMm));
}

/**
 * Interval of a figure that depends on the lateral acceleration alone; `at` gives it for a |curvature| at the
 * measured speed.
 */
export function lateralInterval(facts: CurveFacts, isBound: boolean, at: (curvaturePerM: number) => number): Interval {
  const value = at(facts.curvaturePerM);
  const a = at(facts.lateralLowPerM);
  const b = at(facts.lateralHighPerM);
  return { value, low: isBound ? null : Math.min(a, b), high: Math.max(a, b) };
}

/** Interval of a figure that depends on the lateral acceleration and on the length of a transition. */
export function rateInterval(
  facts: CurveFacts,
  end: EndFacts,
  isBound: boolean,
  at: (curvatureChangePerM: number, lengthM: number) => number,
): Interval {
  const change = end.curvatureChangePerM;
  const up = change * (facts.lateralHighPerM / facts.curvaturePerM);
  const down = change * (facts.lateralLowPerM / facts.curvaturePerM);
  const value = at(change, end.lengthM);
  const scaled = [at(up, end.lengthM), at(down, end.lengthM)];
  const interval = combine(
    value,
    [Math.min(...scaled), at(change, end.lengthHighM)],
    [Math.max(...scaled), at(change, end.lengthLowM)],
  );
  return isBound ? { ...interval, low: null } : interval;
}

/** Change over an end of sin(cant angle): nothing changes at a point where there is no transition. */
export function cantRatioChange(curveCase: CurveCase, index: 0 | 1): number {
  const end = curveCase.facts.ends[index];
  return end.kind === 'abrupt' ? 0 : curveCase.cantRatio - curveCase.beyondRatio[index];
}

/**
 * Change over an end of the acceleration in the plane of track or road, small angles: v^2 dkappa - g d(sin theta),
 * m/s^2.
 */
export function planeChangeMps2(speedMps: number, curvatureChangePerM: number, ratioChange: number): number {
  return speedMps * speedMps * curvatureChangePerM - STANDARD_GRAVITY_MPS2 * ratioChange;
}
