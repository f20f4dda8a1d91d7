import type { Fault } from '../../shared/model/fault.ts';
import type { Job, RecordingSummary, RunSummary } from '../../shared/schema/api.ts';
import { stringifyWire } from './json.ts';
import type { Sidecar } from './raw-files.ts';
import type { NewRun } from './store.ts';
import type { JobRow, RecordingRow, RunRow } from './tables.ts';

/** A recording as it is listed before anything is known of its content. */
export function newRecordingRow(sidecar: Sidecar): RecordingRow {
  return {
    id: sidecar.id,
    name: sidecar.name,
    title: sidecar.title ?? sidecar.name,
    given_title: sidecar.title,
    format: '',
    encoding: '',
    bytes: sidecar.bytes,
    sha256: sidecar.sha256,
    uploaded_utc_s: sidecar.uploadedUtcS,
    state: 'waiting',
    fault_json: null,
    demo: sidecar.demo ? 1 : 0,
    fix_count: 0,
    columns_json: '[]',
    column_names_json: JSON.stringify(sidecar.columns),
    findings_json: '[]',
    waypoints_json: '[]',
    mode: sidecar.mode,
    setup_json: null,
  };
}

/** A recording with its runs and its latest job, as it goes to the page. */
export function recordingSummary(
  row: RecordingRow,
  runs: readonly RunSummary[],
  jobs: readonly JobRow[],
): RecordingSummary {
  return {
    id: row.id,
    name: row.name,
    title: row.title,
    format: row.format,
    encoding: row.encoding,
    bytes: row.bytes,
    sha256: row.sha256,
    uploadedUtcS: row.uploaded_utc_s,
    state: row.state,
    fault: row.fault_json === null ? null : (JSON.parse(row.fault_json) as Fault),
    demo: row.demo === 1,
    fixCount: row.fix_count,
    columns: JSON.parse(row.columns_json) as RecordingSummary['columns'],
    findings: JSON.parse(row.findings_json) as RecordingSummary['findings'],
    runs: runs.filter(({ recordingId }) => recordingId === row.id),
    jobId: jobs.filter(({ recording_id }) => recording_id === row.id).at(-1)?.id ?? null,
  };
}

/** Columns that a listing needs; alignment and passages are long and stay where they are. */
export const SUMMARY_COLUMNS = [
  'id',
  'recording_id',
  'name',
  'start_utc_s',
  'duration_s',
  'length_m',
  'fix_count',
  'curve_count',
  'top_speed_kmh',
  'line_id',
  'bounds_json',
] as const;

export function runSummary(row: Pick<RunRow, (typeof SUMMARY_COLUMNS)[number]>): RunSummary {
  return {
    id: row.id,
    recordingId: row.recording_id,
    name: row.name,
    startUtcS: row.start_utc_s,
    durationS: row.duration_s,
    lengthM: row.length_m,
    fixCount: row.fix_count,
    curveCount: row.curve_count,
    topSpeedKmh: row.top_speed_kmh,
    lineId: row.line_id,
    bounds: JSON.parse(row.bounds_json) as RunSummary['bounds'],
  };
}

export function runRow(recordingId: string, run: NewRun): RunRow {
  const { summary } = run;
  return {
    id: summary.id,
    recording_id: recordingId,
    number: Number(summary.id.split('.').at(-1)),
    name: summary.name,
    start_utc_s: summary.startUtcS,
    duration_s: summary.durationS,
    length_m: summary.lengthM,
    fix_count: summary.fixCount,
    curve_count: summary.curveCount,
    top_speed_kmh: summary.topSpeedKmh,
    line_id: null,
    bounds_json: JSON.stringify(summary.bounds),
    quality_json: stringifyWire(run.quality),
    findings_json: stringifyWire(run.findings),
    alignment_json: stringifyWire(run.alignment),
    passages_json: stringifyWire(run.passages),
  };
}

export function jobOf(row: JobRow): Job {
  return {
    id: row.id,
    recordingId: row.recording_id,
    state: row.state,
    stage: row.stage,
    progress: row.progress,
    bytesRead: row.bytes_read,
    curvesFound: row.curves_found,
    secondsLeft: null,
    fault: row.fault_json === null ? null : (JSON.parse(row.fault_json) as Fault),
    createdUtcS: row.created_utc_s,
  };
}
