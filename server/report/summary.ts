import { roundRow } from '../../shared/schema/curve-columns.ts';
import type { AssessedCurve, CriterionResult, CurveRow } from '../../shared/schema/curve-row.ts';
import type { ReportContext, ReportedRun } from './context.ts';
import { utcText } from './method.ts';

/** Curves that a report gives a page of their own: over first, then undecided, worst first. */
export function hotspots(run: ReportedRun, most = 40): AssessedCurve[] {
  const rank = { over: 0, undecided: 1, 'not assessed': 2, within: 3 };
  return run.curves
    .filter(({ row }) => row.verdict === 'over' || row.verdict === 'undecided')
    .sort((a, b) => rank[a.row.verdict] - rank[b.row.verdict] || (b.row.utilisation ?? 0) - (a.row.utilisation ?? 0))
    .slice(0, most);
}

/** Opening lines of a report on one run. */
export function runSummary(run: ReportedRun): string[] {
  const count = (verdict: CurveRow['verdict']) => run.curves.filter(({ row }) => row.verdict === verdict).length;
  const worst = hotspots(run, 1)[0];
  return [
    `${run.name}: ${(run.lengthM / 1000).toFixed(2)} km in ${durationText(run.durationS)}, begins ${utcText(run.startUtcS)}.`,
    `${String(run.curves.length)} curves: ${String(count('over'))} over, ${String(count('undecided'))} undecided, ` +
      `${String(count('within'))} within, ${String(count('not assessed'))} not assessed.`,
    ...(worst === undefined ? [] : [`Worst: ${headline(worst)}`]),
  ];
}

/** One sentence on one curve: geometry, governing figure against its limit, what would cure it. */
export function headline({ row, criteria }: AssessedCurve): string {
  const r = roundRow(row);
  const governing = criteria.find((c) => c.criterion === row.governing_criterion);
  const radius = r.radius_m === null ? 'radius unknown' : `R ${r.radius_m.toFixed(0)} m`;
  const figure =
    governing === undefined || governing.value === null || governing.limit === null
      ? row.verdict
      : `${criterionText(governing)} ${figureText(governing.value)} ${governing.unit} against ${figureText(governing.limit)} ${governing.unit}: ${row.verdict}`;
  const cure =
    row.verdict === 'over' && r.complying_speed_kmh !== null
      ? ` ${String(r.complying_speed_kmh)} km/h would comply${r.time_cost_s === null ? '' : ` and costs ${r.time_cost_s.toFixed(1)} s`}.`
      : '';
  return `Curve ${String(row.curve)}, ${row.hand}, ${radius}: ${figure}.${cure}`;
}

export function criterionText(c: Pick<CriterionResult, 'criterion'>): string {
  return c.criterion.replaceAll('_', ' ').replace('pct ', 'dissatisfied, ');
}

export function figureText(value: number): string {
  return Math.abs(value) >= 20 ? value.toFixed(0) : value.toPrecision(3);
}

/** Rows of the short table that reports print; the whole table travels as CSV or XLSX. */
export const SHORT_COLUMNS: readonly (readonly [key: keyof CurveRow, title: string])[] = [
  ['curve', 'Curve'],
  ['hand', 'Hand'],
  ['start_m', 'Start m'],
  ['end_m', 'End m'],
  ['radius_m', 'R m'],
  ['speed_kmh', 'km/h'],
  ['cant_mm', 'Cant mm'],
  ['cant_deficiency_mm', 'Def. mm'],
  ['lateral_track_ms2', 'a m/s²'],
  ['utilisation', 'Util.'],
  ['verdict', 'Verdict'],
  ['complying_speed_kmh', 'Complying'],
];

export function shortCell(row: CurveRow, key: keyof CurveRow): string {
  const value = roundRow(row)[key];
  return value === null ? '–' : String(value);
}

/** Title of a report: what is in it, for its first page and its file name. */
export function reportTitle(context: ReportContext): string {
  return context.title === '' ? 'Curve book' : context.title;
}

function durationText(seconds: number): string {
  const h = Math.floor(seconds / 3600);
  const m = Math.floor((seconds % 3600) / 60);
  const s = Math.floor(seconds % 60);
  return h > 0 ? `${String(h)} h ${String(m)} min` : `${String(m)} min ${String(s)} s`;
}
