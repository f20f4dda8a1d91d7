import { BendbookError, type Fault } from '../../shared/model/fault.ts';
import { isDiskFull } from '../store/disk.ts';

export const CANCELLED: Fault = {
  code: 'jobs/cancelled',
  cause: 'the analysis was cancelled',
  place: {},
  remedy: 'Start it again from the list of recordings',
};

/** A thread that ended, or threw something that is not ours. */
export function crashFault(file: string, crash: unknown): Fault {
  const outOfMemory = (crash as { code?: string } | null)?.code === 'ERR_WORKER_OUT_OF_MEMORY';
  return {
    code: outOfMemory ? 'jobs/out-of-memory' : 'jobs/ended',
    cause: outOfMemory
      ? 'the analysis needed more memory than it may use'
      : `the analysis ended before it had a result (${crash instanceof Error ? crash.message : String(crash)})`,
    place: { file },
    remedy: outOfMemory
      ? 'Split the recording into shorter ones'
      : 'Start it again; if it ends again, keep the recording and report it to the makers of this program',
  };
}

/** A result that could not be kept. */
export function storeFault(file: string, error: unknown): Fault {
  if (error instanceof BendbookError) return error.fault;
  const full = isDiskFull(error);
  return {
    code: full ? 'store/disk-full' : 'store/not-written',
    cause: full ? 'the disk is full' : 'the result could not be written',
    place: { file },
    remedy: full
      ? 'Free some space in the data folder, then start the analysis again'
      : 'Check the data folder, then start the analysis again',
  };
}

export function interruptedFault(file: string, attempts: number): Fault {
  return {
    code: 'jobs/interrupted',
    cause: `the server ended ${String(attempts)} times while this recording was analysed`,
    place: { file },
    remedy: 'Start it again from the list of recordings; if the server ends again, split the recording',
  };
}
