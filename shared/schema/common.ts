import { z } from 'zod';

const Place = z.object({
  file: z.string().optional(),
  line: z.number().optional(),
  byte: z.number().optional(),
  column: z.string().optional(),
  utcS: z.number().optional(),
  chainageM: z.number().optional(),
});

export const Fault = z.object({ code: z.string(), cause: z.string(), place: Place, remedy: z.string() });

export const Finding = z.object({
  code: z.string(),
  stage: z.enum(['ingest', 'clean', 'estimate', 'alignment', 'fuse', 'assess']),
  severity: z.enum(['info', 'warning', 'serious']),
  message: z.string(),
  count: z.number(),
  dropped: z.number(),
  places: z.array(Place),
});

/** Rail: cant, cant deficiency. Road: superelevation, side friction. */
export const Mode = z.enum(['rail', 'road']);
export type Mode = z.infer<typeof Mode>;

export const Verdict = z.enum(['within', 'over', 'undecided', 'not assessed']);
export type Verdict = z.infer<typeof Verdict>;
