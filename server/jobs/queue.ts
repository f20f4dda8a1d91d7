import { randomUUID } from 'node:crypto';
import { EventEmitter } from 'node:events';
import { existsSync } from 'node:fs';
import { availableParallelism, totalmem } from 'node:os';
import { basename, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { MessageChannel } from 'node:worker_threads';
import { Piscina } from 'piscina';
import type { Fault } from '../../shared/model/fault.ts';
import type { Line } from '../../shared/model/line.ts';
import type { Job, RecordingSummary } from '../../shared/schema/api.ts';
import { PACKAGE_ROOT } from '../package-root.ts';
import { noRunFault } from '../no-run.ts';
import type { Analysis, Progress } from '../pipeline.ts';
import type { Store } from '../store/store.ts';
import { CANCELLED, crashFault, interruptedFault, storeFault } from './job-faults.ts';
import type { AnalysisAnswer, AnalysisOrder } from './messages.ts';
import type { LineOrder } from './lines-worker.ts';
import { resultsOf } from './results.ts';

interface QueueEvents {
  job: [Job];
  recording: [RecordingSummary];
  removed: [{ id: string }];
  /** The server is about to end. */
  closing: [];
}

interface RunningJob {
  readonly job: Job;
  readonly abort: AbortController;
  /** Fulfilled when the outcome is stored. */
  settled: Promise<void>;
}

export interface JobQueueOptions {
  /** Analyses at once; by default one less than there are processors, at least one. */
  readonly threads?: number;
  /** JavaScript file that the threads run. */
  readonly workerFile?: string;
  /** JavaScript heap of a thread, MB. */
  readonly heapMb?: number;
  /** Told of what went wrong inside; nobody waits for it. */
  onTrouble?(error: unknown): void;
}

/** JavaScript heap of a thread, MB, on a machine that has twice that; columns lie outside the heap and are bounded by the count of fixes. */
const MOST_HEAP_MB = 4096;
/** A thread without work ends after this time and gives its memory back, ms. */
const IDLE_MS = 20_000;
/** Begun this often and never ended, a job is given up: it may be what ends the server. */
const MOST_ATTEMPTS = 5;
/** When the table cannot be read or written (disk full), the queue tries again after this time, ms. */
const RETRY_MS = 5000;

/**
 * Analyses of uploaded recordings in worker threads. The queue is a table: what a killed server left
 * running is done again at the next start. The database is locked by one server, so no job has two workers.
 */
export class JobQueue extends EventEmitter<QueueEvents> {
  readonly #store: Store;
  readonly #threads: number;
  readonly #pool: Piscina;
  readonly #onTrouble: (error: unknown) => void;
  readonly #running = new Map<string, RunningJob>();
  #closing = false;
  #pumping = false;
  #pumpAgain = false;

  constructor(store: Store, options: JobQueueOptions = {}) {
    super();
    this.setMaxListeners(0);
    this.#store = store;
    this.#threads = options.threads ?? Math.max(1, availableParallelism() - 1);
    this.#onTrouble = options.onTrouble?.bind(options) ?? (() => undefined);
    this.#pool = new Piscina({
      filename: options.workerFile ?? builtFile(new URL('./analysis-worker.js', import.meta.url)),
      minThreads: 0,
      maxThreads: this.#threads,
      idleTimeout: IDLE_MS,
      resourceLimits: {
        maxOldGenerationSizeMb: options.heapMb ?? Math.min(MOST_HEAP_MB, Math.round(totalmem() / 2 ** 21)),
      },
    });
  }

  /** Takes up what was left: interrupted jobs first in line, recordings without a job after them. */
  async start(): Promise<void> {
    const { givenUp, idle } = await this.#store.jobs.requeueInterrupted(MOST_ATTEMPTS);
    for (const job of givenUp) {
      const name = (await this.#store.recording(job.recordingId))?.name ?? '';
      await this.#finish(job, 'failed', interruptedFault(name, MOST_ATTEMPTS));
    }
    for (const recordingId of idle) await this.add(recordingId);
    void this.#pump();
  }

  /** Queues the analysis of a recording; one that is under way for it already is stopped. */
  async add(recordingId: string): Promise<Job> {
    await this.#stopAll(recordingId);
    const job = await this.#store.jobs.add(randomUUID(), recordingId, Date.now() / 1000);
    await this.#store.setRecordingState(recordingId, 'waiting', null);
    this.emit('job', job);
    await this.#tellRecording(recordingId);
    void this.#pump();
    return job;
  }

  /** The job as it stands, progress of a running one included. */
  async job(id: string): Promise<Job | null> {
    return this.#running.get(id)?.job ?? (await this.#store.jobs.find(id));
  }

  async jobs(): Promise<Job[]> {
    return (await this.#store.jobs.list()).map((job) => this.#running.get(job.id)?.job ?? job);
  }

  /** Stops a job: the thread of a running one is ended at once, a queued one never starts. */
  async cancel(id: string): Promise<Job | null> {
    const running = this.#running.get(id);
    if (running !== undefined) {
      running.abort.abort();
      await running.settled;
    } else {
      const job = await this.#store.jobs.find(id);
      if (job?.state === 'queued') await this.#finish(job, 'cancelled', CANCELLED);
    }
    return await this.job(id);
  }

  /** Ends the jobs of a recording that is about to be deleted, deletes it and tells so. */
  async remove(recordingId: string): Promise<void> {
    await this.#stopAll(recordingId);
    await this.#store.removeRecording(recordingId);
    this.emit('removed', { id: recordingId });
  }

  /** Ends all threads; running jobs stay in the table and are done again at the next start. */
  async close(): Promise<void> {
    this.#closing = true;
    this.emit('closing');
    await this.#pool.destroy();
    await Promise.all([...this.#running.values()].map(({ settled }) => settled));
  }

  /** Groups runs into lines, in a thread after the analyses that wait for it. */
  async fuse(runIds: readonly string[]): Promise<Line[]> {
    const orders: LineOrder[] = [];
    for (const runId of runIds) {
      const run = await this.#store.run(runId);
      if (run === null) continue;
      orders.push({ runId, profilePath: this.#store.profilePath(runId), alignment: run.alignment });
    }
    return (await this.#pool.run(orders, {
      filename: builtFile(new URL('./lines-worker.js', import.meta.url)),
    })) as Line[];
  }

  async #stopAll(recordingId: string): Promise<void> {
    for (const { id } of await this.#store.jobs.unfinishedOf(recordingId)) await this.cancel(id);
  }

  /** Begins queued jobs while threads are free. */
  async #pump(): Promise<void> {
    this.#pumpAgain = true;
    if (this.#pumping) return;
    this.#pumping = true;
    try {
      while (this.#pumpAgain) {
        this.#pumpAgain = false;
        while (!this.#closing && this.#running.size < this.#threads) {
          const job = await this.#store.jobs.nextQueued();
          if (job === null) break;
          await this.#begin(job);
        }
      }
    } catch (error) {
      this.#onTrouble(error);
      setTimeout(() => void this.#pump(), RETRY_MS).unref();
    } finally {
      this.#pumping = false;
    }
  }

  async #begin(queued: Job): Promise<void> {
    const running: RunningJob = {
      job: { ...queued, state: 'running', stage: 'ingest' },
      abort: new AbortController(),
      settled: Promise.resolve(),
    };
    // In the map before anything is awaited: a cancellation from now on finds it.
    this.#running.set(queued.id, running);
    try {
      await this.#store.jobs.begin(queued.id);
      await this.#store.setRecordingState(queued.recordingId, 'analysing', null);
    } catch (error) {
      this.#running.delete(queued.id);
      throw error;
    }
    running.settled = this.#run(running).finally(() => {
      this.#running.delete(queued.id);
      if (!this.#closing) void this.#pump();
    });
  }

  /** One job from thread to table; never throws. */
  async #run({ job, abort }: RunningJob): Promise<void> {
    let name = '';
    try {
      const recording = await this.#store.recording(job.recordingId);
      if (recording === null) return;
      ({ name } = recording);
      this.emit('job', { ...job });
      this.emit('recording', recording);
      const answer = await this.#analyse(job, recording, abort.signal).catch((crash: unknown) => ({
        fault: abort.signal.aborted ? CANCELLED : crashFault(name, crash),
      }));
      // A thread ended by the closing server is no failure of its job: it is done again at the next start.
      if (this.#closing && 'fault' in answer) return;
      if ('fault' in answer) await this.#finish(job, answer.fault === CANCELLED ? 'cancelled' : 'failed', answer.fault);
      else await this.#keep(job, recording, answer.analysis);
    } catch (error) {
      this.#onTrouble(error);
      await this.#finish(job, 'failed', storeFault(name, error)).catch(this.#onTrouble);
    }
  }

  async #analyse(job: Job, recording: RecordingSummary, signal: AbortSignal): Promise<AnalysisAnswer> {
    const { port1, port2 } = new MessageChannel();
    const started = performance.now();
    port1.on('message', ({ stage, share, bytesRead, curvesFound }: Progress) => {
      const elapsedS = (performance.now() - started) / 1000;
      const secondsLeft = share > 0.02 ? (elapsedS / share) * (1 - share) : null;
      Object.assign(job, { stage, progress: share, bytesRead, curvesFound, secondsLeft });
      this.emit('job', { ...job });
    });
    const order: AnalysisOrder = {
      path: this.#store.raw.path(recording.id),
      name: recording.name,
      columns: await this.#store.columnNames(recording.id),
      port: port2,
    };
    try {
      return (await this.#pool.run(order, { signal, transferList: [port2] })) as AnalysisAnswer;
    } finally {
      port1.close();
    }
  }

  async #keep(job: Job, recording: RecordingSummary, analysis: Analysis): Promise<void> {
    const refusal = analysis.refused[0];
    if (analysis.recordings.length === 0 && refusal !== undefined) {
      await this.#finish(job, 'failed', refusal.fault);
      return;
    }
    const { facts, runs } = resultsOf(recording, analysis);
    await this.#store.saveAnalysis(recording.id, facts, runs);
    if (runs.length === 0) {
      await this.#finish(job, 'failed', noRunFault(recording.name, facts.findings));
      return;
    }
    const outcome = {
      state: 'done',
      stage: 'done',
      progress: 1,
      bytesRead: recording.bytes,
      curvesFound: runs.reduce((sum, { summary }) => sum + summary.curveCount, 0),
      secondsLeft: 0,
    } as const;
    await this.#store.jobs.set(job.id, {
      state: outcome.state,
      stage: outcome.stage,
      progress: outcome.progress,
      bytes_read: outcome.bytesRead,
      curves_found: outcome.curvesFound,
      fault: null,
    });
    this.emit('job', Object.assign(job, outcome));
    await this.#tellRecording(recording.id);
  }

  async #finish(job: Job, state: 'failed' | 'cancelled', fault: Fault): Promise<void> {
    await this.#store.jobs.set(job.id, { state, stage: state, fault });
    await this.#store.setRecordingState(job.recordingId, 'refused', fault);
    this.emit('job', Object.assign(job, { state, stage: state, fault, secondsLeft: null }));
    await this.#tellRecording(job.recordingId);
  }

  async #tellRecording(id: string): Promise<void> {
    const recording = await this.#store.recording(id);
    if (recording !== null) this.emit('recording', recording);
  }
}

/** Threads load JavaScript: from sources (tests) the built file is taken. */
function builtFile(beside: URL): string {
  const path = fileURLToPath(beside);
  return existsSync(path) ? path : join(PACKAGE_ROOT, 'dist/server/jobs', basename(path));
}
