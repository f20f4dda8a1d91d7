import type { Finding } from './finding.ts';
import type { SensorColumns } from './recording.ts';

/** Bits of RunFixes.flags. */
export const FLAG = {
  /** Vehicle stands still at this fix. */
  STOPPED: 1,
  /** A gap precedes this fix: no fix for more than 3 median intervals (and more than 2.5 s). */
  GAP_BEFORE: 2,
  /** The receiver repeated or propagated its last position (coasting): no positional information. */
  HELD: 4,
  /** Few satellites, poor DOP or propagated: position trusted less. */
  WEAK: 8,
} as const;

/**
 * The fixes of one continuous trip, cleaned, in time order. All columns have length `count`.
 *
 * Plane: x, y in metres in a tangent plane that rolls along the run (re-centred every few
 * kilometres and turned by the meridian convergence), so that lengths and angles are true to
 * about 1e-6 wherever the run goes. `northRad[i]` is the direction of true north at fix i in
 * that plane, counter-clockwise from +x. Heading theta (counter-clockwise from +x) and course c
 * (clockwise from true north) are related by theta = northRad - c.
 */
export interface RunFixes {
  readonly count: number;
  /** Seconds since Run.startUtcS, strictly increasing. */
  readonly timeS: Float64Array;
  readonly latDeg: Float64Array;
  readonly lonDeg: Float64Array;
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  readonly northRad: Float64Array;
  readonly elevationM: Float32Array | null;
  /** NaN where unknown. */
  readonly speedMps: Float32Array | null;
  /** Clockwise from true north; NaN where unknown, stale or meaningless (slow, standing, held). */
  readonly courseRad: Float32Array | null;
  /** Receiver's stated horizontal accuracy, m; NaN where unknown. */
  readonly accuracyM: Float32Array | null;
  readonly flags: Uint8Array;
  /** Row of the source file. */
  readonly row: Uint32Array;
}

/** Last-digit steps of the channels as written by the logger; 0 when finer than matters. */
export interface Resolution {
  readonly positionM: number;
  readonly speedMps: number;
  readonly courseRad: number;
  readonly timeS: number;
}

export interface Run {
  /** Unique within the recording: "1", "2", ... */
  readonly id: string;
  readonly recordingName: string;
  /** Unix seconds UTC of the first fix. */
  readonly startUtcS: number;
  /** Median interval between fixes, s. */
  readonly intervalS: number;
  readonly resolution: Resolution;
  readonly fixes: RunFixes;
  readonly sensors: SensorColumns | null;
  readonly findings: readonly Finding[];
}
