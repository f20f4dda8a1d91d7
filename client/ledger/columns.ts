import { curveColumns, type CurveColumn } from '../../shared/schema/curve-columns.ts';
import type { CurveRow } from '../../shared/schema/curve-row.ts';
import { keep, readKept } from '../parts/kept.ts';

type Key = keyof CurveRow;

const WIDTH_PX: Partial<Record<Key, number>> = {
  run: 220,
  curve: 58,
  hand: 56,
  shape: 84,
  verdict: 116,
  governing_criterion: 212,
  value: 96,
  limit: 92,
  utilisation: 136,
  cant_source: 92,
  notes: 460,
};

/** Width of a column, px: enough for its figures and for its title in two lines. */
export function columnWidth({ key, label }: CurveColumn): number {
  const longestWord = Math.max(...label.split(' ').map((word) => word.length));
  return WIDTH_PX[key] ?? Math.max(label.length > 16 ? 96 : 80, 26 + 7.4 * longestWord);
}

const FIRST: Readonly<Record<'rail' | 'road', readonly Key[]>> = {
  rail: [
    'curve',
    'verdict',
    'governing_criterion',
    'value',
    'limit',
    'utilisation',
    'hand',
    'radius_m',
    'start_m',
    'end_m',
    'speed_kmh',
    'cant_mm',
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
    'value',
    'limit',
    'utilisation',
    'hand',
    'radius_m',
    'start_m',
    'end_m',
    'speed_kmh',
    'superelevation_pct',
    'side_friction',
    'lateral_body_ms2',
    'jerk_ms3',
    'ball_bank_deg',
    'complying_speed_kmh',
    'time_cost_s',
  ],
};

/** Every column, those that most people need first and in their order. */
export function columnOrder(mode: 'rail' | 'road'): readonly CurveColumn[] {
  const find = (key: Key) => curveColumns.find((column) => column.key === key)!;
  return [...FIRST[mode].map(find), ...curveColumns.filter(({ key }) => !FIRST[mode].includes(key))];
}

/** Columns shown: the reader's choice, kept for the mode, else those that most people need. */
export function keptColumns(mode: 'rail' | 'road'): readonly CurveColumn[] {
  const kept = readKept<readonly string[]>(`columns.${mode}`, FIRST[mode]);
  const shown = columnOrder(mode).filter(({ key }) => kept.includes(key));
  return shown.length > 0 ? shown : columnOrder(mode).slice(0, FIRST[mode].length);
}

export function keepColumns(mode: 'rail' | 'road', columns: readonly CurveColumn[] | null): void {
  keep(`columns.${mode}`, columns?.map(({ key }) => key) ?? null);
}

/** Chainages may be shown in another unit than lengths. */
export function isChainage(key: Key): boolean {
  return key === 'start_m' || key === 'end_m';
}
