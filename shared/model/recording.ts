import type { Finding } from './finding.ts';

/**
 * The fixes of one recording as columns of one length `count`, in file order.
 * NaN means that the file gave no value; a channel that the file never gives is null.
 */
export interface FixColumns {
  readonly count: number;
  /** Unix seconds, UTC. */
  readonly utcS: Float64Array;
  /** WGS84 degrees, north positive. */
  readonly latDeg: Float64Array;
  /** WGS84 degrees, east positive, in [-180, 180]. */
  readonly lonDeg: Float64Array;
  /** Metres, as the file gives them. */
  readonly elevationM: Float32Array | null;
  /** Ground speed (Doppler when the receiver gives it), m/s. */
  readonly speedMps: Float32Array | null;
  /** Course over ground, radians clockwise from true north, in [0, 2 pi). */
  readonly courseRad: Float32Array | null;
  /** Horizontal accuracy as stated by the receiver, m. */
  readonly accuracyM: Float32Array | null;
  readonly hdop: Float32Array | null;
  /** 255 not stated. */
  readonly satellites: Uint8Array | null;
  /** 0 no fix, 1 autonomous, 2 differential, 3 dead reckoning or propagated, 4 RTK fixed, 5 RTK float; 255 not stated. */
  readonly fixQuality: Uint8Array | null;
  /** Stated speed accuracy, m/s. */
  readonly speedAccuracyMps: Float32Array | null;
  /** Stated course accuracy, radians. */
  readonly courseAccuracyRad: Float32Array | null;
  /** Track segment of the file, numbered from 0. */
  readonly segment: Uint32Array;
  /** 1-based line (text) or record number (binary) in the source, for error places. */
  readonly row: Uint32Array;
}

/** Inertial channels with their own time base; axes as in the file until the user says how the sensor sat. */
export interface SensorColumns {
  readonly count: number;
  readonly utcS: Float64Array;
  /** m/s^2, sensor axes. */
  readonly accelX: Float32Array | null;
  readonly accelY: Float32Array | null;
  readonly accelZ: Float32Array | null;
  /** rad/s about the sensor axes. */
  readonly gyroX: Float32Array | null;
  readonly gyroY: Float32Array | null;
  readonly gyroZ: Float32Array | null;
}

/** Station or kilometre marks and planned routes found beside the track. */
export interface Waypoint {
  readonly name: string;
  readonly latDeg: number;
  readonly lonDeg: number;
}

export type RecordingFormat = 'gpx' | 'nmea' | 'csv' | 'fit' | 'tcx' | 'kml' | 'geojson' | 'igc';

/** What one column of a delimited file was taken for, shown back to the user. */
export interface ColumnUse {
  readonly header: string;
  /** Field of FixColumns or SensorColumns it feeds, or `ignored`. */
  readonly field: string;
  /** Unit assumed, for example `km/h`; empty when none applies. */
  readonly unit: string;
  readonly guessed: boolean;
}

export interface Recording {
  /** File name, or archive/member. */
  readonly name: string;
  readonly format: RecordingFormat;
  readonly bytes: number;
  /** Text encoding found, empty for binary formats. */
  readonly encoding: string;
  readonly title: string;
  readonly fixes: FixColumns;
  readonly sensors: SensorColumns | null;
  readonly waypoints: readonly Waypoint[];
  readonly columns: readonly ColumnUse[];
  readonly findings: readonly Finding[];
}
