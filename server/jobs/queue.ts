import { randomUUID } from 'node:crypto';
import { EventEmitter } from 'node:events';
import { existsSync } from 'node:fs';
import { availableParallelism } from 'node:os';
import { fileURLToPath } from 'node:url';
import { Worker } from 'node:worker_threads';
import { BendbookError, type Fault } from '../../shared/model/fault.ts';
import type { Job, RecordingSummary } from '../../shared/schema/api.ts';
import type { Store } from '../store/store.ts';
import type { AnalysisAnswer, AnalysisOrder } from './messages.ts';
import { resultsOf } from './results.ts';

interface QueueEvents {
  job: [Job];
  recording: [RecordingSummary];
  removed: [{ id: string }];
}

interface RunningJob {
  readonly job: Job;
  readonly worker: Worker;
  cancelled: boolean;
}

/** Megabytes of JavaScript heap a thread may use; columns lie outside the heap and are bounded by the count of fixes. */
const HEAP_MB = 4096;

/**
 * Analyses of uploaded recordings, one worker thread each, at most one less than there are processors.
 * The queue is a table: what a killed server left running is done again at the next start.
 */
export class JobQueue extends EventEmitter<QueueEvents> {
  readonly #store: Store;
  readonly #most: number;
  readonly #running = new Map<string, RunningJob>();
  #closing = false;
  #pumping = false;

  constructor(store: Store, most = Math.max(1, availableParallelism() - 1)) {
    super();
    this.setMaxListeners(0);
    this.#store = store;
    this.#most = most;
  }

