import { z } from 'zod';

/** One row: by chainage range, or by latitude/longitude range ends, or by curve number. Cant in mm, or superelevation in percent for roads. */
export const CantEntry = z.object({
  line: z.number().int().optional(),
  fromM: z.number().optional(),
  toM: z.number().optional(),
  fromLatDeg: z.number().optional(),
  fromLonDeg: z.number().optional(),
  toLatDeg: z.number().optional(),
  toLonDeg: z.number().optional(),
  curve: z.number().int().optional(),
  cantMm: z.number().optional(),
  superelevationPct: z.number().optional(),
  note: z.string().optional(),
});
export type CantEntry = z.infer<typeof CantEntry>;

export const CantRegister = z.object({
  id: z.string(),
  name: z.string(),
  /** Chainage of the register = offsetM + stretch * run chainage (reversed runs use stretch < 0). */
  offsetM: z.number(),
  stretch: z.number(),
  entries: z.array(CantEntry),
});
export type CantRegister = z.infer<typeof CantRegister>;
