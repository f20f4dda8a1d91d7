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

/** A way to bring a curve within its limits, and what stands against it. */
export const Cure = z.object({
  kind: z.enum(['speed', 'cant', 'transition']),
  /** Speed not to exceed, least cant, or least length of the transition. */
  value: z.number(),
  unit: z.enum(['km/h', 'mm', 'm']),
  feasible: z.boolean(),
  /** Why it is not feasible or not enough alone; empty otherwise. */
  against: z.string(),
  timeCostS: num,
});
export type Cure = z.infer<typeof Cure>;

/** Modelled body motion with the roll as a damped oscillator. */
export const BodyDynamics = z.object({
  peakBodyMps2: z.number(),
  /** Largest roll over the quasi-static one. */
  dynamicFactor: z.number(),
  peakRollDeg: z.number(),
  /** Speed at which entry and exit of this curve excite the roll most, km/h; null without natural frequency. */
  worstSpeedKmh: num,
});
export type BodyDynamics = z.infer<typeof BodyDynamics>;

export const AssessedCurve = z.object({
  row: CurveRow,
  criteria: z.array(CriterionResult),
  cures: z.array(Cure).optional(),
  /** Absent when the vehicle's roll is not known. */
  dynamics: BodyDynamics.optional(),
});
export type AssessedCurve = z.infer<typeof AssessedCurve>;
