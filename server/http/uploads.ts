import { randomUUID } from 'node:crypto';
import { rm } from 'node:fs/promises';
import { join } from 'node:path';
import type { Request } from 'express';
import multer from 'multer';
import { BendbookError, type Fault } from '../../shared/model/fault.ts';
import type { ColumnNames, RecordingSummary } from '../../shared/schema/api.ts';
import type { JobQueue } from '../jobs/queue.ts';
import { fingerprint } from '../store/raw-files.ts';
import type { Store } from '../store/store.ts';

/** Names longer than this are cut. */
const LONGEST_NAME = 200;

/** Receives files to the disk as they come; nothing is held whole in memory, partial files are removed. */
export function uploadReceiver(store: Store, maxUploadBytes: number) {
  return multer({
    storage: multer.diskStorage({
      destination: store.raw.incoming,
      filename: (_request, _file, done) => {
        done(null, randomUUID());
      },
    }),
    limits: { fileSize: maxUploadBytes, files: 200, fields: 10, fieldSize: 100_000, parts: 220 },
    defParamCharset: 'utf8',
  }).array('file');
}

/** Stores what was received: each file whole and listed, or refused with its reason. */
export async function keepUploads(
  request: Request,
  columns: ColumnNames | null,
  store: Store,
  queue: JobQueue,
): Promise<{ recordings: RecordingSummary[]; refused: { name: string; fault: Fault }[] }> {
  const files = Array.isArray(request.files) ? request.files : [];
  if (files.length === 0) {
    throw new BendbookError('http/bad-request', {
      cause: 'no file was sent',
      remedy: 'Send files in the field "file"',
    });
  }
  const recordings: RecordingSummary[] = [];
  const refused: { name: string; fault: Fault }[] = [];
  for (const file of files) {
    const name = plainName(file.originalname);
    try {
      if (file.size === 0) {
        throw new BendbookError('ingest/empty', {
          cause: 'the file is empty',
          place: { file: name },
          remedy: 'Copy it from the logger again; the copy may have been cut off',
        });
      }
      recordings.push(await keepFile(file.path, name, columns, store, queue));
    } catch (error) {
      await rm(file.path, { force: true });
      if (!(error instanceof BendbookError)) throw error;
      refused.push({ name, fault: error.fault });
    }
  }
  return { recordings, refused };
}

async function keepFile(
  path: string,
  name: string,
  columns: ColumnNames | null,
  store: Store,
  queue: JobQueue,
): Promise<RecordingSummary> {
  const id = randomUUID();
  const { bytes, sha256 } = await fingerprint(path);
  await store.addRecording(path, { id, name, bytes, sha256, uploadedUtcS: Date.now() / 1000, demo: false, mode: null });
  if (columns !== null) await store.setColumnNames(id, columns);
  await queue.add(id);
  return (await store.recording(id))!;
}

/** The last part of a path that a client sent, without control characters: shown, never used as a path. */
export function plainName(sent: string): string {
  // eslint-disable-next-line no-control-regex -- control characters are what this removes
  const name = (sent.split(/[/\\]/).at(-1) ?? '').replace(/[\u0000-\u001f\u007f]/g, '').trim();
  return name === '' ? 'recording' : name.slice(-LONGEST_NAME);
}

/** Removes partial files after a failed upload. */
export async function dropUploads(request: Request): Promise<void> {
  const files = Array.isArray(request.files) ? request.files : [];
  for (const file of files) await rm(file.path, { force: true });
}

/** Path under the incoming folder for a file that the server itself brings in. */
export function incomingPath(store: Store): string {
  return join(store.raw.incoming, randomUUID());
}
