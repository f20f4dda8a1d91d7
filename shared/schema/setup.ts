import { z } from 'zod';
import { CantRegister } from './cant-register.ts';
import { Mode } from './common.ts';
import { LimitSet } from './limit-set.ts';
import { Vehicle } from './vehicle.ts';

/** What to assume where no register gives the cant. */
export const CantRule = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('unknown') }),
  z.object({ kind: z.literal('constant'), value: z.number() }),
  /** A share of equilibrium cant at the given speed, capped. */
  z.object({
    kind: z.literal('share'),
    share: z.number().min(0).max(1),
    speedKmh: z.number().positive(),
    capMm: z.number().positive(),
  }),
]);
export type CantRule = z.infer<typeof CantRule>;

/** Everything a verdict depends on besides the measured run. */
export const Setup = z.object({
  mode: Mode,
  limits: LimitSet,
  vehicle: Vehicle,
  register: CantRegister.nullable(),
  cantRule: CantRule,
  tier: z.enum(['normal', 'exceptional']),
  /** Two-sided confidence of intervals and advice, for example 0.95. */
  confidence: z.number().gt(0.5).lt(1),
  /** Cant tried on single curves instead of the register's or the rule's; rail mm, road percent. */
  cantTrials: z.array(z.object({ curve: z.number().int(), value: z.number() })).optional(),
  /** Permitted speed by run chainage, where the operator has one; the speed criterion then takes it for its limit. */
  permittedSpeeds: z
    .array(z.object({ fromM: z.number(), toM: z.number(), speedKmh: z.number().positive() }))
    .optional(),
  /** Spacings of regular irregularities to look for resonance at, m: rail or expansion joints, slab lengths. */
  irregularitiesM: z.array(z.number().positive()).optional(),
});
export type Setup = z.infer<typeof Setup>;

/** The same by reference, as stored and sent: ids of sets kept by the server. */
export const SetupRef = z.object({
  mode: Mode,
  limitSetId: z.string(),
  vehicleId: z.string(),
  registerId: z.string().nullable(),
  cantRule: CantRule,
  tier: z.enum(['normal', 'exceptional']),
  confidence: z.number().gt(0.5).lt(1),
  permittedSpeeds: Setup.shape.permittedSpeeds,
  irregularitiesM: Setup.shape.irregularitiesM,
});
export type SetupRef = z.infer<typeof SetupRef>;
