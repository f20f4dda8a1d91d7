import { parentPort, workerData } from 'node:worker_threads';
import { BendbookError } from '../../shared/model/fault.ts';
import { analyseFile, type Analysis } from '../pipeline.ts';
import type { AnalysisAnswer, AnalysisOrder } from './messages.ts';

/** Progress is told at most this often, ms. */
const TELL_EVERY_MS = 150;

const port = parentPort;
if (port === null) throw new Error('this file runs as a worker thread');
const order = workerData as AnalysisOrder;
let told = 0;

try {
  const analysis = await analyseFile(order.path, {
    name: order.name,
    columns: order.columns,
    onProgress(progress) {
      const now = performance.now();
      if (now - told < TELL_EVERY_MS) return;
      told = now;
      answer({ kind: 'progress', progress });
    },
  });
  answer({ kind: 'done', analysis }, columnBuffers(analysis));
} catch (error) {
  if (error instanceof BendbookError) answer({ kind: 'fault', fault: error.fault });
  else throw error;
}

function answer(message: AnalysisAnswer, transfer: ArrayBuffer[] = []): void {
  port!.postMessage(message, transfer);
}

/** The columns of all profiles: handed over, not copied. */
function columnBuffers(analysis: Analysis): ArrayBuffer[] {
  const buffers = new Set<ArrayBuffer>();
  for (const { runs } of analysis.recordings) {
    for (const { profile } of runs) {
      for (const column of Object.values(profile) as unknown[]) {
        if (ArrayBuffer.isView(column)) buffers.add(column.buffer as ArrayBuffer);
      }
    }
  }
  return [...buffers];
}