  /** Takes up what was left: interrupted jobs first in line, recordings without a job after them. */
  async start(): Promise<void> {
    for (const recordingId of await this.#store.requeueInterrupted()) await this.add(recordingId);
    void this.#pump();
  }

  /** Queues the analysis of a recording. */
  async add(recordingId: string): Promise<Job> {
    const job = await this.#store.addJob(randomUUID(), recordingId, Date.now() / 1000);
    await this.#store.setRecordingState(recordingId, 'waiting', null);
    this.emit('job', job);
    await this.#tellRecording(recordingId);
    void this.#pump();
    return job;
  }

  /** The job as it stands, progress of a running one included. */
  async job(id: string): Promise<Job | null> {
    return this.#running.get(id)?.job ?? (await this.#store.job(id));
  }

  async jobs(): Promise<Job[]> {
    return (await this.#store.jobs()).map((job) => this.#running.get(job.id)?.job ?? job);
  }

  /** Stops a job: a running thread is ended at once, a queued one never starts. */
  async cancel(id: string): Promise<Job | null> {
    const running = this.#running.get(id);
    if (running !== undefined) {
      running.cancelled = true;
      await running.worker.terminate();
    } else {
      const job = await this.#store.job(id);
      if (job?.state === 'queued') await this.#finish(job, 'cancelled', CANCELLED);
    }
    return await this.job(id);
  }

  /** Ends the jobs of a recording that is about to be deleted. */
  async forget(recordingId: string): Promise<void> {
    for (const [id, { job }] of this.#running) if (job.recordingId === recordingId) await this.cancel(id);
  }

  async close(): Promise<void> {
    this.#closing = true;
    await Promise.all([...this.#running.values()].map(({ worker }) => worker.terminate()));
  }

  async #pump(): Promise<void> {
    if (this.#pumping) return;
    this.#pumping = true;
    try {
      while (!this.#closing && this.#running.size < this.#most) {
        const job = await this.#store.nextQueuedJob();
        if (job === null) break;
        await this.#begin(job);
      }
    } finally {
      this.#pumping = false;
    }
  }

  async #begin(job: Job): Promise<void> {
    const recording = await this.#store.recording(job.recordingId);
    if (recording === null) return;
    await this.#store.setJob(job.id, { state: 'running', stage: 'ingest', started_utc_s: Date.now() / 1000 });
    await this.#store.setRecordingState(recording.id, 'analysing', null);
    const order: AnalysisOrder = {
      path: this.#store.raw.path(recording.id),
      name: recording.name,
      columns: await this.#store.columnNames(recording.id),
    };
    const worker = new Worker(workerFile(), { workerData: order, resourceLimits: { maxOldGenerationSizeMb: HEAP_MB } });
    const running: RunningJob = { job: { ...job, state: 'running', stage: 'ingest' }, worker, cancelled: false };
    this.#running.set(job.id, running);
    await this.#tellRecording(recording.id);
    const started = performance.now();
    let answered: AnalysisAnswer | null = null;
    let crash: unknown = null;
    worker.on('message', (answer: AnalysisAnswer) => {
      if (answer.kind !== 'progress') {
        answered = answer;
        return;
      }
      const { stage, share, bytesRead, curvesFound } = answer.progress;
      const elapsedS = (performance.now() - started) / 1000;
      const secondsLeft = share > 0.02 ? (elapsedS / share) * (1 - share) : null;
      Object.assign(running.job, { stage, progress: share, bytesRead, curvesFound, secondsLeft });
      this.emit('job', { ...running.job });
    });
    worker.on('error', (error) => {
      crash = error;
    });
    worker.on('exit', () => {
      void this.#settle(running, recording, answered, crash).catch((error: unknown) => {
        console.error(`The result of "${recording.name}" could not be stored: ${String(error)}`);
      });
    });
  }

  async #settle(
    running: RunningJob,
    recording: RecordingSummary,
    answer: AnalysisAnswer | null,
    crash: unknown,
  ): Promise<void> {
    try {
      if (this.#closing && answer?.kind !== 'done') return;
      if (running.cancelled) await this.#finish(running.job, 'cancelled', CANCELLED);
      else if (answer?.kind === 'fault') await this.#finish(running.job, 'failed', answer.fault);
      else if (answer?.kind === 'done') await this.#keep(running.job, recording, answer.analysis);
      else await this.#finish(running.job, 'failed', crashFault(recording.name, crash));
    } catch (error) {
      await this.#finish(running.job, 'failed', storeFault(recording.name, error));
    } finally {
      this.#running.delete(running.job.id);
      if (!this.#closing) void this.#pump();
    }
  }

  async #keep(job: Job, recording: RecordingSummary, analysis: Parameters<typeof resultsOf>[2]): Promise<void> {
    const refusal = analysis.refused[0];
    if (analysis.recordings.length === 0 && refusal !== undefined) {
      await this.#finish(job, 'failed', refusal.fault);
      return;
    }
    const { facts, runs } = resultsOf(recording.id, recording.name, analysis);
    // Deleted while it was analysed: there is nothing left to keep the result for.
    if ((await this.#store.recording(recording.id)) === null) return;
    await this.#store.saveAnalysis(recording.id, facts, runs);
    await this.#store.setJob(job.id, { state: 'done', stage: 'done', progress: 1, fault: null });
    this.emit('job', { ...job, state: 'done', stage: 'done', progress: 1, secondsLeft: 0 });
    await this.#tellRecording(recording.id);
  }

  async #finish(job: Job, state: 'failed' | 'cancelled', fault: Fault): Promise<void> {
    await this.#store.setJob(job.id, { state, stage: state, fault });
    await this.#store.setRecordingState(job.recordingId, 'refused', fault);
    this.emit('job', {
      ...job,
      state,
      stage: state,
      fault: { ...fault, place: { ...fault.place } },
      secondsLeft: null,
    });
    await this.#tellRecording(job.recordingId);
  }

  async #tellRecording(id: string): Promise<void> {
    const recording = await this.#store.recording(id);
    if (recording !== null) this.emit('recording', recording);
  }
}

const CANCELLED: Fault = {
  code: 'jobs/cancelled',
  cause: 'the analysis was cancelled',
  place: {},
  remedy: 'Start it again from the list of recordings',
};

function crashFault(file: string, crash: unknown): Fault {
  const outOfMemory = (crash as { code?: string } | null)?.code === 'ERR_WORKER_OUT_OF_MEMORY';
  return {
    code: outOfMemory ? 'jobs/out-of-memory' : 'jobs/ended',
    cause: outOfMemory
      ? 'the analysis needed more memory than it may use'
      : 'the analysis ended before it had a result',
    place: { file },
    remedy: outOfMemory
      ? 'Split the recording into shorter ones'
      : 'Start it again; if it ends again, keep the recording and report it to the makers of this program',
  };
}

function storeFault(file: string, error: unknown): Fault {
  if (error instanceof BendbookError) return error.fault;
  const full = (error as { code?: string }).code === 'ENOSPC' || /disk is full/i.test(String(error));
  return {
    code: full ? 'store/disk-full' : 'store/not-written',
    cause: full ? 'the disk is full' : 'the result could not be written',
    place: { file },
    remedy: full
      ? 'Free some space in the data folder, then start the analysis again'
      : 'Check the data folder, then start the analysis again',
  };
}

/** Threads load JavaScript: from sources (tests) the built file is taken. */
function workerFile(): URL {
  const beside = new URL('./analysis-worker.js', import.meta.url);
  if (existsSync(fileURLToPath(beside))) return beside;
  return new URL('../../dist/server/jobs/analysis-worker.js', import.meta.url);
}
