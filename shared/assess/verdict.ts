import type { Verdict } from '../schema/common.ts';
import type { CriterionResult } from '../schema/curve-row.ts';
import type { CriterionId, Limit } from '../schema/limit-set.ts';
import type { Setup } from '../schema/setup.ts';
import type { Unit } from '../units.ts';
import { mpsToKmh, formatQuantity } from '../units.ts';
import { roundDownToStep } from '../curving/advisory-speed.ts';
import { criterionOf } from '../limits/criteria.ts';
import type { AppliedLimit } from '../limits/lookup.ts';
import { bandValue, describeSource, entryOf, limitFor, limitIn } from '../limits/lookup.ts';
import type { Measured, Unmeasured } from './measured.ts';
import { isMeasured } from './measured.ts';
import { intervalText, num } from './text.ts';

/** `within`, `over` or `undecided` of an interval against a limit that it must not exceed (or fall short of). */
export function verdictOf(low: number | null, high: number, limit: number, sense: 'most' | 'least'): Verdict {
  if (sense === 'least') {
    if ((low ?? -Infinity) >= limit) return 'within';
    return high < limit ? 'over' : 'undecided';
  }
  if (high <= limit) return 'within';
  return low !== null && low > limit ? 'over' : 'undecided';
}

/**
 * Highest speed, km/h, that meets a criterion's limit, bands of speed included: in each band of the set that holds
 * for the
 * radius the speed that the band's value allows, capped to the band. Unrounded; Infinity when nothing limits; null
 * when no
 * band gives an answer.
 */
export function complyingKmh(
  setup: Setup,
  criterion: CriterionId,
  radiusM: number,
  speedFor: (limit: number) => number,
  placeLimit?: Limit,
): number | null {
  const entry = placeLimit ?? entryOf(setup.limits, criterion);
  let best: number | null = null;
  for (const band of entry?.bands ?? []) {
    if (radiusM < (band.minRadiusM ?? -Infinity) || radiusM > (band.maxRadiusM ?? Infinity)) continue;
    const found = bandValue(band, setup.tier);
    if (found === null) continue;
    const speed = Math.min(mpsToKmh(speedFor(found.value)), band.maxSpeedKmh ?? Infinity);
    if (Number.isNaN(speed) || speed < (band.minSpeedKmh ?? 0)) continue;
    if (best === null || speed > best) best = speed;
  }
  return best;
}

/** A criterion's result together with what the row and the advice need unrounded. */
export interface Judged {
  readonly result: CriterionResult;
  readonly measured: Measured | null;
  readonly applied: AppliedLimit | null;
}

function stepped(kmh: number | null, stepKmh: number): number | null {
  // Steps of 5 mph are no round figure in km/h; four decimals keep them free of the arithmetic's tail.
  return kmh === null || !Number.isFinite(kmh) ? null : Number(roundDownToStep(kmh, stepKmh).toFixed(4));
}

/** Null for what JSON cannot carry. */
export function finite(value: number | null | undefined): number | null {
  return value === null || value === undefined || !Number.isFinite(value) ? null : value;
}

function notAssessed(
  criterion: CriterionId,
  reason: string,
  measured: Measured | null,
  working: string[],
  source = '',
): CriterionResult {
  return {
    criterion,
    verdict: 'not assessed',
    value: finite(measured?.value),
    low: finite(measured?.low),
    high: finite(measured?.high),
    unit: criterionOf(criterion).unit,
    limit: null,
    utilisation: null,
    complyingSpeedKmh: null,
    complyingSpeedSureKmh: null,
    complyingCantMm: null,
    neededTransitionM: null,
    working,
    source,
    reason,
  };
}

/** Formula, numbers, result. */
function figureLines(measured: Measured, setup: Setup): string[] {
  const { name, unit, decimals } = criterionOf(measured.criterion);
  const numbers = measured.substituted();
  return [
    `${name}: ${measured.formula}`,
    numbers.startsWith('with ') ? numbers : `= ${numbers}`,
    `= ${intervalText(measured, unit, decimals, setup.confidence)}${measured.isBound ? ', for zero cant: an upper bound' : ''}`,
    ...measured.remarks,
  ];
}

