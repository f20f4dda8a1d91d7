import type { Estimate, Hand } from './alignment.ts';

/** How one run lies on the reference run of its line. */
export interface LineMember {
  readonly runId: string;
  /** 1: same direction as the reference; -1: opposite. */
  readonly direction: 1 | -1;
  /** Share of the run that lies on the line, 0..1. */
  readonly overlap: number;
  /** Ascending chainage of the run and the chainage of the reference there; between them linear. */
  readonly chainageM: readonly number[];
  readonly lineChainageM: readonly number[];
}

/** One circular curve of a line as seen by several runs. */
export interface LineCurve {
  /** 1, 2, ... along the reference run. */
  readonly number: number;
  /** In the direction of the reference run. */
  readonly hand: Hand;
  readonly startM: number;
  readonly endM: number;
  /** Which curve of which run it is. */
  readonly seen: readonly { readonly runId: string; readonly curve: number }[];
  /** Curvature combined over the runs, signed for the direction of the reference, 1/m. */
  readonly curvaturePerM: Estimate;
  readonly radiusM: Estimate;
  /** Disagreement of the runs: sum of squared normalised differences per degree of freedom; NaN with one run. */
  readonly consistency: number;
}

/** Runs over one and the same alignment. */
export interface Line {
  readonly id: string;
  readonly referenceRunId: string;
  readonly members: readonly LineMember[];
  readonly curves: readonly LineCurve[];
}
