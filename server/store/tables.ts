/** Rows as they lie in the database. Text columns that end in `_json` hold JSON; booleans are 0 or 1. */
export interface Tables {
  recordings: {
    id: string;
    name: string;
    title: string;
    /** Title given by whoever brought the recording in; goes before the one in the file. */
    given_title: string | null;
    format: string;
    encoding: string;
    bytes: number;
    sha256: string;
    uploaded_utc_s: number;
    state: 'waiting' | 'analysing' | 'ready' | 'refused';
    fault_json: string | null;
    demo: number;
    fix_count: number;
    columns_json: string;
    column_names_json: string;
    findings_json: string;
    waypoints_json: string;
    mode: 'rail' | 'road' | null;
    /** Setup of this recording alone; null: the one kept for its mode. */
    setup_json: string | null;
  };
  runs: {
    id: string;
    recording_id: string;
    number: number;
    name: string;
    start_utc_s: number;
    duration_s: number;
    length_m: number;
    fix_count: number;
    curve_count: number;
    top_speed_kmh: number;
    line_id: string | null;
    bounds_json: string;
    quality_json: string;
    findings_json: string;
    alignment_json: string;
    passages_json: string;
  };
  jobs: {
    id: string;
    recording_id: string;
    state: 'queued' | 'running' | 'done' | 'failed' | 'cancelled';
    stage: string;
    progress: number;
    bytes_read: number;
    curves_found: number;
    fault_json: string | null;
    created_utc_s: number;
    /** How often it was begun; a job that ends the server each time must not be begun for ever. */
    attempts: number;
  };
  /** Limit sets, vehicles and cant registers that the user keeps: one JSON body each. */
  documents: { kind: 'limit-set' | 'vehicle' | 'register'; id: string; body_json: string };
  settings: { key: string; value_json: string };
}

export type RecordingRow = Tables['recordings'];
export type RunRow = Tables['runs'];
export type JobRow = Tables['jobs'];
export type DocumentKind = Tables['documents']['kind'];