/** Meets a figure with its limit. `withWorking` false leaves the lines out (trials of many curves at once). */
export function judge(found: Measured | Unmeasured, setup: Setup, radiusM: number, withWorking: boolean): Judged {
  const { criterion } = found;
  if (!isMeasured(found) || Number.isNaN(found.value)) {
    const missing = isMeasured(found) ? 'the speed is not known here' : found.missing;
    const working = withWorking ? [`${criterionOf(criterion).name}: not assessed, ${missing}.`] : [];
    return { result: notAssessed(criterion, missing, null, working), measured: null, applied: null };
  }
  const { unit, sense } = criterionOf(criterion);
  const applied = found.placeLimit
    ? limitIn(found.placeLimit, setup.tier, mpsToKmh(found.speedMps), radiusM)
    : limitFor(setup.limits, criterion, setup.tier, mpsToKmh(found.speedMps), radiusM);
  const lines = withWorking ? figureLines(found, setup) : [];
  if (applied === null) {
    const has = entryOf(setup.limits, criterion) !== null;
    const reason = has
      ? `the limit set "${setup.limits.name}" has no value for this speed, radius and tier`
      : `the limit set "${setup.limits.name}" has no limit for it`;
    if (withWorking) lines.push(`Not assessed: ${reason}.`);
    return { result: notAssessed(criterion, reason, found, lines), measured: found, applied: null };
  }
  const limit = applied.value;
  const verdict = verdictOf(found.low, found.high, limit, sense);
  if (verdict === 'undecided' && found.unresolved !== undefined) {
    if (withWorking) {
      lines.push(limitLine(applied, unit), `Not assessed: ${found.unresolved}.`);
    }
    const result = notAssessed(criterion, found.unresolved, found, lines, describeSource(applied.limit));
    return { result: { ...result, limit }, measured: found, applied };
  }
  const utilisation = sense === 'most' ? found.value / limit : limit / found.value;
  const { speedStepKmh } = setup.limits;
  const { speedFor, cantFor, transitionFor } = found;
  const exact = speedFor
    ? complyingKmh(setup, criterion, radiusM, (value) => speedFor(value, false), found.placeLimit)
    : null;
  const sure = speedFor
    ? complyingKmh(setup, criterion, radiusM, (value) => speedFor(value, true), found.placeLimit)
    : null;
  const cant = cantFor ? Math.max(cantFor(limit), 0) : null;
  const transition = transitionFor ? transitionFor(limit) : null;
  const reason = undecidedReason(verdict, found, limit, cant, setup);
  if (withWorking) {
    lines.push(
      limitLine(applied, unit),
      `Utilisation ${num(utilisation, 3)}: ${verdict}${reason === '' ? '' : `, ${reason}`}.`,
    );
    if (exact !== null && sure !== null && Number.isFinite(exact)) {
      lines.push(
        `Complying speed ${num(exact, 1)} km/h, in steps of ${num(speedStepKmh, speedStepKmh % 1 === 0 ? 0 : 1)} km/h ` +
          `${num(roundDownToStep(exact, speedStepKmh), 0)} km/h; sure at ${num(setup.confidence * 100, 0)} %: ` +
          `${num(roundDownToStep(sure, speedStepKmh), 0)} km/h.`,
      );
    }
    if (cant !== null) {
      lines.push(
        setup.mode === 'rail'
          ? `Complying cant at the recorded speed: ${num(cant, 0)} mm.`
          : `Complying superelevation at the recorded speed: ${num(cant, 1)} %.`,
      );
    }
    if (transition !== null && Number.isFinite(transition)) {
      lines.push(`Transition needed at the recorded speed: ${num(transition, 0)} m.`);
    }
  }
  const result: CriterionResult = {
    criterion,
    verdict,
    value: finite(found.value),
    low: finite(found.low),
    high: finite(found.high),
    unit,
    limit,
    utilisation: finite(utilisation),
    complyingSpeedKmh: stepped(exact, speedStepKmh),
    complyingSpeedSureKmh: stepped(sure, speedStepKmh),
    complyingCantMm: setup.mode === 'rail' ? finite(cant) : null,
    neededTransitionM: finite(transition),
    working: lines,
    source: describeSource(applied.limit),
    reason,
  };
  return { result, measured: found, applied };
}

function limitLine(applied: AppliedLimit, unit: Unit): string {
  const value = formatQuantity(applied.value, unit, limitDecimals(applied.value));
  return `Limit (${applied.tier}): ${value}. Source: ${describeSource(applied.limit)}`;
}

function limitDecimals(limit: number): number {
  return Number.isInteger(limit) ? 0 : Math.min(String(limit).split('.')[1]?.length ?? 0, 3);
}

/** Why undecided, and what would decide it; empty for the other verdicts. */
function undecidedReason(verdict: Verdict, found: Measured, limit: number, cant: number | null, setup: Setup): string {
  if (verdict !== 'undecided') return '';
  const { unit } = criterionOf(found.criterion);
  if (found.isBound) {
    const needed =
      cant === null
        ? ''
        : setup.mode === 'rail'
          ? `; it complies with a cant of at least ${num(Math.ceil(cant), 0)} mm`
          : `; it complies with a superelevation of at least ${num(cant, 1)} %`;
    return `the cant is not known and zero cant would not comply${needed}`;
  }
  return `the interval reaches both sides of ${formatQuantity(limit, unit, limitDecimals(limit))}; more runs or a log with course and speed at a higher rate narrow it`;
}
