import { join } from 'node:path';
import type { Alignment } from '../../shared/model/alignment.ts';
import type { Fault } from '../../shared/model/fault.ts';
import type { Finding } from '../../shared/model/finding.ts';
import type { LogQuality, Profile } from '../../shared/model/motion.ts';
import type { RunPassages } from '../../shared/model/passage.ts';
import type { Waypoint } from '../../shared/model/recording.ts';
import type { ColumnNames, Job, RecordingSummary, RunSummary } from '../../shared/schema/api.ts';
import { openDatabase, type Database } from './database.ts';
import { parseWire, stringifyWire } from './json.ts';
import { ProfileFiles } from './profile-files.ts';
import { RawFiles, type Sidecar } from './raw-files.ts';
import type { Tables } from './tables.ts';

type RecordingRow = Tables['recordings'];
type RunRow = Tables['runs'];
type JobRow = Tables['jobs'];
export type DocumentKind = Tables['documents']['kind'];

/** A run as it is stored: summary, alignment, passages, findings; its profile lies in a file. */
export interface StoredRun {
  readonly summary: RunSummary;
  readonly quality: LogQuality;
  readonly findings: Finding[];
  readonly alignment: Alignment;
  readonly passages: RunPassages;
}

/** A run as an analysis hands it over. */
export interface NewRun extends Omit<StoredRun, 'summary'> {
  readonly summary: Omit<RunSummary, 'recordingId' | 'lineId'>;
  readonly profile: Profile;
}

/** What an analysis found out about a recording as a whole. */
export interface RecordingFacts {
  readonly title: string;
  readonly format: string;
  readonly encoding: string;
  readonly fixCount: number;
  readonly columns: RecordingSummary['columns'];
  readonly findings: RecordingSummary["findings"];
  readonly waypoints: readonly Waypoint[];
}

/** Recordings, runs, results, jobs and the user's documents in one data folder. Knows nothing of curves. */
export class Store {
  readonly raw: RawFiles;
  readonly #profiles: ProfileFiles;
  readonly #database: Database;

  private constructor(database: Database, raw: RawFiles, profiles: ProfileFiles) {
    this.#database = database;
    this.raw = raw;
    this.#profiles = profiles;
  }

  /**
   * Opens or makes the data folder. Uploads that a killed server left half made are swept; raw
   * recordings that the database does not know (it was lost or moved away) are listed again.
   */
  static async open(dataDir: string): Promise<Store> {
    const raw = new RawFiles(dataDir);
    await raw.prepare();
    const profiles = new ProfileFiles(dataDir);
    await profiles.prepare();
    const store = new Store(await openDatabase(join(dataDir, 'bendbook.sqlite')), raw, profiles);
    await store.#reconcile();
    return store;
  }

  async close(): Promise<void> {
    await this.#database.close();
  }

