import type { CriterionId, Limit } from '../schema/limit-set.ts';
import type { Interval } from './confidence.ts';

/** A criterion's figure on one curve, before it meets its limit. */
export interface Measured extends Interval {
  readonly criterion: CriterionId;
  /** True when cant is unknown and the figure holds for zero cant: an upper bound of what passengers felt. */
  readonly isBound: boolean;
  /** Speed where the figure occurs and its standard deviation, m/s. */
  readonly speedMps: number;
  readonly speedSdMps: number;
  /** Formula, and the same with numbers and units; made only when somebody reads them. */
  readonly formula: string;
  readonly substituted: () => string;
  /** A limit that comes with the place rather than with the set: the permitted speed of the line. */
  readonly placeLimit?: Limit;
  /**
   * Set when the recording cannot tell the length of the transition that the figure rests on: an interval that then
   * straddles the
   * limit is a missing input, not a close call.
   */
  readonly unresolved?: string;
  /** Sentences that belong to the figure. */
  readonly remarks: readonly string[];
  /**
   * Highest speed that just meets a limit, m/s; absent when no slower speed cures. `sure`: at the unfavourable end of
   * the geometry's
   * interval instead of its best estimate.
   */
  readonly speedFor?: (limit: number, sure: boolean) => number;
  /** Cant that just meets a limit at the recorded speed, mm (road: superelevation, percent). */
  readonly cantFor?: (limit: number) => number;
  /** Length of transition that just meets a limit at the recorded speed, m. */
  readonly transitionFor?: (limit: number) => number;
}

/** A criterion that cannot be assessed, with the input that is missing. */
export interface Unmeasured {
  readonly criterion: CriterionId;
  readonly missing: string;
}

export function isMeasured(result: Measured | Unmeasured): result is Measured {
  return 'value' in result;
}
