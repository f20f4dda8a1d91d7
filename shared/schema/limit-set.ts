import { z } from 'zod';
import { Mode } from './common.ts';

/** Every criterion that a limit set may carry; units are fixed by the criterion. */
export const CriterionId = z.enum([
  'cant', // mm
  'cant_deficiency', // mm
  'cant_excess', // mm
  'cant_rate', // mm/s
  'deficiency_rate', // mm/s
  'abrupt_deficiency_change', // mm
  'cant_gradient', // mm/m (twist from cant runoff)
  'lateral_track', // m/s2
  'lateral_body', // m/s2
  'jerk', // m/s3
  'roll_rate', // deg/s
  'vertical', // m/s2
  'element_length', // m, a minimum
  'speed', // km/h
  'side_friction', // 1
  'ball_bank', // deg
  'entry_deceleration', // m/s2
  'pct_seated', // percent
  'pct_standing', // percent
]);
export type CriterionId = z.infer<typeof CriterionId>;

export const Source = z.object({
  /** Document, or `operator`. */
  document: z.string(),
  clause: z.string(),
  year: z.number().int().nullable(),
  /** How the value was obtained. */
  status: z.enum(['read', 'memory', 'operator', 'computed']),
  note: z.string().optional(),
});
export type Source = z.infer<typeof Source>;

/** One band of validity; absent bounds are open. The first band that matches applies. */
export const LimitBand = z.object({
  minSpeedKmh: z.number().optional(),
  maxSpeedKmh: z.number().optional(),
  minRadiusM: z.number().optional(),
  maxRadiusM: z.number().optional(),
  normal: z.number().nullable(),
  exceptional: z.number().nullable(),
});
export type LimitBand = z.infer<typeof LimitBand>;

export const Limit = z.object({
  criterion: CriterionId,
  bands: z.array(LimitBand).min(1),
  source: Source,
});
export type Limit = z.infer<typeof Limit>;

export const LimitSet = z.object({
  formatVersion: z.literal(1),
  id: z.string(),
  name: z.string(),
  mode: Mode,
  /** Where the set applies, in words. */
  appliesTo: z.string(),
  /** Speeds advised are rounded down to this step, km/h. */
  speedStepKmh: z.number().positive(),
  limits: z.array(Limit),
  cautions: z.array(z.string()),
});
export type LimitSet = z.infer<typeof LimitSet>;
