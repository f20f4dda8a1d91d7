import type { Setup } from '../schema/setup.ts';
import type { Cure } from '../schema/curve-row.ts';
import { formatQuantity, mpsToKmh, STANDARD_GRAVITY_MPS2 } from '../units.ts';
import { roundDownToStep } from '../curving/advisory-speed.ts';
import { criterionOf } from '../limits/criteria.ts';
import { limitFor } from '../limits/lookup.ts';
import type { CurveCase } from './lateral-frame.ts';
import type { Judged } from './verdict.ts';
import { num } from './text.ts';

/** Figures that more cant, a longer transition or a lower speed must reach for every criterion at once. */
export interface Needs {
  /**
   * Highest speed that complies with every criterion at the chosen confidence, km/h; null when no criterion gives
   * one.
   */
  readonly speedKmh: number | null;
  /** Least cant, mm; null when cant cures nothing here. */
  readonly cantMm: number | null;
  readonly transitionM: number | null;
}

/**
 * Speed that a criterion allows at the chosen confidence, km/h. A criterion that is within at the recorded speed
 * allows at least that
 * (in whole steps): the interval of a passage is narrower than that of a speed never driven.
 */
function speedOf({ result, measured }: Judged, stepKmh: number): number | null {
  const sure = result.complyingSpeedSureKmh;
  if (sure === null || measured === null || result.verdict !== 'within') return sure;
  return Math.max(sure, roundDownToStep(mpsToKmh(measured.speedMps), stepKmh));
}

/** The most demanding answer over all criteria. */
export function needsOf(judged: readonly Judged[], stepKmh: number): Needs {
  const least = (values: (number | null)[]): number | null => {
    const known = values.filter((v) => v !== null);
    return known.length === 0 ? null : Math.min(...known);
  };
  const most = (values: (number | null)[]): number | null => {
    const known = values.filter((v) => v !== null);
    return known.length === 0 ? null : Math.max(...known);
  };
  return {
    speedKmh: least(judged.map((j) => speedOf(j, stepKmh))),
    cantMm: most(judged.map((j) => j.result.complyingCantMm)),
    transitionM: most(judged.map((j) => j.result.neededTransitionM)),
  };
}

/** Why more cant is not open under the other limits of the set, or an empty text. */
function againstCant(curveCase: CurveCase, setup: Setup, cantMm: number): string {
  const { facts } = curveCase;
  const speedKmh = (facts.fastest ?? facts.top).mps * 3.6;
  const limitOf = (id: 'cant' | 'cant_excess' | 'cant_rate' | 'cant_gradient'): number | null =>
    limitFor(setup.limits, id, setup.tier, speedKmh, facts.radiusM)?.value ?? null;
  const most = limitOf('cant');
  if (most !== null && cantMm > most) return `more than the ${num(most, 0)} mm that the set allows`;
  const excess = limitOf('cant_excess');
  if (excess !== null && facts.slowest !== null) {
    const v = facts.slowest.mps;
    const atSlowest = cantMm - (facts.baseMm * v * v * facts.curvaturePerM) / STANDARD_GRAVITY_MPS2;
    if (atSlowest > excess)
      return `${num(atSlowest, 0)} mm of excess at the lowest recorded speed, limit ${num(excess, 0)} mm`;
  }
  for (const end of facts.ends) {
    if (end.kind === 'abrupt') continue;
    const rate = (cantMm * end.fastest.mps) / end.lengthM;
    const mostRate = limitOf('cant_rate');
    if (mostRate !== null && rate > mostRate) {
      return `the ${end.place} transition would run cant off at ${num(rate, 0)} mm/s, limit ${num(mostRate, 0)} mm/s`;
    }
    const gradient = cantMm / end.lengthM;
    const mostGradient = limitOf('cant_gradient');
    if (mostGradient !== null && gradient > mostGradient) {
      return `the ${end.place} transition would twist by ${num(gradient, 2)} mm/m, limit ${num(mostGradient, 2)} mm/m`;
    }
  }
  return '';
}

