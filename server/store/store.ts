import { mkdir } from 'node:fs/promises';
import { join } from 'node:path';
import type { Alignment } from '../../shared/model/alignment.ts';
import { BendbookError, type Fault } from '../../shared/model/fault.ts';
import type { Finding } from '../../shared/model/finding.ts';
import type { LogQuality, Profile } from '../../shared/model/motion.ts';
import type { RunPassages } from '../../shared/model/passage.ts';
import type { Waypoint } from '../../shared/model/recording.ts';
import type { ColumnNames, RecordingSummary, RunSummary } from '../../shared/schema/api.ts';
import type { Mode } from '../../shared/schema/common.ts';
import { openDatabase, setAside, type Database } from './database.ts';
import { DocumentTable } from './document-table.ts';
import { JobTable } from './job-table.ts';
import { parseWire } from './json.ts';
import { ProfileFiles } from './profile-files.ts';
import { RAW_MISSING, RawFiles, type Sidecar } from './raw-files.ts';
import { newRecordingRow, recordingSummary, runRow, runSummary, SUMMARY_COLUMNS } from './rows.ts';
import type { RecordingRow } from './tables.ts';

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
  readonly findings: RecordingSummary['findings'];
  readonly waypoints: readonly Waypoint[];
}

/** Recordings, runs, results, jobs and the user's documents in one data folder. Knows nothing of curves. */
export class Store {
  readonly raw: RawFiles;
  readonly jobs: JobTable;
  readonly documents: DocumentTable;
  readonly #profiles: ProfileFiles;
  readonly #database: Database;

  private constructor(database: Database, raw: RawFiles, profiles: ProfileFiles) {
    this.#database = database;
    this.jobs = new JobTable(database.db);
    this.documents = new DocumentTable(database.db);
    this.raw = raw;
    this.#profiles = profiles;
  }

  /**
   * Opens or makes the data folder. Uploads that a killed server left half made are swept; raw
   * recordings that the database does not know (it was lost or set aside) are listed again.
   * With `recover` a damaged database is set aside first.
   *
   * @throws BendbookError `store/damaged`, `store/in-use`, `store/newer`, `store/not-opened`
   */
  static async open(dataDir: string, { recover = false } = {}): Promise<Store> {
    await makeFolder(dataDir);
    // The database comes first: its lock makes sure that no other server is at work in this folder.
    const database = await openOrRecover(join(dataDir, 'bendbook.sqlite'), recover);
    const store = new Store(database, new RawFiles(dataDir), new ProfileFiles(dataDir));
    try {
      await store.raw.prepare();
      await store.#profiles.prepare();
      await store.#reconcile();
    } catch (error) {
      await store.close();
      throw error;
    }
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
    for (const id of known)
      if (!present.has(id)) await this.setRecordingFault(id, { code: 'store/raw-missing', place: {}, ...RAW_MISSING });
    const runs = await db.selectFrom('runs').select('id').execute();
    await this.#profiles.sweep(new Set(runs.map(({ id }) => id)));
  }

  /** Keeps an uploaded file and lists it: both or, when this throws, neither. What it returned from survives a killed server. */
  async addRecording(temporary: string, sidecar: Sidecar): Promise<void> {
    try {
      await this.raw.keep(temporary, sidecar);
      await this.#insertRecording(sidecar);
    } catch (error) {
      await this.raw.remove(sidecar.id);
      throw error;
    }
  }

  async #insertRecording(sidecar: Sidecar): Promise<void> {
    await this.#database.db.insertInto('recordings').values(newRecordingRow(sidecar)).execute();
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
    const runs = await db
      .selectFrom('runs')
      .select(SUMMARY_COLUMNS)
      .where('recording_id', '=', id)
      .orderBy('number')
      .execute();
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

  /** The setup of this recording alone, or null; and the mode that it was brought in with, or null. */
  async recordingSetup(id: string): Promise<{ setup: unknown; mode: Mode | null }> {
    const row = await this.#database.db
      .selectFrom('recordings')
      .select(['setup_json', 'mode'])
      .where('id', '=', id)
      .executeTakeFirst();
    const setup = row?.setup_json ?? null;
    return { setup: setup === null ? null : (JSON.parse(setup) as unknown), mode: row?.mode ?? null };
  }

  async setRecordingSetup(id: string, setup: unknown): Promise<void> {
    await this.#database.db
      .updateTable('recordings')
      .set({ setup_json: setup === null ? null : JSON.stringify(setup) })
      .where('id', '=', id)
      .execute();
  }

  async setRecordingFault(id: string, fault: Fault): Promise<void> {
    await this.#database.db
      .updateTable('recordings')
      .set({ fault_json: JSON.stringify(fault) })
      .where('id', '=', id)
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
    const recording = await db
      .selectFrom('recordings')
      .select('given_title')
      .where('id', '=', recordingId)
      .executeTakeFirst();
    // Deleted while it was analysed: there is nothing to keep the result for.
    if (recording === undefined) return;
    const givenTitle = recording.given_title;
    const before = await db.selectFrom('runs').select('id').where('recording_id', '=', recordingId).execute();
    for (const run of runs) await this.#profiles.write(run.summary.id, run.profile);
    await db.transaction().execute(async (transaction) => {
      await transaction.deleteFrom('runs').where('recording_id', '=', recordingId).execute();
      await transaction
        .updateTable('recordings')
        .set({
          ...(givenTitle === null ? { title: facts.title } : {}),
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
    const rows = await this.#database.db
      .selectFrom('runs')
      .select(SUMMARY_COLUMNS)
      .orderBy('start_utc_s')
      .orderBy('id')
      .execute();
    return rows.map(runSummary);
  }

  async run(id: string): Promise<StoredRun | null> {
    const row = await this.#database.db.selectFrom('runs').selectAll().where('id', '=', id).executeTakeFirst();
    if (row === undefined) return null;
    return {
      summary: runSummary(row),
      quality: parseWire(row.quality_json) as LogQuality,
      findings: parseWire(row.findings_json) as Finding[],
      alignment: parseWire(row.alignment_json) as Alignment,
      passages: parseWire(row.passages_json) as RunPassages,
    };
  }

  async profile(runId: string): Promise<Profile> {
    return await this.#profiles.read(runId);
  }

  /** Where the profile of a run lies, for a thread that reads it itself. */
  profilePath(runId: string): string {
    return this.#profiles.path(runId);
  }

  async setLine(runId: string, lineId: string | null): Promise<void> {
    await this.#database.db.updateTable('runs').set({ line_id: lineId }).where('id', '=', runId).execute();
  }
}

async function openOrRecover(path: string, recover: boolean): Promise<Database> {
  try {
    return await openDatabase(path);
  } catch (error) {
    if (!recover || !(error instanceof BendbookError) || error.fault.code !== 'store/damaged') throw error;
    await setAside(path);
    return await openDatabase(path);
  }
}

async function makeFolder(path: string): Promise<void> {
  try {
    await mkdir(path, { recursive: true });
  } catch (error) {
    throw new BendbookError(
      'store/not-opened',
      {
        cause: `the data folder cannot be made: ${error instanceof Error ? error.message : String(error)}`,
        place: { file: path },
        remedy: 'Choose a folder that can be written with --data DIR',
      },
      { cause: error },
    );
  }
}
