import type { Alignment } from '../../shared/model/alignment.ts';

/** What fusing needs of a run. Columns have one length, ascending in chainage. */
export interface RunTrace {
  readonly runId: string;
  readonly chainageM: ArrayLike<number>;
  readonly latDeg: ArrayLike<number>;
  readonly lonDeg: ArrayLike<number>;
  /** Clockwise from true north, radians. */
  readonly courseRad: ArrayLike<number>;
  readonly alignment: Alignment;
}
