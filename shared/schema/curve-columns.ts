import { CURVE_COLUMNS, type CurveRow } from './curve-row.ts';

/** How one column of the curve table is titled, in which unit it stands and to how many decimals it is given. */
export interface CurveColumn {
  readonly key: keyof CurveRow;
  /** Title for people; the exports that machines read use `key`. */
  readonly label: string;
  readonly unit: string;
  /** Decimals given everywhere (page, exports, command line); null for text. */
  readonly decimals: number | null;
}

const DESCRIPTIONS: Record<keyof CurveRow, readonly [label: string, unit: string, decimals: number | null]> = {
  run: ['Run', '', null],
  curve: ['Curve', '', 0],
  hand: ['Hand', '', null],
  shape: ['Shape', '', null],
  start_m: ['Start', 'm', 1],
  end_m: ['End', 'm', 1],
  lat_start: ['Latitude, start', '°', 7],
  lon_start: ['Longitude, start', '°', 7],
  lat_mid: ['Latitude, middle', '°', 7],
  lon_mid: ['Longitude, middle', '°', 7],
  lat_end: ['Latitude, end', '°', 7],
  lon_end: ['Longitude, end', '°', 7],
  radius_m: ['Radius', 'm', 1],
  radius_low_m: ['Radius, low', 'm', 1],
  radius_high_m: ['Radius, high', 'm', 1],
  deflection_deg: ['Deflection', '°', 2],
  arc_m: ['Circular arc', 'm', 1],
  entry_transition_m: ['Entry transition', 'm', 1],
  exit_transition_m: ['Exit transition', 'm', 1],
  speed_kmh: ['Speed', 'km/h', 1],
  speed_max_kmh: ['Top speed', 'km/h', 1],
  speed_low_kmh: ['Speed, low', 'km/h', 1],
  speed_high_kmh: ['Speed, high', 'km/h', 1],
  cant_mm: ['Cant', 'mm', 1],
  superelevation_pct: ['Superelevation', '%', 2],
  cant_source: ['Cant source', '', null],
  equilibrium_cant_mm: ['Equilibrium cant', 'mm', 1],
  cant_deficiency_mm: ['Cant deficiency', 'mm', 1],
  cant_deficiency_low_mm: ['Cant deficiency, low', 'mm', 1],
  cant_deficiency_high_mm: ['Cant deficiency, high', 'mm', 1],
  cant_excess_mm: ['Cant excess', 'mm', 1],
  deficiency_rate_mm_s: ['Rate of cant deficiency', 'mm/s', 1],
  cant_rate_mm_s: ['Rate of cant', 'mm/s', 1],
  lateral_track_ms2: ['Lateral, track plane', 'm/s²', 3],
  lateral_track_low_ms2: ['Lateral, track plane, low', 'm/s²', 3],
  lateral_track_high_ms2: ['Lateral, track plane, high', 'm/s²', 3],
  lateral_body_ms2: ['Lateral, body', 'm/s²', 3],
  jerk_ms3: ['Lateral jerk', 'm/s³', 3],
  side_friction: ['Side friction demand', '', 3],
  ball_bank_deg: ['Ball-bank angle', '°', 1],
  pct_seated: ['Dissatisfied, seated', '%', 1],
  pct_standing: ['Dissatisfied, standing', '%', 1],
  verdict: ['Verdict', '', null],
  governing_criterion: ['Governing criterion', '', null],
  value: ['Value', '', 3],
  limit: ['Limit', '', 3],
  utilisation: ['Utilisation', '', 3],
  complying_speed_kmh: ['Complying speed', 'km/h', 1],
  complying_cant_mm: ['Complying cant', 'mm', 1],
  time_cost_s: ['Time cost', 's', 1],
  notes: ['Notes', '', null],
};

/** The columns of the curve table in their order. */
export const curveColumns: readonly CurveColumn[] = CURVE_COLUMNS.map((key) => {
  const [label, unit, decimals] = DESCRIPTIONS[key];
  return { key, label, unit, decimals };
});

/**
 * The row with every number rounded to the decimals of its column: the one place where figures
 * are rounded for people, so that page, exports and command line agree to the last digit.
 */
export function roundRow(row: CurveRow): CurveRow {
  const rounded: Record<string, unknown> = { ...row };
  for (const { key, decimals } of curveColumns) {
    const value = row[key];
    if (decimals !== null && typeof value === 'number') rounded[key] = roundTo(value, decimals);
  }
  return rounded as CurveRow;
}

/** value to the given number of decimals, without a negative zero; null when not finite. */
export function roundTo(value: number, decimals: number): number | null {
  if (!Number.isFinite(value)) return null;
  const rounded = Number(value.toFixed(decimals));
  return rounded === 0 ? 0 : rounded;
}
