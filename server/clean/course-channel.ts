import { FLAG } from '../../shared/model/run.ts';
import { counted, type FindingLog } from '../ingest/finding-log.ts';
import { sampledQuantile } from './quantiles.ts';
import type { MovingColumns } from './standing.ts';

const TAU = 2 * Math.PI;
const RAD_PER_DEG = Math.PI / 180;

/** Below this speed a course says nothing (its error is the Doppler error over the speed), m/s. */
const LEAST_COURSE_SPEED_MPS = 1.2;
/** Way between the fixes whose chord gives a direction, m. */
const LEAST_CHORD_M = 12;
const LEAST_CHORDS = 8;
/** A course channel this far from the chords in the median is not the course, rad. */
const MOST_MEDIAN_ERROR = 20 * RAD_PER_DEG;
/** An offset common to all courses is corrected between these, rad: magnetic north is the usual cause. */
const LEAST_OFFSET = 2 * RAD_PER_DEG;

/** Angle in (-pi, pi]. */
function wrap(angle: number): number {
  const turned = angle - TAU * Math.round(angle / TAU);
  return turned <= -Math.PI ? turned + TAU : turned;
}

interface Convention {
  readonly name: string;
  readonly toCourse: (value: number) => number;
}

const CONVENTIONS: readonly Convention[] = [
  { name: 'clockwise from north', toCourse: (value) => value },
  { name: 'counter-clockwise from north', toCourse: (value) => -value },
  { name: 'counter-clockwise from east', toCourse: (value) => Math.PI / 2 - value },
  { name: 'clockwise from east', toCourse: (value) => Math.PI / 2 + value },
  { name: 'clockwise from south', toCourse: (value) => value + Math.PI },
  { name: 'radians, not degrees', toCourse: (value) => (value * 180) / Math.PI },
];

export interface CourseColumns extends MovingColumns {
  readonly northRad: Float64Array;
  readonly courseRad: Float32Array | null;
}

/** Direction of the chord from the fix before to the fix after `i`, clockwise from north; NaN when too short or torn. */
function chordCourse({ count, timeS, xM, yM, northRad }: CourseColumns, i: number): number {
  let a = i;
  let b = i;
  while (a > 0 && (a === i || Math.hypot(xM[i]! - xM[a]!, yM[i]! - yM[a]!) < LEAST_CHORD_M / 2)) {
    if (timeS[i]! - timeS[a - 1]! > 5) return NaN;
    a--;
  }
  while (b < count - 1 && (b === i || Math.hypot(xM[b]! - xM[i]!, yM[b]! - yM[i]!) < LEAST_CHORD_M / 2)) {
    if (timeS[b + 1]! - timeS[i]! > 5) return NaN;
    b++;
  }
  const dx = xM[b]! - xM[a]!;
  const dy = yM[b]! - yM[a]!;
  if (dx * dx + dy * dy < LEAST_CHORD_M * LEAST_CHORD_M) return NaN;
  return northRad[i]! - Math.atan2(dy, dx);
}

/**
 * Checks the course channel against the directions of the positions. Another convention (from east, counter-clockwise,
 * reversed) or a constant offset (magnetic north) is corrected and noted; a channel that follows none is dropped.
 * @returns The column to use: the given one, a corrected copy, or null.
 */
