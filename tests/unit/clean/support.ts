import type { FixColumns, Recording } from '../../../shared/model/recording.ts';

/** A fix as tests write it; what is left out is not stated by the log. */
export interface TestFix {
  utcS: number;
  lat: number;
  lon: number;
  speed?: number;
  courseDeg?: number;
  segment?: number;
  satellites?: number;
}

/** Metres of a degree of latitude at 47°, near enough for synthetic runs. */
const M_PER_DEG_LAT = 111_177;
const M_PER_DEG_LON = 76_056;

/** 2 January 2024, 00:00 UTC. */
export const START_S = 1_704_153_600;

/** A fix `east` and `north` metres from 47° N, 8.5° E. */
export function fixAt(timeS: number, east: number, north: number, more: Partial<TestFix> = {}): TestFix {
  return { utcS: START_S + timeS, lat: 47 + north / M_PER_DEG_LAT, lon: 8.5 + east / M_PER_DEG_LON, ...more };
}

/** `count` fixes at 1 Hz eastwards at `speed` m/s from `timeS`, `east`. */
export function eastward(count: number, speed = 15, timeS = 0, east = 0, north = 0): TestFix[] {
  return Array.from({ length: count }, (_, i) => fixAt(timeS + i, east + i * speed, north));
}

export function recordingWith(list: readonly TestFix[]): Recording {
  const float = (pick: (fix: TestFix) => number | undefined) =>
    list.some((fix) => pick(fix) !== undefined) ? Float32Array.from(list, (fix) => pick(fix) ?? NaN) : null;
  const fixes: FixColumns = {
    count: list.length,
    utcS: Float64Array.from(list, ({ utcS }) => utcS),
    latDeg: Float64Array.from(list, ({ lat }) => lat),
    lonDeg: Float64Array.from(list, ({ lon }) => lon),
    elevationM: null,
    speedMps: float(({ speed }) => speed),
    courseRad: float(({ courseDeg }) => (courseDeg === undefined ? undefined : (courseDeg * Math.PI) / 180)),
    accuracyM: null,
    hdop: null,
    satellites: list.some(({ satellites }) => satellites !== undefined)
      ? Uint8Array.from(list, ({ satellites }) => satellites ?? 255)
      : null,
    fixQuality: null,
    speedAccuracyMps: null,
    courseAccuracyRad: null,
    segment: Uint32Array.from(list, ({ segment }) => segment ?? 0),
    row: Uint32Array.from(list, (_, i) => i + 1),
  };
  return {
    name: 'test',
    format: 'csv',
    bytes: 0,
    encoding: 'UTF-8',
    title: '',
    fixes,
    sensors: null,
    waypoints: [],
    columns: [],
    findings: [],
  };
}
