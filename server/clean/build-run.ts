import type { FixColumns, Recording, SensorColumns } from '../../shared/model/recording.ts';
import { FLAG, type Resolution, type Run, type RunFixes } from '../../shared/model/run.ts';
import { counted, FindingLog } from '../ingest/finding-log.ts';
import { checkCourse, withoutStaleCourse } from './course-channel.ts';
import { sampledQuantile } from './quantiles.ts';
import { stepOf } from './resolution.ts';
import { layOut } from './rolling-plane.ts';
import { checkSpeed } from './speed-channel.ts';
import { markHeld, markStanding } from './standing.ts';
import { placeOf, type Track } from './track.ts';
import { isWeak } from './weak.ts';

/** Sensor samples this long before and after the run stay with it, s. */
const SENSOR_MARGIN_S = 30;
/** Rounding of degrees in double precision, with a margin for sums in parsers; 0.1 mm on the ground. */
const POSITION_NOISE_DEG = 1e-9;
const METRES_PER_DEGREE = 111_195;

function pickFloat(column: Float32Array | null, rows: Uint32Array): Float32Array | null {
  if (column === null) return null;
  const out = new Float32Array(rows.length);
  let any = false;
  for (let i = 0; i < rows.length; i++) {
    out[i] = column[rows[i]!]!;
    if (!Number.isNaN(out[i]!)) any = true;
  }
  return any ? out : null;
}

/** Samples of the sensors in the time of the run. */
function sensorsOf(sensors: SensorColumns | null, fromS: number, toS: number): SensorColumns | null {
  if (sensors === null) return null;
  const { utcS } = sensors;
  let start = 0;
  let end = sensors.count;
  while (start < end && !(utcS[start]! >= fromS - SENSOR_MARGIN_S)) start++;
  while (end > start && !(utcS[end - 1]! <= toS + SENSOR_MARGIN_S)) end--;
  if (start === end) return null;
  if (start === 0 && end === sensors.count) return sensors;
  const cut = (column: Float32Array | null) => column?.slice(start, end) ?? null;
  return {
    count: end - start,
    utcS: utcS.slice(start, end),
    accelX: cut(sensors.accelX),
    accelY: cut(sensors.accelY),
    accelZ: cut(sensors.accelZ),
    gyroX: cut(sensors.gyroX),
    gyroY: cut(sensors.gyroY),
    gyroZ: cut(sensors.gyroZ),
  };
}

/** Steps of the channels; of latitude and longitude the mean square, in metres. */
function resolutionOf(
  latDeg: Float64Array,
  lonDeg: Float64Array,
  timeS: Float64Array,
  speedMps: Float32Array | null,
  courseRad: Float32Array | null,
): Resolution {
  const stepLat = stepOf(latDeg, POSITION_NOISE_DEG) * METRES_PER_DEGREE;
  const stepLon = stepOf(lonDeg, POSITION_NOISE_DEG) * METRES_PER_DEGREE * Math.cos(((latDeg[0] ?? 0) * Math.PI) / 180);
  const positionM = Math.sqrt((stepLat * stepLat + stepLon * stepLon) / 2);
  return {
    positionM: positionM < 0.005 ? 0 : positionM,
    speedMps: speedMps === null ? 0 : atLeast(stepOf(speedMps, 2e-5), 0.001),
    courseRad: courseRad === null ? 0 : atLeast(stepOf(courseRad, 2e-6), 1e-4),
    timeS: atLeast(stepOf(timeS, 1e-6, [1, 0.1]), 1e-4),
  };
}

const atLeast = (step: number, least: number) => (step < least ? 0 : step);

