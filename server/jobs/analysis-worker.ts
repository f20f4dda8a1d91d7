import { move, transferableSymbol, valueSymbol } from 'piscina';
import { BendbookError } from '../../shared/model/fault.ts';
import { analyseFile, type Analysis, type Progress } from '../pipeline.ts';
import type { AnalysisAnswer, AnalysisOrder } from './messages.ts';

/** Progress is told at most this often, ms; a new stage is told at once. */
const TELL_EVERY_MS = 150;

/** Analyses one file in a thread of the pool. */
export default async function analyse({ path, name, columns, port }: AnalysisOrder): Promise<unknown> {
  let told = 0;
  let stage: Progress['stage'] | null = null;
  try {
    const analysis = await analyseFile(path, {
      name,
      columns,
      onProgress(progress) {
        const now = performance.now();
        if (progress.stage === stage && now - told < TELL_EVERY_MS) return;
        told = now;
        stage = progress.stage;
        port.postMessage(progress);
      },
    });
    return handOver({ analysis }, columnBuffers(analysis));
  } catch (error) {
    if (!(error instanceof BendbookError)) throw error;
    return { fault: error.fault } satisfies AnalysisAnswer;
  } finally {
    port.close();
  }
}

/** The answer with buffers that change hands instead of being copied. */
function handOver(answer: AnalysisAnswer, buffers: ArrayBuffer[]): unknown {
  return move({ [transferableSymbol]: buffers, [valueSymbol]: answer });
}

/** The columns of all profiles. */
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
