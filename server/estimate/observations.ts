import type { Run } from '../../shared/model/run.ts';
import { FLAG } from '../../shared/model/run.ts';

/** Bits of Observations.use. */
export const USE = {
  POSITION: 1,
  SPEED: 2,
  COURSE: 4,
  /** The vehicle stands: speed is observed to be zero. */
  STANDING: 8,
  /** The filter starts afresh here (first fix, or first fix of a stretch of a subset). */
  RESTART: 16,
} as const;

/** Below this speed a course says nothing (its error, Doppler error over speed, approaches a radian), m/s. */
export const LEAST_SPEED_FOR_COURSE_MPS = 1.2;
/** Below this speed a receiver's speed is the norm of noise, m/s. */
const LEAST_MEANINGFUL_SPEED_MPS = 0.3;
/** Below this speed a course may still be held or filtered by the receiver, with this error, m/s. */
const SLOW_COURSE_MPS = 2.5;
const SLOW_COURSE_SD_MPS = 0.3;
/** Variance factor of a fix that the receiver itself marks as weak. */
const WEAK_FACTOR = 9;
/** Stated accuracies worse than the log's median enlarge the variance up to this factor. */
const LARGEST_ACCURACY_FACTOR = 100;

/** What the filter observes at each fix; columns of length `count`, those of the run shared, not copied. */
export interface Observations {
  readonly count: number;
  readonly timeS: Float64Array;
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  readonly northRad: Float64Array;
  readonly speedMps: Float32Array | null;
  readonly courseRad: Float32Array | null;
  readonly use: Uint8Array;
  /** Factor (>= 1) on the variance of the position and of the Doppler velocity. */
  readonly positionFactor: Float32Array;
  readonly dopplerFactor: Float32Array;
  /** Factor on the strength of the curvature walk over the step that ends at the fix. */
  readonly walkFactor: Float32Array;
  /** The same of the acceleration's random change. */
  readonly jerkFactor: Float32Array;
  /** Rounding variances, q^2 / 12. */
  readonly positionRoundingM2: number;
  readonly speedRounding: number;
  readonly courseRoundingRad2: number;
}

/** Median of the finite positive values of a column, NaN when there is none; at most about 20,000 values are looked at. */
function medianPositive(values: Float32Array): number {
  const stride = Math.max(1, Math.floor(values.length / 20_000));
  const kept: number[] = [];
  for (let i = 0; i < values.length; i += stride) {
    const value = values[i]!;
    if (value > 0 && Number.isFinite(value)) kept.push(value);
  }
  kept.sort((a, b) => a - b);
  return kept.length === 0 ? NaN : kept[Math.floor(kept.length / 2)]!;
}

/** Variance factor of each position before any robust weighting: weak fixes and stated accuracies worse than the median. */
function writeStatedFactors(run: Run, out: Float32Array): void {
  const { flags, accuracyM, count } = run.fixes;
  const median = accuracyM === null ? NaN : medianPositive(accuracyM);
  for (let i = 0; i < count; i++) {
    let factor = (flags[i]! & FLAG.WEAK) === 0 ? 1 : WEAK_FACTOR;
    if (accuracyM !== null && median > 0) {
      const ratio = accuracyM[i]! / median;
      if (ratio > 1) factor = Math.min(LARGEST_ACCURACY_FACTOR, Math.max(factor, ratio * ratio));
    }
    out[i] = factor;
  }
}

/** Decides for each fix what is observed, from the flags and the channels of the run. */
function writeUse(run: Run, out: Uint8Array): void {
  const { flags, speedMps, courseRad, xM, yM, count } = run.fixes;
  for (let i = 0; i < count; i++) {
    const flag = flags[i]!;
    const held = (flag & FLAG.HELD) !== 0;
    const standing = (flag & FLAG.STOPPED) !== 0;
    let use = 0;
    if (!held && Number.isFinite(xM[i]!) && Number.isFinite(yM[i]!)) use |= USE.POSITION;
    if (standing) {
      use |= USE.STANDING;
    } else if (!held) {
      const speed = speedMps === null ? NaN : speedMps[i]!;
      const hasSpeed = Number.isFinite(speed);
      if (hasSpeed) use |= USE.SPEED;
      const fast = !hasSpeed || speed >= LEAST_SPEED_FOR_COURSE_MPS;
      if (fast && courseRad !== null && Number.isFinite(courseRad[i]!)) use |= USE.COURSE;
    }
    out[i] = use;
  }
  if (count > 0) out[0]! |= USE.RESTART;
}

/** Observations of a run; the factor columns are the caller's, so that they may double as output. */
export function observe(run: Run, positionFactor: Float32Array, dopplerFactor: Float32Array): Observations {
  const { fixes, resolution } = run;
  const use = new Uint8Array(fixes.count);
  writeUse(run, use);
  writeStatedFactors(run, positionFactor);
  dopplerFactor.fill(1);
  return {
    count: fixes.count,
    timeS: fixes.timeS,
    xM: fixes.xM,
    yM: fixes.yM,
    northRad: fixes.northRad,
    speedMps: fixes.speedMps,
    courseRad: fixes.courseRad,
    use,
    positionFactor,
    dopplerFactor,
    walkFactor: new Float32Array(fixes.count).fill(1),
    jerkFactor: new Float32Array(fixes.count).fill(1),
    positionRoundingM2: resolution.positionM ** 2 / 12,
    speedRounding: resolution.speedMps ** 2 / 12,
    courseRoundingRad2: resolution.courseRad ** 2 / 12,
  };
}

/** Copy of the fixes of `source` listed in `indices`; those in `restarts` begin a stretch of their own. */
export function subset(source: Observations, indices: readonly number[], restarts: ReadonlySet<number>): Observations {
  const pick64 = (column: Float64Array): Float64Array => Float64Array.from(indices, (i) => column[i]!);
  const pick32 = (column: Float32Array): Float32Array => Float32Array.from(indices, (i) => column[i]!);
  const use = Uint8Array.from(indices, (i) => (source.use[i]! & ~USE.RESTART) | (restarts.has(i) ? USE.RESTART : 0));
  return {
    ...source,
    count: indices.length,
    timeS: pick64(source.timeS),
    xM: pick64(source.xM),
    yM: pick64(source.yM),
    northRad: pick64(source.northRad),
    speedMps: source.speedMps === null ? null : pick32(source.speedMps),
    courseRad: source.courseRad === null ? null : pick32(source.courseRad),
    use,
    positionFactor: pick32(source.positionFactor),
    dopplerFactor: pick32(source.dopplerFactor),
    walkFactor: pick32(source.walkFactor),
    jerkFactor: pick32(source.jerkFactor),
  };
}

/** Extra variance of a speed reading so low that it is the norm of noise, (m/s)^2. */
export function lowSpeedVariance(speedMps: number): number {
  return speedMps < 2 * LEAST_MEANINGFUL_SPEED_MPS ? LEAST_MEANINGFUL_SPEED_MPS ** 2 / 2 : 0;
}

/**
 * Extra variance of a course taken at little speed, (m/s)^2: receivers hold or filter their course when a vehicle pulls away
 * (common practice, no source).
 */
export function slowCourseVariance(speedMps: number): number {
  return speedMps < SLOW_COURSE_MPS ? SLOW_COURSE_SD_MPS ** 2 : 0;
}
