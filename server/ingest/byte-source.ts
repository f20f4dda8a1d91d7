import { open, stat } from 'node:fs/promises';
import { BendbookError } from '../../shared/model/fault.ts';

/** Bytes that can be read from the start as often as needed. */
export interface ByteSource {
  readonly name: string;
  /** Size in bytes, or the number announced by an archive. */
  readonly bytes: number;
  /** Chunks in order. A chunk may be overwritten once the next is asked for: copy what must last. */
  open(): AsyncIterable<Uint8Array>;
}

const CHUNK_BYTES = 1 << 18;

/** A file on disk. Throws `ingest/unreadable` when it cannot be opened. */
export async function fileSource(
  path: string,
  name: string,
  signal?: AbortSignal,
  onProgress?: (bytesRead: number, bytesTotal: number) => void,
): Promise<ByteSource> {
  const unreadable = (error: unknown) =>
    new BendbookError(
      'ingest/unreadable',
      {
        cause: `The file cannot be read: ${error instanceof Error ? error.message : String(error)}`,
        place: { file: name },
        remedy: 'Check that it exists and that this program may read it',
      },
      { cause: error },
    );
  const bytes = await stat(path).then(
    (found) => {
      if (!found.isFile()) throw unreadable(new Error('it is not a regular file'));
      return found.size;
    },
    (error: unknown) => {
      throw unreadable(error);
    },
  );
  return {
    name,
    bytes,
    async *open() {
      const handle = await open(path).catch((error: unknown) => {
        throw unreadable(error);
      });
      try {
        const buffer = new Uint8Array(CHUNK_BYTES);
        let total = 0;
        for (;;) {
          signal?.throwIfAborted();
          const { bytesRead } = await handle.read(buffer, 0, CHUNK_BYTES, total);
          if (bytesRead === 0) return;
          total += bytesRead;
          onProgress?.(total, bytes);
          yield buffer.subarray(0, bytesRead);
        }
      } finally {
        await handle.close();
      }
    },
  };
}

/** Bytes already in memory. */
export function memorySource(name: string, content: Uint8Array): ByteSource {
  return {
    name,
    bytes: content.length,
    // eslint-disable-next-line @typescript-eslint/require-await -- an async iterable by contract
    async *open() {
      for (let at = 0; at < content.length; at += CHUNK_BYTES) yield content.subarray(at, at + CHUNK_BYTES);
    },
  };
}

/** The first `limit` bytes. */
export async function readHead(source: ByteSource, limit: number): Promise<Uint8Array> {
  const head = new Uint8Array(limit);
  let length = 0;
  for await (const chunk of source.open()) {
    const part = chunk.subarray(0, limit - length);
    head.set(part, length);
    length += part.length;
    if (length === limit) break;
  }
  return head.subarray(0, length);
}

/** Everything, for formats that cannot be read in a stream. Throws `ingest/too-large` above `limit` bytes. */
export async function readAll(source: ByteSource, limit: number): Promise<Uint8Array> {
  const parts: Uint8Array[] = [];
  let length = 0;
  for await (const chunk of source.open()) {
    length += chunk.length;
    if (length > limit) {
      throw new BendbookError('ingest/too-large', {
        cause: `The file is larger than the ${(limit / 1e6).toFixed(0)} MB that can be read of this format`,
        place: { file: source.name, byte: limit },
        remedy: 'Split it, or export it as GPX, NMEA or CSV, which are read in a stream',
      });
    }
    parts.push(chunk.slice());
  }
  const whole = new Uint8Array(length);
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}
