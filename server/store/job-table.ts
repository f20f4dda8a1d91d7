import type { Kysely } from 'kysely';
import type { Fault } from '../../shared/model/fault.ts';
import type { Job } from '../../shared/schema/api.ts';
import { jobOf } from './rows.ts';
import type { JobRow, Tables } from './tables.ts';

/** The queue as a table: what is to be analysed, what is under way, what came of it. */
export class JobTable {
  readonly #db: Kysely<Tables>;

  constructor(db: Kysely<Tables>) {
    this.#db = db;
  }

  async add(id: string, recordingId: string, createdUtcS: number): Promise<Job> {
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
      attempts: 0,
    };
    await this.#db.insertInto('jobs').values(row).execute();
    return jobOf(row);
  }

  async list(): Promise<Job[]> {
    const rows = await this.#db.selectFrom('jobs').selectAll().orderBy('created_utc_s', 'desc').limit(500).execute();
    return rows.map(jobOf);
  }

  async find(id: string): Promise<Job | null> {
    const row = await this.#db.selectFrom('jobs').selectAll().where('id', '=', id).executeTakeFirst();
    return row === undefined ? null : jobOf(row);
  }

  async nextQueued(): Promise<Job | null> {
    const row = await this.#db
      .selectFrom('jobs')
      .selectAll()
      .where('state', '=', 'queued')
      .orderBy('created_utc_s')
      .orderBy('id')
      .executeTakeFirst();
    return row === undefined ? null : jobOf(row);
  }

  async set(
    id: string,
    change: Partial<Pick<JobRow, 'state' | 'stage' | 'progress' | 'bytes_read' | 'curves_found'>> & {
      fault?: Fault | null;
    },
  ): Promise<void> {
    const { fault, ...rest } = change;
    await this.#db
      .updateTable('jobs')
      .set({ ...rest, ...(fault === undefined ? {} : { fault_json: fault === null ? null : JSON.stringify(fault) }) })
      .where('id', '=', id)
      .execute();
  }

  /** Marks a queued job as begun. */
  async begin(id: string): Promise<void> {
    await this.#db
      .updateTable('jobs')
      .set((row) => ({ state: 'running', stage: 'ingest', attempts: row('attempts', '+', 1) }))
      .where('id', '=', id)
      .execute();
  }

  /** Queued and running jobs of a recording. */
  async unfinishedOf(recordingId: string): Promise<Job[]> {
    const rows = await this.#db
      .selectFrom('jobs')
      .selectAll()
      .where('recording_id', '=', recordingId)
      .where('state', 'in', ['queued', 'running'])
      .execute();
    return rows.map(jobOf);
  }

  /**
   * Jobs that a killed server left running: back to the queue, or, begun `mostAttempts` times already, `givenUp`.
   * Recordings that wait without a job (killed between the two) are `idle`.
   */
  async requeueInterrupted(mostAttempts: number): Promise<{ givenUp: Job[]; idle: string[] }> {
    const db = this.#db;
    await db
      .updateTable('jobs')
      .set({ state: 'queued', stage: 'queued', progress: 0 })
      .where('state', '=', 'running')
      .where('attempts', '<', mostAttempts)
      .execute();
    const givenUp = await db.selectFrom('jobs').selectAll().where('state', '=', 'running').execute();
    const idle = await db
      .selectFrom('recordings')
      .select('id')
      .where('state', 'in', ['waiting', 'analysing'])
      .where('id', 'not in', db.selectFrom('jobs').select('recording_id').where('state', 'in', ['queued', 'running']))
      .orderBy('uploaded_utc_s')
      .execute();
    return { givenUp: givenUp.map(jobOf), idle: idle.map(({ id }) => id) };
  }
}
