import type { Observations } from './observations.ts';
import { LEAST_SPEED_FOR_COURSE_MPS, USE } from './observations.ts';
import { wrapAngle } from './motion-filter.ts';

/** Half length of the chords whose direction and length are compared with course and speed, s. */
const HALF_CHORD_S = 1;
/** Slower than this a chord between noisy positions says little, m/s. */
const LEAST_SPEED_MPS = 2.5;
/** Turn over half a chord beyond which a chord is no tangent, rad. */
const GREATEST_TURN_RAD = 0.6;
/** Samples looked at, at most, whatever the length of the log. */
const MOST_SAMPLES = 20_000;
/** Neighbouring chords overlap and share their errors: variance of the slope times this and the half chord in fixes. */
const OVERLAP = 3;
/** Longer lags are not believed, s. */
const LONGEST_LAG_S = 1.5;

/** Seconds by which a channel's readings lag behind the positions; sd infinite where nothing can be said. */
interface Lag {
  readonly lagS: number;
  readonly sdS: number;
}

/** Smaller lags are left alone, s. */
const LEAST_LAG_S = 0.05;
/** Lag of ordinary receivers about none, and of their speed about that of their course, s (common practice, no source). */
const USUAL_LAG_SD_S = 0.4;
const SAME_LAG_SD_S = 0.05;

/** Lags that are corrected, 0 where none is, and the sd of what remains, s. */
export interface LagCorrection {
  readonly courseS: number;
  readonly courseSdS: number;
  readonly speedS: number;
  readonly speedSdS: number;
}

export interface DopplerLags {
  readonly course: Lag;
  readonly speed: Lag;
}

/** Slope of y against x by least squares through the mean, three times with what lies beyond 3 robust sd left out. */
function robustSlope(
  x: readonly number[],
  y: readonly number[],
  overlap: number,
): { readonly slope: number; readonly sd: number } {
  let slope = 0;
  let intercept = 0;
  let limit = Infinity;
  let sd = Infinity;
  for (let round = 0; round < 3; round++) {
    let n = 0;
    let sx = 0;
    let sy = 0;
    let sxx = 0;
    let sxy = 0;
    for (let k = 0; k < x.length; k++) {
      if (Math.abs(y[k]! - intercept - slope * x[k]!) > limit) continue;
      n++;
      sx += x[k]!;
      sy += y[k]!;
      sxx += x[k]! * x[k]!;
      sxy += x[k]! * y[k]!;
    }
    const spread = sxx - (sx * sx) / n;
    if (n < 20 || !(spread > 0)) return { slope: 0, sd: Infinity };
    slope = (sxy - (sx * sy) / n) / spread;
    intercept = (sy - slope * sx) / n;
    const sizes = y.map((value, k) => Math.abs(value - intercept - slope * x[k]!)).sort((a, b) => a - b);
    // The median of |r| is 0.6745 sd for normal errors.
    const scale = sizes[Math.floor(sizes.length / 2)]! / 0.6745;
    limit = 3 * scale;
    sd = scale * Math.sqrt(overlap / spread);
  }
  return { slope, sd };
}

/**
 * Lag of course and speed behind the positions, from the chord between the positions about a second before and after each fix:
 * its direction is the heading at the fix, its length over its time the speed. Course less heading is -lag times the rate of
 * turn, speed less chord speed -lag times the acceleration.
 */
export function estimateLags(observations: Observations, intervalS: number): DopplerLags {
  const { timeS, xM, yM, northRad, speedMps, courseRad, use, count } = observations;
  const k = Math.max(1, Math.round(HALF_CHORD_S / intervalS));
  const stride = Math.max(1, Math.floor(count / MOST_SAMPLES));
  const turn: number[] = [];
  const courseLess: number[] = [];
  const acceleration: number[] = [];
  const speedLess: number[] = [];
  for (let i = k; i + k < count; i += stride) {
    const before = i - k;
    const after = i + k;
    const time = timeS[after]! - timeS[before]!;
    if (time > 3 * k * intervalS || (use[before]! & use[after]! & USE.POSITION) === 0) continue;
    const dx = xM[after]! - xM[before]!;
    const dy = yM[after]! - yM[before]!;
    const chordSpeed = Math.hypot(dx, dy) / time;
    if (chordSpeed < LEAST_SPEED_MPS) continue;
    const all = use[before]! & use[i]! & use[after]!;
    let turned = 0;
    if (courseRad !== null && (all & USE.COURSE) !== 0) {
      turned = wrapAngle(northRad[after]! - courseRad[after]! - northRad[before]! + courseRad[before]!);
      if (Math.abs(turned) > 2 * GREATEST_TURN_RAD) continue;
      turn.push(turned / time);
      courseLess.push(wrapAngle(northRad[i]! - courseRad[i]! - Math.atan2(dy, dx)));
    }
    if (speedMps !== null && (all & USE.SPEED) !== 0) {
      // A chord is shorter than its arc by the square of the turn over 24.
      acceleration.push((speedMps[after]! - speedMps[before]!) / time);
      speedLess.push(speedMps[i]! - chordSpeed * (1 + (turned * turned) / 24));
    }
  }
  const overlap = Math.max(1, (OVERLAP * k) / stride);
  return { course: toLag(turn, courseLess, overlap), speed: toLag(acceleration, speedLess, overlap) };
}

function toLag(rate: readonly number[], less: readonly number[], overlap: number): Lag {
  const { slope, sd } = robustSlope(rate, less, overlap);
  return Math.abs(slope) > LONGEST_LAG_S ? { lagS: 0, sdS: Infinity } : { lagS: -slope, sdS: sd };
}

