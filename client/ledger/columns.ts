import { curveColumns, type CurveColumn } from '../../shared/schema/curve-columns.ts';
import type { CurveRow } from '../../shared/schema/curve-row.ts';

const KEPT = 'bendbook.columns';

/** Width of a column, px. */
export function columnWidth({ key, decimals }: CurveColumn): number {
  if (key === 'utilisation') return 118;
  if (key === 'verdict') return 124;
  if (key === 'notes') return 420;
  if (key === 'governing_criterion') return 190;
  if (key === 'run') return 180;
  if (key === 'curve') return 62;
  return decimals === null ? 92 : 92;
}

const FIRST: Readonly<Record<'rail' | 'road', readonly (keyof CurveRow)[]>> = {
  rail: [
    'curve',
    'verdict',
    'governing_criterion',
    'utilisation',
    'hand',
    'radius_m',
    'start_m',
    'end_m',
    'speed_kmh',
    'cant_mm',
    'equilibrium_cant_mm',
    'cant_deficiency_mm',
    'lateral_track_ms2',
    'lateral_body_ms2',
    'jerk_ms3',
    'complying_speed_kmh',
    'complying_cant_mm',
    'time_cost_s',
  ],
  road: [
    'curve',
    'verdict',
    'governing_criterion',
    'utilisation',
    'hand',
    'radius_m',
    'start_m',
    'end_m',
    'speed_kmh',
    'superelevation_pct',
    'side_friction',
    'lateral_track_ms2',
    'lateral_body_ms2',
    'jerk_ms3',
    'ball_bank_deg',
    'complying_speed_kmh',
    'time_cost_s',
  ],
};

/** Columns shown: the user's choice, kept for the mode, else those that most people need. */
export function keptColumns(mode: 'rail' | 'road'): readonly CurveColumn[] {
  const kept = localStorage.getItem(`${KEPT}.${mode}`)?.split(',') ?? FIRST[mode];
  const found = kept.flatMap((key) => curveColumns.filter((column) => column.key === key));
  return found.length > 0 ? found : curveColumns.filter(({ key }) => FIRST[mode].includes(key));
}

export function keepColumns(mode: 'rail' | 'road', columns: readonly CurveColumn[]): void {
  localStorage.setItem(`${KEPT}.${mode}`, columns.map(({ key }) => key).join(','));
}
