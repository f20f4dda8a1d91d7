import { z } from 'zod';
import { Mode } from './common.ts';
import { Source } from './limit-set.ts';

/** A vehicle as far as curving and comfort need it. Null = unknown: what needs it is then `not assessed`. */
export const Vehicle = z.object({
  formatVersion: z.literal(1),
  id: z.string(),
  name: z.string(),
  mode: Mode,
  /** Track gauge, mm (rail). */
  gaugeMm: z.number().positive().nullable(),
  /** Distance between the wheel contact circles, mm (rail). */
  cantBaseMm: z.number().positive().nullable(),
  massKg: z.number().positive().nullable(),
  centreOfGravityHeightM: z.number().positive().nullable(),
  /** Road track width, m. */
  trackWidthM: z.number().positive().nullable(),
  wheelbaseM: z.number().positive().nullable(),
  /** Body roll relative to the track plane over cant-deficiency angle, 1. */
  rollCoefficient: z.number().min(0).nullable(),
  rollFrequencyHz: z.number().positive().nullable(),
  dampingRatio: z.number().min(0).nullable(),
  /** Share of track-plane lateral acceleration taken away by tilting, 0..1. */
  tiltCompensation: z.number().min(0).max(1),
  passengers: z.enum(['seated', 'standing']),
  accelerationMps2: z.number().positive(),
  brakingMps2: z.number().positive(),
  source: Source,
});
export type Vehicle = z.infer<typeof Vehicle>;
