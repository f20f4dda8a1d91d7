/** A value with its standard error and its 95 % interval (not always symmetric). */
export interface Estimate {
  readonly value: number;
  readonly sd: number;
  readonly low: number;
  readonly high: number;
}

export type Hand = 'left' | 'right';
/** simple: straights on both sides; compound: joined to another curve of the same hand; reverse: to one of the other hand; abrupt: no transition on either side. */
export type CurveShape = 'simple' | 'compound' | 'reverse' | 'abrupt';

/**
 * One end of a circular curve. `transition`: curvature changes linearly over `lengthM`;
 * `abrupt`: shown to be shorter than the data can tell from nothing; `undetermined`: the data
 * cannot tell; then lengthM.high bounds it.
 */
export interface CurveEnd {
  readonly kind: 'transition' | 'abrupt' | 'undetermined';
  /** Length of the transition, m (0 when abrupt). For a direct reverse ramp: this curve's share. */
  readonly lengthM: Estimate;
  /** Chainage of the middle of the transition (or of the abrupt change), m. */
  readonly middleM: Estimate;
  /** Curvature on the other side of the transition: 0 on a straight, else the neighbour's, 1/m. */
  readonly fromCurvaturePerM: number;
  /** Number of the neighbouring curve joined here without a straight, or null. */
  readonly joins: number | null;
}

/** One circular curve with its two ends, by chainage of its run. */
export interface Curve {
  /** 1, 2, ... along the run. */
  readonly number: number;
  readonly hand: Hand;
  readonly shape: CurveShape;
  /** Start of the entry transition and end of the exit transition, m. */
  readonly startM: number;
  readonly endM: number;
  /** Circular part, m; arcStartM <= arcEndM. */
  readonly arcStartM: number;
  readonly arcEndM: number;
  readonly entry: CurveEnd;
  readonly exit: CurveEnd;
  /** Signed, positive left, 1/m. */
  readonly curvaturePerM: Estimate;
  /** Positive; high may be Infinity when the interval reaches straight. */
  readonly radiusM: Estimate;
  /** Deflection angle of curve and transitions, radians, positive. */
  readonly deflectionRad: Estimate;
  /** Lateral acceleration in the horizontal plane v^2 kappa on the arc at mean arc speed: relative sd from the joint errors of speed and curvature. */
  readonly lateralRelativeSd: number;
  /** Mean speed on the circular part and its sd, m/s. */
  readonly speedMps: Estimate;
  /** Share of the passage (by time) seen by good fixes, 0..1; below 0.7 the curve is `not observed` well. */
  readonly observedShare: number;
  /** Fit quality: chi-square per degree of freedom of the local fit; NaN when not applicable. */
  readonly chi2PerDof: number;
  /** Sentences for the user: what is not resolved and what would decide it. */
  readonly remarks: readonly string[];
}

/** Piece of the alignment: curvature is linear from start to end. */
export interface AlignmentElement {
  readonly kind: 'straight' | 'transition' | 'arc';
  readonly startM: number;
  readonly endM: number;
  readonly startCurvaturePerM: number;
  readonly endCurvaturePerM: number;
}

/** The run's line: elements cover [0, lengthM] without gaps, in order. */
export interface Alignment {
  readonly lengthM: number;
  readonly elements: readonly AlignmentElement[];
  readonly curves: readonly Curve[];
}
