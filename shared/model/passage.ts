import type { Curve } from './alignment.ts';

/**
 * A run's passage through one curve: what the assessment needs of the motion, small enough to
 * travel to the page so that trials recompute there. Columns of one length at steps of chainage
 * over [curve.startM, curve.endM], both ends included.
 */
export interface Passage {
  readonly curve: Curve;
  readonly chainageM: readonly number[];
  readonly speedMps: readonly number[];
  readonly speedSdMps: readonly number[];
  readonly accelerationMps2: readonly number[];
  readonly elevationM: readonly (number | null)[];
  readonly start: readonly [latDeg: number, lonDeg: number];
  readonly middle: readonly [latDeg: number, lonDeg: number];
  readonly end: readonly [latDeg: number, lonDeg: number];
}

/** All passages of one run in order, with the run's length and duration. */
export interface RunPassages {
  readonly run: string;
  readonly lengthM: number;
  readonly durationS: number;
  /** Median fix interval, s: bounds what jerk and short events can be seen. */
  readonly intervalS: number;
  readonly hasCourse: boolean;
  readonly passages: readonly Passage[];
}