  async #reconcile(): Promise<void> {
    const db = this.#database.db;
    const onDisk = await this.raw.list();
    const known = new Set((await db.selectFrom('recordings').select('id').execute()).map(({ id }) => id));
    for (const sidecar of onDisk) if (!known.has(sidecar.id)) await this.#insertRecording(sidecar);
    const present = new Set(onDisk.map(({ id }) => id));
    for (const id of known) if (!present.has(id)) await db.deleteFrom('recordings').where('id', '=', id).execute();
    const runs = await db.selectFrom('runs').select('id').execute();
    await this.#profiles.sweep(new Set(runs.map(({ id }) => id)));
  }

  /** Keeps an uploaded file and lists it. When this returns, both survive a killed server. */
  async addRecording(temporary: string, sidecar: Sidecar): Promise<void> {
    await this.raw.keep(temporary, sidecar);
    await this.#insertRecording(sidecar);
  }

  async #insertRecording(sidecar: Sidecar): Promise<void> {
    const row: RecordingRow = {
      id: sidecar.id,
      name: sidecar.name,
      title: sidecar.name,
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
      column_names_json: '{}',
      findings_json: '[]',
      waypoints_json: '[]',
      mode: sidecar.mode,
    };
    await this.#database.db.insertInto('recordings').values(row).execute();
  }

  async recordings(): Promise<RecordingSummary[]> {
    const db = this.#database.db;
    const rows = await db.selectFrom('recordings').selectAll().orderBy('uploaded_utc_s').orderBy('id').execute();
    const runs = await this.runs();
    const jobs = await db.selectFrom('jobs').selectAll().orderBy('created_utc_s').execute();
    return rows.map((row) => recordingSummary(row, runs, jobs));
  }

  async recording(id: string): Promise<RecordingSummary | null> {
    const db = this.#database.db;
    const row = await db.selectFrom('recordings').selectAll().where('id', '=', id).executeTakeFirst();
    if (row === undefined) return null;
    const runs = await db.selectFrom('runs').selectAll().where('recording_id', '=', id).orderBy('number').execute();
    const jobs = await db
      .selectFrom('jobs')
      .selectAll()
      .where('recording_id', '=', id)
      .orderBy('created_utc_s')
      .execute();
    return recordingSummary(row, runs.map(runSummary), jobs);
  }

  async waypoints(recordingId: string): Promise<Waypoint[]> {
    const row = await this.#database.db
      .selectFrom('recordings')
      .select('waypoints_json')
      .where('id', '=', recordingId)
      .executeTakeFirst();
    return row === undefined ? [] : (JSON.parse(row.waypoints_json) as Waypoint[]);
  }

  async columnNames(recordingId: string): Promise<ColumnNames> {
    const row = await this.#database.db
      .selectFrom('recordings')
      .select('column_names_json')
      .where('id', '=', recordingId)
      .executeTakeFirst();
    return row === undefined ? {} : (JSON.parse(row.column_names_json) as ColumnNames);
  }

  async setColumnNames(recordingId: string, names: ColumnNames): Promise<void> {
    await this.#database.db
      .updateTable('recordings')
      .set({ column_names_json: JSON.stringify(names) })
      .where('id', '=', recordingId)
      .execute();
  }

  async setRecordingState(id: string, state: RecordingRow['state'], fault: Fault | null): Promise<void> {
    await this.#database.db
      .updateTable('recordings')
      .set({ state, fault_json: fault === null ? null : JSON.stringify(fault) })
      .where('id', '=', id)
      .execute();
  }

  /** Replaces the results of a recording: profiles first, then facts and runs in one transaction. */
  async saveAnalysis(recordingId: string, facts: RecordingFacts, runs: readonly NewRun[]): Promise<void> {
    const db = this.#database.db;
    const before = await db.selectFrom('runs').select('id').where('recording_id', '=', recordingId).execute();
    for (const run of runs) await this.#profiles.write(run.summary.id, run.profile);
    await db.transaction().execute(async (transaction) => {
      await transaction.deleteFrom('runs').where('recording_id', '=', recordingId).execute();
      await transaction
        .updateTable('recordings')
        .set({
          title: facts.title,
          format: facts.format,
          encoding: facts.encoding,
          fix_count: facts.fixCount,
          columns_json: JSON.stringify(facts.columns),
          findings_json: JSON.stringify(facts.findings),
          waypoints_json: JSON.stringify(facts.waypoints),
          state: 'ready',
          fault_json: null,
        })
        .where('id', '=', recordingId)
        .execute();
      for (const run of runs) await transaction.insertInto('runs').values(runRow(recordingId, run)).execute();
    });
    const kept = new Set(runs.map(({ summary }) => summary.id));
    for (const { id } of before) if (!kept.has(id)) await this.#profiles.remove(id);
  }

  /** Deletes raw file, runs, profiles and jobs of a recording; false when there is none. */
  async removeRecording(id: string): Promise<boolean> {
    const db = this.#database.db;
    const runs = await db.selectFrom('runs').select('id').where('recording_id', '=', id).execute();
    const { numDeletedRows } = await db.deleteFrom('recordings').where('id', '=', id).executeTakeFirst();
    await this.raw.remove(id);
    for (const run of runs) await this.#profiles.remove(run.id);
    return numDeletedRows > 0n;
  }

  async runs(): Promise<RunSummary[]> {
    const rows = await this.#database.db.selectFrom('runs').selectAll().orderBy('start_utc_s').orderBy('id').execute();
    return rows.map(runSummary);
  }

  async run(id: string): Promise<StoredRun | null> {
    const row = await this.#database.db.selectFrom('runs').selectAll().where('id', '=', id).executeTakeFirst();
    if (row === undefined) return null;
    return {
      summary: runSummary(row),
      quality: parseWire(row.quality_json),
      findings: parseWire(row.findings_json),
      alignment: parseWire(row.alignment_json),
      passages: parseWire(row.passages_json),
    };
  }

  async profile(runId: string): Promise<Profile> {
    return await this.#profiles.read(runId);
  }

  async setLine(runId: string, lineId: string | null): Promise<void> {
    await this.#database.db.updateTable('runs').set({ line_id: lineId }).where('id', '=', runId).execute();
  }

  // Jobs.

  async addJob(id: string, recordingId: string, createdUtcS: number): Promise<Job> {
    const row: JobRow = {
      id,
      recording_id: recordingId,
      state: 'queued',
      stage: 'queued',
      progress: 0,
      bytes_read: 0,
      curves_found: 0,
      fault_json: null,
      created_utc_s: createdUtcS,
      started_utc_s: null,
    };
    await this.#database.db.insertInto('jobs').values(row).execute();
    return jobOf(row);
  }

  async jobs(): Promise<Job[]> {
    const rows = await this.#database.db
      .selectFrom('jobs')
      .selectAll()
      .orderBy('created_utc_s', 'desc')
      .limit(500)
      .execute();
    return rows.map(jobOf);
  }

  async job(id: string): Promise<Job | null> {
    const row = await this.#database.db.selectFrom('jobs').selectAll().where('id', '=', id).executeTakeFirst();
    return row === undefined ? null : jobOf(row);
  }

  async nextQueuedJob(): Promise<Job | null> {
    const row = await this.#database.db
      .selectFrom('jobs')
      .selectAll()
      .where('state', '=', 'queued')
      .orderBy('created_utc_s')
      .orderBy('id')
      .executeTakeFirst();
    return row === undefined ? null : jobOf(row);
  }

  async setJob(
    id: string,
    change: Partial<Pick<JobRow, 'state' | 'stage' | 'progress' | 'started_utc_s'>> & { fault?: Fault | null },
  ): Promise<void> {
    const { fault, ...rest } = change;
    await this.#database.db
      .updateTable('jobs')
      .set({ ...rest, ...(fault === undefined ? {} : { fault_json: fault === null ? null : JSON.stringify(fault) }) })
      .where('id', '=', id)
      .execute();
  }

  /** Jobs that a killed server left running go back to the queue; recordings without a job are returned. */
  async requeueInterrupted(): Promise<string[]> {
    const db = this.#database.db;
    await db
      .updateTable('jobs')
      .set({ state: 'queued', stage: 'queued', progress: 0 })
      .where('state', '=', 'running')
      .execute();
    const idle = await db
      .selectFrom('recordings')
      .select('id')
      .where('state', 'in', ['waiting', 'analysing'])
      .where('id', 'not in', db.selectFrom('jobs').select('recording_id').where('state', '=', 'queued'))
      .orderBy('uploaded_utc_s')
      .execute();
    return idle.map(({ id }) => id);
  }

  // Documents and settings.

  async documents(kind: DocumentKind): Promise<unknown[]> {
    const rows = await this.#database.db
      .selectFrom('documents')
      .selectAll()
      .where('kind', '=', kind)
      .orderBy('id')
      .execute();
    return rows.map(({ body_json }) => JSON.parse(body_json) as unknown);
  }

  async putDocument(kind: DocumentKind, id: string, body: unknown): Promise<void> {
    const body_json = JSON.stringify(body);
    await this.#database.db
      .insertInto('documents')
      .values({ kind, id, body_json })
      .onConflict((conflict) => conflict.columns(['kind', 'id']).doUpdateSet({ body_json }))
      .execute();
  }

  async removeDocument(kind: DocumentKind, id: string): Promise<boolean> {
    const { numDeletedRows } = await this.#database.db
      .deleteFrom('documents')
      .where('kind', '=', kind)
      .where('id', '=', id)
      .executeTakeFirst();
    return numDeletedRows > 0n;
  }

  async setting(key: string): Promise<unknown> {
    const row = await this.#database.db.selectFrom('settings').selectAll().where('key', '=', key).executeTakeFirst();
    return row === undefined ? null : (JSON.parse(row.value_json) as unknown);
  }

  async putSetting(key: string, value: unknown): Promise<void> {
    const value_json = JSON.stringify(value);
    await this.#database.db
      .insertInto('settings')
      .values({ key, value_json })
      .onConflict((conflict) => conflict.column('key').doUpdateSet({ value_json }))
      .execute();
  }
}

function recordingSummary(row: RecordingRow, runs: readonly RunSummary[], jobs: readonly JobRow[]): RecordingSummary {
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

function runSummary(row: RunRow): RunSummary {
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

function runRow(recordingId: string, run: NewRun): RunRow {
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

function jobOf(row: JobRow): Job {
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
