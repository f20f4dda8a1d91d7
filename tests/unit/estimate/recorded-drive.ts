import { readFileSync } from 'node:fs';
import type { Run } from '../../../shared/model/run.ts';
import { FLAG } from '../../../shared/model/run.ts';
import { RECORDINGS } from '../../support/shared.ts';

/** A recorded drive with the lateral acceleration that the car's own sensors measured at each fix. */
export interface RecordedDrive {
  readonly run: Run;
  /** Accelerometer, m/s^2, positive to the left. */
  readonly accelerometerMps2: Float64Array;
  /** Gyroscope's yaw rate times the receiver's speed, m/s^2, positive to the left. */
  readonly gyroscopeMps2: Float64Array;
}

interface Fix {
  readonly timeS: number;
  readonly latDeg: number;
  readonly lonDeg: number;
  readonly speedMps: number;
  readonly courseRad: number;
  readonly accelerometerMps2: number;
  readonly yawRateRadPerS: number;
}

const GRAVITY = 9.80665;
const RAD = Math.PI / 180;

function rows(file: string): { readonly column: (name: string) => Float64Array; readonly count: number } {
  const lines = readFileSync(`${RECORDINGS}road/${file}`, 'utf8').trim().split(/\r?\n/);
  const header = lines[0]!.split(',');
  const cells = lines.slice(1).map((line) => line.split(','));
  return {
    count: cells.length,
    column: (name) => {
      const k = header.indexOf(name);
      if (k < 0) throw new Error(`${file} has no column ${name}`);
      return Float64Array.from(cells, (row) => (row[k] === '' ? NaN : Number(row[k])));
    },
  };
}

/** The cars whose black box writes one row a second: accel_y in g, positive to the right; gyro_z in deg/s, positive to the left. */
export function readBlackBox(file: string): RecordedDrive {
  const table = rows(file);
  const [time, lat, lon, heading, mph] = ['time_utc', 'gps_lat', 'gps_long', 'gps_heading', 'speed_mph'].map(
    table.column,
  );
  const accelY = table.column('accel_y');
  const gyroZ = table.column('gyro_z');
  const fixes: Fix[] = [];
  for (let i = 0; i < table.count; i++) {
    const previous = fixes.at(-1);
    if (
      !Number.isFinite(lat![i]!) ||
      !Number.isFinite(lon![i]!) ||
      (previous !== undefined && time![i]! <= previous.timeS)
    )
      continue;
    fixes.push({
      timeS: time![i]!,
      latDeg: lat![i]!,
      lonDeg: lon![i]!,
      speedMps: mph![i]! * 0.44704,
      courseRad: heading![i]! * RAD,
      accelerometerMps2: -accelY[i]! * GRAVITY,
      yawRateRadPerS: gyroZ[i]! * RAD,
    });
  }
  // Coordinates come from single precision: their steps at these longitudes are 0.6 m and 0.4 m.
  return toDrive(file, fixes, { positionM: 0.5, speedMps: 0, courseRad: 0.01 * RAD, timeS: 1 });
}

/** The car logged at 50 Hz with a receiver of 10 Hz (ay positive to the right): rows of one position are one fix, its course arrives a row later. */
export function readFiftyHertz(file: string): RecordedDrive {
  const table = rows(file);
  const [millis, lat, lon, course, speed] = ['millis', 'latitude', 'longitude', 'course', 'speed'].map(table.column);
  const ay = table.column('ay');
  const yaw = table.column('yawrate');
  const fixes: Fix[] = [];
  let from = 0;
  for (let i = 1; i <= table.count; i++) {
    if (i < table.count && lat![i] === lat![from] && lon![i] === lon![from]) continue;
    let sumA = 0;
    let sumYaw = 0;
    for (let k = from; k < i; k++) {
      sumA += ay[k]!;
      sumYaw += yaw[k]!;
    }
    const last = i - 1;
    if (speed![last]! > 0) {
      fixes.push({
        timeS: millis![from]! / 1000,
        latDeg: lat![from]!,
        lonDeg: lon![from]!,
        speedMps: speed![last]! / 3.6,
        courseRad: course![last]! * RAD,
        accelerometerMps2: -sumA / (i - from),
        yawRateRadPerS: (sumYaw / (i - from)) * RAD,
      });
    }
    from = i;
  }
  return toDrive(file, fixes, { positionM: 0.1, speedMps: 0.01 / 3.6, courseRad: 0.01 * RAD, timeS: 0 });
}

function toDrive(name: string, fixes: readonly Fix[], resolution: Run['resolution']): RecordedDrive {
  const first = fixes[0]!;
  const latitude = first.latDeg * RAD;
  // Radii of curvature of the WGS84 ellipsoid along the meridian and across it.
  const e2 = 0.00669437999014;
  const root = 1 - e2 * Math.sin(latitude) ** 2;
  const northM = (6378137 * (1 - e2)) / root ** 1.5;
  const eastM = (6378137 / Math.sqrt(root)) * Math.cos(latitude);
  const count = fixes.length;
  const timeS = Float64Array.from(fixes, (fix) => fix.timeS - first.timeS);
  const steps = Array.from(timeS.slice(1), (t, i) => t - timeS[i]!).sort((a, b) => a - b);
  const intervalS = steps[Math.floor(steps.length / 2)]!;
  const flags = new Uint8Array(count);
  const courseRad = new Float32Array(count);
  fixes.forEach((fix, i) => {
    if (fix.speedMps < 0.3) flags[i]! |= FLAG.STOPPED;
    if (i > 0 && timeS[i]! - timeS[i - 1]! > Math.max(2.5, 3 * intervalS)) flags[i]! |= FLAG.GAP_BEFORE;
    courseRad[i] = fix.speedMps > 1.2 ? fix.courseRad : NaN;
  });
  const run: Run = {
    id: '1',
    recordingName: name,
    startUtcS: first.timeS,
    intervalS,
    resolution,
    fixes: {
      count,
      timeS,
      latDeg: Float64Array.from(fixes, (fix) => fix.latDeg),
      lonDeg: Float64Array.from(fixes, (fix) => fix.lonDeg),
      xM: Float64Array.from(fixes, (fix) => (fix.lonDeg - first.lonDeg) * RAD * eastM),
      yM: Float64Array.from(fixes, (fix) => (fix.latDeg - first.latDeg) * RAD * northM),
      northRad: new Float64Array(count).fill(Math.PI / 2),
      elevationM: null,
      speedMps: Float32Array.from(fixes, (fix) => fix.speedMps),
      courseRad,
      accuracyM: null,
      flags,
      row: Uint32Array.from(fixes, (_, i) => i + 2),
    },
    sensors: null,
    findings: [],
  };
  return {
    run,
    accelerometerMps2: Float64Array.from(fixes, (fix) => fix.accelerometerMps2),
    gyroscopeMps2: Float64Array.from(fixes, (fix) => fix.yawRateRadPerS * fix.speedMps),
  };
}
