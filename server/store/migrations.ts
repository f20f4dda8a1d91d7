import { BendbookError } from '../../shared/model/fault.ts';
import type { SqliteConnection } from './sqlite.ts';

/** Each entry is applied once, in order, and never changed after a release. */
const MIGRATIONS: readonly string[] = [
  `
  CREATE TABLE recordings (
    id TEXT PRIMARY KEY, name TEXT NOT NULL, title TEXT NOT NULL, given_title TEXT, format TEXT NOT NULL, encoding TEXT NOT NULL,
    bytes INTEGER NOT NULL, sha256 TEXT NOT NULL, uploaded_utc_s REAL NOT NULL, state TEXT NOT NULL, fault_json TEXT,
    demo INTEGER NOT NULL, fix_count INTEGER NOT NULL, columns_json TEXT NOT NULL, column_names_json TEXT NOT NULL,
    findings_json TEXT NOT NULL, waypoints_json TEXT NOT NULL, mode TEXT, setup_json TEXT
  ) STRICT;
  CREATE TABLE runs (
    id TEXT PRIMARY KEY, recording_id TEXT NOT NULL REFERENCES recordings (id) ON DELETE CASCADE, number INTEGER NOT NULL,
    name TEXT NOT NULL, start_utc_s REAL NOT NULL, duration_s REAL NOT NULL, length_m REAL NOT NULL, fix_count INTEGER NOT NULL,
    curve_count INTEGER NOT NULL, top_speed_kmh REAL NOT NULL, line_id TEXT, bounds_json TEXT NOT NULL, quality_json TEXT NOT NULL,
    findings_json TEXT NOT NULL, alignment_json TEXT NOT NULL, passages_json TEXT NOT NULL
  ) STRICT;
  CREATE INDEX runs_of_recording ON runs (recording_id);
  CREATE TABLE jobs (
    id TEXT PRIMARY KEY, recording_id TEXT NOT NULL REFERENCES recordings (id) ON DELETE CASCADE, state TEXT NOT NULL,
    stage TEXT NOT NULL, progress REAL NOT NULL, bytes_read INTEGER NOT NULL, curves_found INTEGER NOT NULL, fault_json TEXT,
    created_utc_s REAL NOT NULL, attempts INTEGER NOT NULL
  ) STRICT;
  CREATE INDEX jobs_by_state ON jobs (state, created_utc_s);
  CREATE TABLE documents (kind TEXT NOT NULL, id TEXT NOT NULL, body_json TEXT NOT NULL, PRIMARY KEY (kind, id)) STRICT;
  CREATE TABLE settings (key TEXT PRIMARY KEY, value_json TEXT NOT NULL) STRICT;
  `,
];

/**
 * Brings the tables up to date inside one transaction a step; PRAGMA user_version counts the steps done.
 *
 * @throws BendbookError `store/newer` when a later version of the program has changed the tables.
 */
export function migrate(connection: SqliteConnection, path: string): void {
  const [row] = connection.prepare('PRAGMA user_version').all() as { user_version: number }[];
  const done = row?.user_version ?? 0;
  if (done > MIGRATIONS.length) {
    throw new BendbookError('store/newer', {
      cause: `the database was written by a later version of Bendbook (tables ${String(done)}, known ${String(MIGRATIONS.length)})`,
      place: { file: path },
      remedy: 'Update Bendbook, or choose another data folder',
    });
  }
  for (let step = done; step < MIGRATIONS.length; step++) {
    connection.exec(`BEGIN IMMEDIATE; ${MIGRATIONS[step]!} PRAGMA user_version = ${String(step + 1)}; COMMIT`);
  }
}
