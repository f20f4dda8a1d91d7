import { createHash, randomUUID } from 'node:crypto';
import { rm } from 'node:fs/promises';
import { join } from 'node:path';
import type { Request, Response } from 'express';
import multer from 'multer';
import { BendbookError, type Fault } from '../../shared/model/fault.ts';
import type { ColumnNames, RecordingSummary } from '../../shared/schema/api.ts';
import type { JobQueue } from '../jobs/queue.ts';
import { diskFull, isDiskFull, requireRoom } from '../store/disk.ts';
import type { Store } from '../store/store.ts';

/** Names longer than this are cut. */
const LONGEST_NAME = 200;
const MOST_FILES = 200;

/** A file as it was received: its bytes are on the disk, its sum was made while they came. */
interface ReceivedFile extends Express.Multer.File {
  readonly sha256: string;
}

/**
 * Receives the files of a multipart request to the disk as they come; nothing is held whole in memory.
 * When this throws (limit exceeded, upload cut off, disk full), nothing of the request is left.
 */
export function uploadReceiver(
  store: Store,
  maxUploadBytes: number,
): (request: Request, response: Response) => Promise<void> {
  const receive = multer({
    storage: hashingStorage(store.raw.incoming),
    limits: { fileSize: maxUploadBytes, files: MOST_FILES, fields: 10, fieldSize: 100_000, parts: MOST_FILES + 20 },
    defParamCharset: 'utf8',
  }).array('file');
  return async (request, response) => {
    await requireRoom(store.raw.incoming, Number(request.headers['content-length'] ?? 0));
    await new Promise<void>((resolve, reject) => {
      receive(request, response, (error: unknown) => {
        if (error instanceof Error) reject(error);
        else resolve();
      });
    });
  };
}

/** multer's disk storage, with the SHA-256 of each file taken on its way. */
function hashingStorage(folder: string): multer.StorageEngine {
  const disk = multer.diskStorage({
    destination(_request, _file, done) {
      done(null, folder);
    },
    filename(_request, _file, done) {
      done(null, randomUUID());
    },
  });
  return {
    _handleFile(request, file, done) {
      const sum = createHash('sha256');
      file.stream.on('data', (chunk: Buffer) => sum.update(chunk));
      disk._handleFile(request, file, (error?: unknown, info?: Partial<Express.Multer.File>) => {
        done(error, info === undefined ? undefined : ({ ...info, sha256: sum.digest('hex') } as Partial<ReceivedFile>));
      });
    },
    _removeFile(request, file, done) {
      disk._removeFile(request, file, done);
    },
  };
}

/** Stores what was received: each file whole and listed, or refused with its reason. */
export async function keepUploads(
  request: Request,
  columns: ColumnNames,
  store: Store,
  queue: JobQueue,
): Promise<{ recordings: RecordingSummary[]; refused: { name: string; fault: Fault }[] }> {
  const files = receivedFiles(request);
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
    if (file.size === 0) {
      await rm(file.path, { force: true });
      refused.push({ name, fault: emptyFault(name) });
      continue;
    }
    try {
      recordings.push(await keepFile(file, name, columns, store, queue));
    } catch (error) {
      await rm(file.path, { force: true });
      if (!isDiskFull(error) || files.length === 1) throw error;
      refused.push({ name, fault: diskFull('the disk is full').fault });
    }
  }
  return { recordings, refused };
}

/** One received file: listed and queued, or, when this throws, as if it had never come. */
async function keepFile(
  file: ReceivedFile,
  name: string,
  columns: ColumnNames,
  store: Store,
  queue: JobQueue,
): Promise<RecordingSummary> {
  const id = randomUUID();
  await store.addRecording(file.path, {
    id,
    name,
    title: null,
    bytes: file.size,
    sha256: file.sha256,
    uploadedUtcS: Date.now() / 1000,
    demo: false,
    mode: null,
    columns,
  });
  try {
    await queue.add(id);
  } catch (error) {
    await store.removeRecording(id);
    throw error;
  }
  return (await store.recording(id))!;
}

function emptyFault(file: string): Fault {
  return {
    code: 'ingest/empty',
    cause: 'the file is empty (0 bytes)',
    place: { file, byte: 0 },
    remedy: 'Copy it from the logger again; the copy may have been cut off',
  };
}

/** The last part of a path that a client sent, without control characters: shown, never used as a path. */
export function plainName(sent: string): string {
  // eslint-disable-next-line no-control-regex -- control characters are what this removes
  const name = (sent.split(/[/\\]/).at(-1) ?? '').replace(/[\u0000-\u001f\u007f]/g, '').trim();
  return name === '' ? 'recording' : name.slice(-LONGEST_NAME);
}

/** Removes what is left of the files of a request that failed after they were received. */
export async function dropUploads(request: Request): Promise<void> {
  for (const file of receivedFiles(request)) await rm(file.path, { force: true });
}

/** Path under the incoming folder for a file that the server itself brings in. */
export function incomingPath(store: Store): string {
  return join(store.raw.incoming, randomUUID());
}

function receivedFiles(request: Request): ReceivedFile[] {
  return Array.isArray(request.files) ? (request.files as ReceivedFile[]) : [];
}
