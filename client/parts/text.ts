import { CRITERIA } from '../../shared/limits/criteria.ts';
import { roundRow } from '../../shared/schema/curve-columns.ts';
import type { AssessedCurve, CriterionResult, CurveRow } from '../../shared/schema/curve-row.ts';
import { inShown, type ShownUnits } from './units.ts';

/** A number for people: enough figures, a thin gap for thousands, a dash where there is none. */
export function figure(value: number | null | undefined, decimals = 1): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return '–';
  const text = Math.abs(value).toFixed(decimals);
  const [whole = '', part] = text.split('.');
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, '\u2009') : whole;
  const sign = value < 0 && Number(text) !== 0 ? '−' : '';
  return `${sign}${grouped}${part === undefined ? '' : `.${part}`}`;
}

function interval(low: number | null, high: number | null, decimals = 1): string {
  if (low === null && high === null) return '';
  return `${figure(low, decimals)} to ${high === null ? '∞' : figure(high, decimals)}`;
}

/** A figure that stands in `unit`, with the reader's unit behind it. */
export function quantity(
  value: number | null | undefined,
  unit: string,
  decimals: number,
  units: ShownUnits,
  isChainage = false,
): string {
  const shown = inShown(value ?? null, unit, decimals, units, isChainage);
  const after = unitText(shown.unit);
  if (after === '' || shown.value === null) return figure(shown.value, shown.decimals);
  return `${figure(shown.value, shown.decimals)}${after === '°' ? '' : '\u00a0'}${after}`;
}

/** A limit as people write it: without needless zeros. */
export function limitQuantity(value: number, unit: string, decimals: number, units: ShownUnits): string {
  return quantity(value, unit, decimals, units).replace(/\.(\d*?)0+(?=\D|$)/, (_, kept: string) =>
    kept === '' ? '' : `.${kept}`,
  );
}

/** A 95 % interval in the reader's unit, without the unit. */
export function shownInterval(
  low: number | null,
  high: number | null,
  unit: string,
  decimals: number,
  units: ShownUnits,
): string {
  const shown = inShown(low, unit, decimals, units);
  return interval(shown.value, inShown(high, unit, decimals, units).value, shown.decimals);
}

export function criterionName(criterion: CriterionResult['criterion'] | null): string {
  return CRITERIA.find(({ id }) => id === criterion)?.name ?? '–';
}

export function criterionDecimals(criterion: CriterionResult['criterion']): number {
  return CRITERIA.find(({ id }) => id === criterion)?.decimals ?? 2;
}

const RANK: Readonly<Record<CurveRow['verdict'], number>> = { over: 0, undecided: 1, 'not assessed': 2, within: 3 };

/** Worst first: over before undecided before the rest, the highest utilisation first. */
export function byWorst(a: AssessedCurve, b: AssessedCurve): number {
  return RANK[a.row.verdict] - RANK[b.row.verdict] || (b.row.utilisation ?? -1) - (a.row.utilisation ?? -1);
}

/** The governing criterion in words: "cant deficiency 172 mm against 130 mm"; null when nothing governs. */
export function governingText({ row, criteria }: AssessedCurve, units: ShownUnits): string | null {
  const governing = criteria.find(({ criterion }) => criterion === row.governing_criterion);
  if (governing === undefined || governing.value === null) return null;
  const decimals = criterionDecimals(governing.criterion);
  const value = quantity(governing.value, governing.unit, decimals, units);
  const against =
    governing.limit === null ? '' : ` against ${limitQuantity(governing.limit, governing.unit, decimals, units)}`;
  return `${criterionName(governing.criterion).toLowerCase()} ${value}${against}`;
}

/** The one sentence that somebody in a hurry reads. */
export function curveSentence(curve: AssessedCurve, units: ShownUnits): string {
  const r = roundRow(curve.row);
  const place = `Curve ${String(r.curve)}, ${r.hand}, R ${quantity(r.radius_m, 'm', 0, units)}`;
  const governing = governingText(curve, units);
  if (governing === null) return `${place}: ${r.verdict}.`;
  const judged = `${place}: ${governing}: ${r.verdict}.`;
  const needsCure = r.verdict === 'over' || r.verdict === 'undecided';
  if (!needsCure || r.complying_speed_kmh === null) return judged;
  const cost = r.time_cost_s === null ? '' : ` and costs ${figure(r.time_cost_s, 1)} s`;
  return `${judged} ${quantity(r.complying_speed_kmh, 'km/h', 0, units)} would comply${cost}.`;
}

export function unitText(unit: string): string {
  return unit === '1' ? '' : unit;
}

export function duration(seconds: number): string {
  const h = Math.floor(seconds / 3600);
  const m = Math.floor((seconds % 3600) / 60);
  const s = Math.floor(seconds % 60);
  return h > 0
    ? `${String(h)} h ${String(m).padStart(2, '0')} min`
    : `${String(m)} min ${String(s).padStart(2, '0')} s`;
}

export function clock(utcS: number): string {
  return Number.isFinite(utcS)
    ? `${new Date(utcS * 1000).toISOString().slice(0, 16).replace('T', ' ')} UTC`
    : 'time unknown';
}

export function bytes(count: number): string {
  if (count < 1000) return `${String(count)} B`;
  return count < 1e6 ? `${figure(count / 1e3, 0)} kB` : `${figure(count / 1e6, 1)} MB`;
}

/** "1 curve", "3 curves". */
export function counted(count: number, one: string, many = `${one}s`): string {
  return `${String(count)} ${count === 1 ? one : many}`;
}