export function checkCourse(
  columns: CourseColumns,
  flags: Uint8Array,
  file: string,
  log: FindingLog,
): Float32Array | null {
  const { courseRad, count } = columns;
  if (courseRad === null) return null;
  const stride = Math.max(1, Math.floor(count / 4000));
  const stated: number[] = [];
  const chords: number[] = [];
  for (let i = 1; i < count - 1; i += stride) {
    if (!Number.isFinite(courseRad[i]!) || (flags[i]! & (FLAG.HELD | FLAG.STOPPED)) !== 0) continue;
    const chord = chordCourse(columns, i);
    if (Number.isNaN(chord)) continue;
    stated.push(courseRad[i]!);
    chords.push(chord);
  }
  if (stated.length < LEAST_CHORDS) return courseRad;
  const errors = CONVENTIONS.map(({ toCourse }) => {
    const at = (i: number) => Math.abs(wrap(toCourse(stated[i]!) - chords[i]!));
    return sampledQuantile(stated.length, 0.5, at);
  });
  const best = errors.indexOf(Math.min(...errors));
  // Another convention must explain the log far better, not by the luck of a straight line.
  const chosen = errors[0]! < MOST_MEDIAN_ERROR || errors[best]! > 0.3 * errors[0]! ? 0 : best;
  if (errors[chosen]! > MOST_MEDIAN_ERROR) {
    log.note(
      'course-dropped',
      'warning',
      () =>
        `The course channel does not agree with the positions (median difference ${(errors[0]! / RAD_PER_DEG).toFixed(0)}°): not used`,
      { file },
      0,
      count,
    );
    return null;
  }
  const { toCourse, name } = CONVENTIONS[chosen]!;
  const difference = (share: number) =>
    sampledQuantile(stated.length, share, (i) => wrap(toCourse(stated[i]!) - chords[i]!));
  const offset = difference(0.5);
  const spread = (difference(0.75) - difference(0.25)) / 1.35;
  const correct =
    Math.abs(offset) > LEAST_OFFSET &&
    stated.length > 50 &&
    Math.abs(offset) > (4 * spread) / Math.sqrt(stated.length) &&
    Math.abs(offset) > spread;
  if (chosen === 0 && !correct) return courseRad;
  if (chosen !== 0) {
    log.note(
      'course-convention',
      'warning',
      () => `The course channel counts angles otherwise than usual (${name}): converted`,
      { file },
      0,
      count,
    );
  }
  if (correct) {
    log.note(
      'course-offset',
      'warning',
      () =>
        `The course channel is turned by ${(offset / RAD_PER_DEG).toFixed(1)}° against the positions (magnetic north?): corrected`,
      { file },
      0,
      count,
    );
  }
  const turn = correct ? offset : 0;
  return courseRad.map((value) => {
    const course = toCourse(value) - turn;
    return course - TAU * Math.floor(course / TAU);
  });
}

/** Moving fixes in a row with one and the same fine course that make it stale. */
const STALE_FIXES = 4;
/** A step of course below this is fine: no vehicle keeps it to the last digit, rad. */
const FINE_STEP = 0.2 * RAD_PER_DEG;

/**
 * Takes out courses that mean nothing (NaN in a copy): slow or standing, held position, and repeated by the receiver
 * while the vehicle goes on. A repeated fine course is stale by itself; a repeated coarse one only when the positions
 * turned away from it.
 * @param step Last-digit step of the course, rad; 0 when finer than matters.
 */
export function withoutStaleCourse(
  columns: CourseColumns & { readonly courseRad: Float32Array },
  flags: Uint8Array,
  step: number,
  log: FindingLog,
): Float32Array {
  const { count, courseRad, speedMps, timeS, xM, yM } = columns;
  const out = courseRad.slice();
  let slow = 0;
  for (let i = 0; i < count; i++) {
    if (Number.isNaN(out[i]!)) continue;
    let speed = speedMps === null ? NaN : speedMps[i]!;
    if (Number.isNaN(speed)) {
      const [a, b] = [Math.max(0, i - 1), Math.min(count - 1, i + 1)];
      const dt = timeS[b]! - timeS[a]!;
      speed = dt > 0 ? Math.hypot(xM[b]! - xM[a]!, yM[b]! - yM[a]!) / dt : 0;
    }
    if (speed < LEAST_COURSE_SPEED_MPS || (flags[i]! & (FLAG.STOPPED | FLAG.HELD)) !== 0) {
      out[i] = NaN;
      slow++;
    }
  }
  if (slow > 0) {
    log.note(
      'course-slow',
      'info',
      (many) =>
        `At ${counted(many, 'fix', 'fixes')} the vehicle is too slow for its course to mean anything: course not used there`,
      null,
      0,
      slow,
    );
  }
  let stale = 0;
  for (let i = 0; i < count; ) {
    let end = i + 1;
    while (end < count && courseRad[end] === courseRad[i]) end++;
    if (end - i >= STALE_FIXES && !Number.isNaN(courseRad[i]!)) {
      for (let j = i + 1; j < end; j++) {
        if (Number.isNaN(out[j]!)) continue;
        const chord = chordCourse(columns, j);
        const away = Math.abs(wrap(courseRad[j]! - chord));
        if (step < FINE_STEP || away > 2 * step + 6 * RAD_PER_DEG) {
          out[j] = NaN;
          stale++;
        }
      }
    }
    i = end;
  }
  if (stale > 0) {
    log.note(
      'course-stale',
      'warning',
      (many) =>
        `At ${counted(many, 'fix', 'fixes')} the receiver repeats an old course while moving: course not used there`,
      null,
      0,
      stale,
    );
  }
  return out;
}
