import type { Motion } from '../../shared/model/motion.ts';
import { FLAG, type Run } from '../../shared/model/run.ts';
import { advanceDoppler } from '../estimate/lag.ts';
import { wrapAngle } from '../estimate/motion-filter.ts';
import { observe, USE } from '../estimate/observations.ts';

/**
 * Normal points: neighbouring fixes of a dense log averaged as residuals against the smoothed
 * trajectory. Their errors have a known covariance (see noise.ts), so nothing is lost as long as a
 * bin is short against the correlation times and against the curves. Sparse logs keep their fixes.
 * Columns of one length `count`, in time order; chainage never decreases.
 */
export interface NormalPoints {
  readonly count: number;
  /** Span of fixes averaged in one point, s; 0 where every fix stands for itself. */
  readonly binS: number;
  readonly timeS: Float64Array;
  readonly chainageM: Float64Array;
  /** Observed position, m; NaN without one. */
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  /** Heading of the smoothed trajectory: turns the axes of the residuals along and across. */
  readonly referenceRad: Float64Array;
  /** Observed heading (course turned into the plane), near referenceRad; NaN without one. */
  readonly headingRad: Float64Array;
  readonly speedMps: Float64Array;
  /** Mean variance factor over the count of fixes averaged: multiplies the white variance of one fix. */
  readonly positionShare: Float32Array;
  readonly courseShare: Float32Array;
}

/** Dense logs are averaged over about this time, s. */
const BIN_S = 0.5;
/** Fixes of a standing vehicle are averaged over this: their errors wander together. */
const STANDING_BIN_S = 10;

export function normalPoints(run: Run, motion: Motion): NormalPoints {
  const { fixes, intervalS, resolution } = run;
  const n = fixes.count;
  const scratch = { position: new Float32Array(n), doppler: new Float32Array(n) };
  const observed = observe(run, scratch.position, scratch.doppler);
  const { lagS } = motion.quality.noise;
  const courseRad =
    lagS === 0
      ? observed.courseRad
      : advanceDoppler(observed, { courseS: lagS, courseSdS: 0, speedS: lagS, speedSdS: 0 }, null).courseRad;
  const perBin = intervalS < 0.7 * BIN_S ? Math.max(1, Math.round(BIN_S / intervalS)) : 1;
  const endOf = (i: number): number => {
    const standing = (fixes.flags[i]! & FLAG.STOPPED) !== 0;
    const span = (standing ? STANDING_BIN_S : perBin * intervalS) - 1e-3;
    let j = i + 1;
    while (
      j < n &&
      (standing || j - i < perBin) &&
      ((fixes.flags[j]! & FLAG.STOPPED) !== 0) === standing &&
      (fixes.flags[j]! & FLAG.GAP_BEFORE) === 0 &&
      fixes.timeS[j]! - fixes.timeS[i]! < span
    ) {
      j++;
    }
    return j;
  };
  let most = 0;
  for (let i = 0; i < n; i = endOf(i)) most++;
  const out = {
    timeS: new Float64Array(most),
    chainageM: new Float64Array(most),
    xM: new Float64Array(most),
    yM: new Float64Array(most),
    referenceRad: new Float64Array(most),
    headingRad: new Float64Array(most),
    speedMps: new Float64Array(most),
    positionShare: new Float32Array(most),
    courseShare: new Float32Array(most),
  };
  const rounding = resolution.courseRad > 0 ? resolution.courseRad ** 2 / 12 : 0;
  let count = 0;
  for (let i = 0; i < n; ) {
    const standing = (fixes.flags[i]! & FLAG.STOPPED) !== 0;
    const j = endOf(i);
    const middle = (i + j - 1) >> 1;
    let [positions, px, py, pFactor, courses, pc, cFactor] = [0, 0, 0, 0, 0, 0, 0];
    for (let k = i; k < j; k++) {
      if ((observed.use[k]! & USE.POSITION) !== 0) {
        positions++;
        px += observed.xM[k]! - motion.xM[k]!;
        py += observed.yM[k]! - motion.yM[k]!;
        pFactor += motion.positionVarianceFactor[k]!;
      }
      if (!standing && courseRad !== null && (observed.use[k]! & USE.COURSE) !== 0 && Number.isFinite(courseRad[k]!)) {
        courses++;
        pc += wrapAngle(observed.northRad[k]! - courseRad[k]! - motion.headingRad[k]!);
        const v = motion.speedMps[k]!;
        cFactor += motion.dopplerVarianceFactor[k]! + (rounding * v * v) / ROUNDING_UNIT;
      }
    }
    out.timeS[count] = motion.timeS[middle]!;
    out.chainageM[count] = motion.chainageM[middle]!;
    out.referenceRad[count] = motion.headingRad[middle]!;
    out.speedMps[count] = motion.speedMps[middle]!;
    out.xM[count] = positions > 0 ? motion.xM[middle]! + px / positions : NaN;
    out.yM[count] = positions > 0 ? motion.yM[middle]! + py / positions : NaN;
    out.headingRad[count] = courses > 0 ? motion.headingRad[middle]! + pc / courses : NaN;
    out.positionShare[count] = positions > 0 ? pFactor / (positions * positions) : 0;
    out.courseShare[count] = courses > 0 ? cFactor / (courses * courses) : 0;
    count++;
    i = j;
  }
  return { count, binS: perBin > 1 ? perBin * intervalS : 0, ...out };
}

/** Rounding of courses enters the share as a multiple of this white variance, (m/s)^2: of the order of a Doppler error. */
const ROUNDING_UNIT = 0.05 ** 2;

/** First point at or past a chainage. */
export function pointFrom(points: NormalPoints, chainageM: number): number {
  let low = 0;
  let high = points.count;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (points.chainageM[middle]! < chainageM) low = middle + 1;
    else high = middle;
  }
  return low;
}