/** Room for a longer transition: it grows half into the straight and half into the arc. */
function againstTransition(curveCase: CurveCase, neededM: number): string {
  const { curve } = curveCase.facts.passage;
  const arc = curve.arcEndM - curve.arcStartM;
  const growth = neededM - Math.min(...curveCase.facts.ends.map((end) => (end.kind === 'abrupt' ? 0 : end.lengthM)));
  return growth > arc ? `the circular part of ${num(arc, 0)} m is too short for it at this radius` : '';
}

/** Names of the criteria among `failing` that a cure does not touch. */
function namesWithout(failing: readonly Judged[], cures: (j: Judged) => boolean): string[] {
  return failing.filter((j) => !cures(j)).map((j) => criterionOf(j.result.criterion).name.toLowerCase());
}

function notCured(others: readonly string[]): string {
  return others.length > 0 ? `does not cure ${others.join(', ')}` : '';
}

/**
 * The cures of a curve that is not within its limits: speed, cant and transition, each with what stands against it.
 * Empty for a curve that is
 * within, or that nothing can be said of.
 */
export function curesOf(
  curveCase: CurveCase,
  setup: Setup,
  judged: readonly Judged[],
  timeCostS: number | null,
): Cure[] {
  const failing = judged.filter((j) => j.result.verdict === 'over' || j.result.verdict === 'undecided');
  if (failing.length === 0) return [];
  const cures: Cure[] = [];
  const needs = needsOf(judged, setup.limits.speedStepKmh);
  const bySpeed = failing.filter((j) => j.measured?.speedFor !== undefined);
  if (needs.speedKmh !== null && bySpeed.length > 0) {
    const others = namesWithout(failing, (j) => j.measured?.speedFor !== undefined);
    cures.push({
      kind: 'speed',
      value: needs.speedKmh,
      unit: 'km/h',
      feasible: others.length === 0 && needs.speedKmh > 0,
      against: [needs.speedKmh > 0 ? '' : 'no speed complies', notCured(others)].filter((t) => t !== '').join('; '),
      timeCostS,
    });
  }
  const byCant = failing.filter((j) => j.measured?.cantFor !== undefined);
  if (byCant.length > 0 && setup.mode === 'rail' && needs.cantMm !== null) {
    // Cant is laid in whole millimetres; the need is rounded up.
    const cantMm = Math.ceil(needs.cantMm - 1e-9);
    const others = namesWithout(failing, (j) => j.measured?.cantFor !== undefined);
    const against = againstCant(curveCase, setup, cantMm);
    cures.push({
      kind: 'cant',
      value: cantMm,
      unit: 'mm',
      feasible: against === '' && others.length === 0,
      against: [against, others.length > 0 ? `does not cure ${others.join(', ')}` : '']
        .filter((t) => t !== '')
        .join('; '),
      timeCostS: 0,
    });
  }
  const byLength = failing.filter((j) => j.measured?.transitionFor !== undefined);
  if (byLength.length > 0) {
    const lengthM = Math.max(...byLength.map((j) => j.result.neededTransitionM ?? 0));
    const others = namesWithout(failing, (j) => j.measured?.transitionFor !== undefined);
    const against = againstTransition(curveCase, lengthM);
    cures.push({
      kind: 'transition',
      value: Math.ceil(lengthM),
      unit: 'm',
      feasible: against === '' && others.length === 0,
      against: [against, others.length > 0 ? `does not cure ${others.join(', ')}` : '']
        .filter((t) => t !== '')
        .join('; '),
      timeCostS: 0,
    });
  }
  return cures;
}

/** A cure in one sentence of the notes. */
export function cureText(cure: Cure): string {
  const what = { speed: 'Speed', cant: 'Cant', transition: 'Transition' }[cure.kind];
  const value = formatQuantity(cure.value, cure.unit, 0);
  const state = cure.feasible ? 'would comply' : `would not do: ${cure.against}`;
  const cost =
    cure.feasible && cure.timeCostS !== null && cure.timeCostS > 0 ? ` at a cost of ${num(cure.timeCostS, 1)} s` : '';
  return `${what} ${value} ${state}${cost}.`;
}
