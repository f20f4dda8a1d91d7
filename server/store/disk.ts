import { statfs } from 'node:fs/promises';
import { BendbookError } from '../../shared/model/fault.ts';

/** Room that uploads leave on the disk for results and for the database, bytes. */
const RESERVE_BYTES = 16 * 1024 * 1024;

/** True for the errors that a file or the database gives when the disk has no room left. */
export function isDiskFull(error: unknown): boolean {
  const { code, cause } = error as { code?: string; cause?: unknown };
  if (code === 'ENOSPC' || code === 'EDQUOT') return true;
  if (/database or disk is full/i.test(String(error))) return true;
  return cause !== undefined && isDiskFull(cause);
}

/**
 * Makes sure that `bytes` more fit on the disk of a folder.
 *
 * @throws BendbookError `store/disk-full`
 */
export async function requireRoom(folder: string, bytes: number): Promise<void> {
  const { bavail, bsize } = await statfs(folder);
  if (bavail * bsize >= bytes + RESERVE_BYTES) return;
  throw diskFull(`the disk has no room for ${String(Math.ceil(bytes / 1e6))} MB more`);
}

export function diskFull(cause: string): BendbookError {
  return new BendbookError('store/disk-full', {
    cause,
    remedy: 'Free some space on the disk of the data folder, or delete recordings, and try again',
  });
}
