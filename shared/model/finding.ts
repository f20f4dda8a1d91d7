import type { Place } from './fault.ts';

export type Stage = 'ingest' | 'clean' | 'estimate' | 'alignment' | 'fuse' | 'assess';

/** `info`: worth knowing; `warning`: data were dropped or corrected; `serious`: results near it should not be relied on. */
export type Severity = 'info' | 'warning' | 'serious';

/**
 * Something noticed that did not prevent a result: points dropped, a clock corrected,
 * a register that contradicts the run. Every dropped row is counted in exactly one finding.
 */
export interface Finding {
  /** Stable identifier, `stage/what`. */
  readonly code: string;
  readonly stage: Stage;
  readonly severity: Severity;
  /** A sentence an engineer understands, numbers and units included. */
  readonly message: string;
  /** How many rows, fixes or curves it concerns. */
  readonly count: number;
  /** How many fixes were dropped because of it (0 when nothing was). */
  readonly dropped: number;
  /** The first few places (at most 20). */
  readonly places: readonly Place[];
}
