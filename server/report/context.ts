import type { Finding } from '../../shared/model/finding.ts';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import type { Setup } from '../../shared/schema/setup.ts';

/** One run of a report: its assessed curves and what is needed to reproduce them. */
export interface ReportedRun {
  readonly id: string;
  readonly name: string;
  readonly startUtcS: number;
  readonly durationS: number;
  readonly lengthM: number;
  /** Fixes of the recording that this run rests on. */
  readonly fixCount: number;
  readonly topSpeedKmh: number;
  readonly recording: { readonly name: string; readonly sha256: string; readonly bytes: number };
  readonly curves: readonly AssessedCurve[];
  readonly findings: readonly Finding[];
  /** Centre line of a curve as [longitude, latitude] pairs from start to end; the exports draw a curve with it. */
  readonly path: (curveNumber: number) => readonly (readonly [number, number])[];
}

/** What every export needs besides its rows. */
export interface ReportContext {
  readonly title: string;
  readonly software: string;
  readonly setup: Setup;
  readonly cautions: readonly string[];
  readonly runs: readonly ReportedRun[];
}
