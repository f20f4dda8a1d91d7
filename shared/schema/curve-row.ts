import { z } from 'zod';
import { Verdict } from './common.ts';
import { CriterionId } from './limit-set.ts';

const num = z.number().nullable();

/** One row of the curve table: names and units are the contract of every export. Null = unknown or not applicable. */
export const CurveRow = z.object({
  run: z.string(),
  curve: z.number().int(),
  hand: z.enum(['left', 'right']),
  shape: z.enum(['simple', 'compound', 'reverse', 'abrupt']),
  start_m: z.number(),
  end_m: z.number(),
  lat_start: z.number(),
  lon_start: z.number(),
  lat_mid: z.number(),
  lon_mid: z.number(),
  lat_end: z.number(),
  lon_end: z.number(),
  radius_m: num,
  radius_low_m: num,
  radius_high_m: num,
  deflection_deg: num,
  arc_m: num,
  entry_transition_m: num,
  exit_transition_m: num,
  speed_kmh: num,
  speed_max_kmh: num,
  speed_low_kmh: num,
  speed_high_kmh: num,
  cant_mm: num,
  superelevation_pct: num,
  cant_source: z.enum(['registered', 'assumed', 'unknown']),
  equilibrium_cant_mm: num,
  cant_deficiency_mm: num,
  cant_deficiency_low_mm: num,
  cant_deficiency_high_mm: num,
  cant_excess_mm: num,
  deficiency_rate_mm_s: num,
  cant_rate_mm_s: num,
  lateral_track_ms2: num,
  lateral_track_low_ms2: num,
  lateral_track_high_ms2: num,
  lateral_body_ms2: num,
  jerk_ms3: num,
  side_friction: num,
  ball_bank_deg: num,
  pct_seated: num,
  pct_standing: num,
  verdict: Verdict,
  governing_criterion: CriterionId.nullable(),
  value: num,
  limit: num,
  utilisation: num,
  complying_speed_kmh: num,
  complying_cant_mm: num,
  time_cost_s: num,
  notes: z.string(),
});
export type CurveRow = z.infer<typeof CurveRow>;

/** Column order of the table. */
export const CURVE_COLUMNS = Object.keys(CurveRow.shape) as readonly (keyof CurveRow)[];

/** One criterion of one curve, with the working that shows where the figure comes from. */
export const CriterionResult = z.object({
  criterion: CriterionId,
  verdict: Verdict,
  value: num,
  low: num,
  high: num,
  unit: z.string(),
  limit: num,
  utilisation: num,
  complyingSpeedKmh: num,
  /** The same at the chosen confidence: the speed whose interval lies within the limit. */
  complyingSpeedSureKmh: num,
  complyingCantMm: num,
  neededTransitionM: num,
  /** Formula, then the same with numbers and units, then result against limit: lines of text. */
  working: z.array(z.string()),
  source: z.string(),
  /** Why not assessed or undecided and what would decide it; empty otherwise. */
  reason: z.string(),
});
export type CriterionResult = z.infer<typeof CriterionResult>;

export const AssessedCurve = z.object({ row: CurveRow, criteria: z.array(CriterionResult) });
export type AssessedCurve = z.infer<typeof AssessedCurve>;
