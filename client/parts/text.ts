import { CRITERIA } from '../../shared/limits/criteria.ts';
import type { AssessedCurve, CriterionResult, CurveRow } from '../../shared/schema/curve-row.ts';
import { roundRow } from '../../shared/schema/curve-columns.ts';

/** A number for people: enough figures, a thin gap for thousands, a dash where there is none. */
export function figure(value: number | null | undefined, decimals = 1): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return '–';
  const text = Math.abs(value).toFixed(decimals);
  const [whole = '', part] = text.split('.');
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+$)/g, '\u2009') : whole;
  const sign = value < 0 && Number(text) !== 0 ? '−' : '';
  return `${sign}${grouped}${part === undefined ? '' : `.${part}`}`;
}

export function interval(low: number | null, high: number | null, decimals = 1): string {
  if (low === null && high === null) return '';
  return `${figure(low, decimals)} to ${high === null ? '∞' : figure(high, decimals)}`;
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

/** The one sentence that somebody in a hurry reads. */
export function curveSentence({ row, criteria }: AssessedCurve): string {
  const r = roundRow(row);
  const governing = criteria.find(({ criterion }) => criterion === row.governing_criterion);
  const place = `Curve ${String(row.curve)}, ${row.hand}, R ${figure(r.radius_m, 0)} m`;
  if (governing === undefined || governing.value === null) return `${place}: ${row.verdict}.`;
  const decimals = criterionDecimals(governing.criterion);
  const against =
    governing.limit === null ? '' : ` against ${figure(governing.limit, decimals)} ${unitText(governing.unit)}`;
  const judged = `${criterionName(governing.criterion).toLowerCase()} ${figure(governing.value, decimals)} ${unitText(governing.unit)}${against}: ${row.verdict}.`;
  const needsCure = row.verdict === 'over' || row.verdict === 'undecided';
  if (!needsCure || r.complying_speed_kmh === null) return `${place}: ${judged}`;
  const cost = r.time_cost_s === null ? '' : ` and costs ${figure(r.time_cost_s, 1)} s`;
  return `${place}: ${judged} ${figure(r.complying_speed_kmh, 0)} km/h would comply${cost}.`;
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