/**
 * The lags to correct and how uncertain they stay, s. Each estimate is weighed against what is known of receivers (a lag of a few
 * tenths at most; course and speed come from one velocity), and corrected where it can be told from none: correcting a lag that
 * is none would only blur the readings.
 */
export function lagsToCorrect({ course, speed }: DopplerLags): LagCorrection {
  const c = weigh(course, 0, USUAL_LAG_SD_S);
  const s =
    course.sdS < Infinity ? weigh(speed, c.lagS, Math.hypot(c.sdS, SAME_LAG_SD_S)) : weigh(speed, 0, USUAL_LAG_SD_S);
  const [courseS, courseSdS] = correction(c);
  const [speedS, speedSdS] = correction(s);
  return { courseS, courseSdS, speedS, speedSdS };
}

/** Estimate combined with a normal expectation. */
function weigh(found: Lag, expectedS: number, sdS: number): Lag {
  const trust = sdS ** 2 / (sdS ** 2 + found.sdS ** 2);
  return { lagS: expectedS + trust * (found.lagS - expectedS), sdS: sdS * Math.sqrt(1 - trust) };
}

function correction({ lagS, sdS }: Lag): readonly [number, number] {
  return Math.abs(lagS) > Math.max(LEAST_LAG_S, 2 * sdS) ? [lagS, sdS] : [0, Math.hypot(lagS, sdS)];
}

/** Beyond this many seconds between neighbours nothing is interpolated. */
const LONGEST_STEP_S = 3;

/**
 * Course and speed at the fixes when their readings lag by lagS behind the positions: the reading at t + lag, interpolated
 * by a cubic through the four readings around it (Catmull and Rom, 1974; linear at the ends of a stretch). NaN where there is none.
 *
 * @param indices fixes wanted, all when null
 */
export function advanceDoppler(
  observations: Observations,
  lags: LagCorrection,
  indices: readonly number[] | null,
): { readonly speedMps: Float32Array | null; readonly courseRad: Float32Array | null } {
  const { speedMps, courseRad } = observations;
  return {
    speedMps: speedMps === null ? null : advance(observations, speedMps, USE.SPEED, lags.speedS, indices),
    courseRad: courseRad === null ? null : advance(observations, courseRad, USE.COURSE, lags.courseS, indices),
  };
}

function advance(
  observations: Observations,
  readings: Float32Array,
  bit: number,
  lagS: number,
  indices: readonly number[] | null,
): Float32Array {
  if (lagS === 0) return indices === null ? readings : Float32Array.from(indices, (i) => readings[i]!);
  const { timeS, count, use } = observations;
  const angular = bit === USE.COURSE;
  const out = new Float32Array(indices?.length ?? count).fill(NaN);
  for (let n = 0; n < out.length; n++) {
    const i = indices === null ? n : indices[n]!;
    const t = timeS[i]! + lagS;
    let j = i;
    while (j + 1 < count && timeS[j + 1]! <= t) j++;
    while (j > 0 && timeS[j]! > t) j--;
    if (j + 1 >= count || timeS[j]! > t || timeS[j + 1]! - timeS[j]! > LONGEST_STEP_S) continue;
    if ((use[j]! & use[j + 1]! & (bit | USE.STANDING)) === 0) continue;
    const step = timeS[j + 1]! - timeS[j]!;
    const u = (t - timeS[j]!) / step;
    const from = readings[j]!;
    // A neighbour beyond a gap is no neighbour: the spline takes its readings for equally spaced.
    const near = (k: number, beside: number): number => {
      if (k < 0 || k >= count || (use[k]! & bit) === 0 || Math.abs(timeS[k]! - timeS[beside]!) > 1.5 * step) return NaN;
      return angular ? from + wrapAngle(readings[k]! - from) : readings[k]!;
    };
    out[n] = cubic(near(j - 1, j), from, angular ? near(j + 1, j) : readings[j + 1]!, near(j + 2, j + 1), u);
  }
  return out;
}

/** Catmull-Rom spline between `from` and `to`; a neighbour that is NaN is continued in a straight line. */
function cubic(before: number, from: number, to: number, after: number, u: number): number {
  const p = Number.isFinite(before) ? before : 2 * from - to;
  const q = Number.isFinite(after) ? after : 2 * to - from;
  return from + 0.5 * u * (to - p + u * (2 * p - 5 * from + 4 * to - q + u * (3 * (from - to) + q - p)));
}

/** Moves the variance factors of Doppler readings along with them: a reading made of two is as doubtful as the worse. */
export function advanceDopplerFactor(observations: Observations, lags: LagCorrection): void {
  const { timeS, count, dopplerFactor } = observations;
  const lagS = lags.courseS !== 0 ? lags.courseS : lags.speedS;
  const read = dopplerFactor.slice();
  for (let i = 0; i < count; i++) {
    const t = timeS[i]! + lagS;
    let j = i;
    while (j + 1 < count && timeS[j + 1]! <= t) j++;
    while (j > 0 && timeS[j]! > t) j--;
    dopplerFactor[i] = Math.max(read[j]!, read[Math.min(j + 1, count - 1)]!);
  }
}

/** Takes away from `use` the readings that the advance left without a value. */
export function dropMissing(observations: Observations): void {
  const { use, speedMps, courseRad, count } = observations;
  for (let i = 0; i < count; i++) {
    if ((use[i]! & USE.SPEED) !== 0 && !Number.isFinite(speedMps![i]!)) use[i]! &= ~USE.SPEED;
    if ((use[i]! & USE.COURSE) !== 0) {
      const slow = (use[i]! & USE.SPEED) !== 0 && speedMps![i]! < LEAST_SPEED_FOR_COURSE_MPS;
      if (slow || !Number.isFinite(courseRad![i]!)) use[i]! &= ~USE.COURSE;
    }
  }
}