/** One trip into a Run: plane, channels checked, standing, held and weak fixes and gaps marked, resolutions found. */
export function buildRun(recording: Recording, track: Track, id: string): Run {
  const { fixes, name } = recording;
  const log = new FindingLog('clean');
  const { rows } = track;
  const count = rows.length;
  const startUtcS = track.utcS[0]!;
  const timeS = new Float64Array(count);
  const latDeg = new Float64Array(count);
  const lonDeg = new Float64Array(count);
  const row = new Uint32Array(count);
  for (let i = 0; i < count; i++) {
    timeS[i] = track.utcS[i]! - startUtcS;
    latDeg[i] = fixes.latDeg[rows[i]!]!;
    lonDeg[i] = fixes.lonDeg[rows[i]!]!;
    row[i] = fixes.row[rows[i]!]!;
  }
  const { xM, yM, northRad } = layOut(latDeg, lonDeg);
  const moving = { count, timeS, xM, yM, latDeg, lonDeg };
  const speedMps = checkSpeed({ ...moving, speedMps: pickFloat(fixes.speedMps, rows) }, name, log);
  const flags = new Uint8Array(count);
  const columns = { ...moving, speedMps, northRad };
  const held = markHeld(columns, flags);
  const standing = markStanding(columns, flags);
  const stated = checkCourse({ ...columns, courseRad: pickFloat(fixes.courseRad, rows) }, flags, name, log);
  const resolution = resolutionOf(latDeg, lonDeg, timeS, speedMps, stated);
  const courseRad =
    stated === null ? null : withoutStaleCourse({ ...columns, courseRad: stated }, flags, resolution.courseRad, log);

  const intervalS = sampledQuantile(count - 1, 0.5, (i) => timeS[i + 1]! - timeS[i]!);
  markGaps(track, timeS, intervalS, flags, fixes, name, log);
  markWeak(rows, fixes, flags, log);
  noteHeld(held, log);
  if (standing > 0) {
    const stops = countStops(flags, timeS);
    log.note(
      'standing',
      'info',
      () => `The vehicle stands at ${counted(stops.count, 'place')}, ${(stops.seconds / 60).toFixed(1)} minutes in all`,
      null,
      0,
      standing,
    );
  }
  const runFixes: RunFixes = {
    count,
    timeS,
    latDeg,
    lonDeg,
    xM,
    yM,
    northRad,
    elevationM: pickFloat(fixes.elevationM, rows),
    speedMps,
    courseRad,
    accuracyM: pickFloat(fixes.accuracyM, rows),
    flags,
    row,
  };
  return {
    id,
    recordingName: name,
    startUtcS,
    intervalS,
    resolution,
    fixes: runFixes,
    sensors: sensorsOf(recording.sensors, startUtcS, track.utcS[count - 1]!),
    findings: log.findings(),
  };
}

function markGaps(
  track: Track,
  timeS: Float64Array,
  intervalS: number,
  flags: Uint8Array,
  fixes: FixColumns,
  file: string,
  log: FindingLog,
): void {
  let longest = 0;
  for (let i = 1; i < timeS.length; i++) {
    const gap = timeS[i]! - timeS[i - 1]!;
    if (!(gap > 3 * intervalS && gap > 2.5)) continue;
    flags[i]! |= FLAG.GAP_BEFORE;
    longest = Math.max(longest, gap);
    log.note(
      'gap',
      'info',
      (many) => `${counted(many, 'gap')} without fixes, the longest ${longest.toFixed(0)} s: nothing is guessed there`,
      placeOf(fixes, file, track.rows[i]!, track.utcS[i]!),
    );
  }
}

function markWeak(rows: Uint32Array, fixes: FixColumns, flags: Uint8Array, log: FindingLog): void {
  let weak = 0;
  for (let i = 0; i < rows.length; i++) {
    if (!isWeak(fixes, rows[i]!)) continue;
    flags[i]! |= FLAG.WEAK;
    weak++;
  }
  if (weak > 0) {
    log.note(
      'weak',
      'info',
      (many) =>
        `${counted(many, 'fix', 'fixes')} with few satellites, poor accuracy or propagated by the receiver: trusted less`,
      null,
      0,
      weak,
    );
  }
}

function noteHeld(held: number, log: FindingLog): void {
  if (held === 0) return;
  log.note(
    'held',
    'warning',
    (many) =>
      `${counted(many, 'fix', 'fixes')} repeat the last position while the vehicle moves (receiver coasting): position not used there`,
    null,
    0,
    held,
  );
}

/** Number of separate stops and their total time. */
function countStops(flags: Uint8Array, timeS: Float64Array): { count: number; seconds: number } {
  let [count, seconds] = [0, 0];
  for (let i = 0; i < flags.length; i++) {
    if ((flags[i]! & FLAG.STOPPED) === 0) continue;
    if (i === 0 || (flags[i - 1]! & FLAG.STOPPED) === 0) count++;
    else seconds += timeS[i]! - timeS[i - 1]!;
  }
  return { count, seconds };
}
