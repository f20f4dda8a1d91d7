import { BendbookError, type Fault } from '../../shared/model/fault.ts';
import type { Recording } from '../../shared/model/recording.ts';
import type { ColumnNames } from '../../shared/schema/api.ts';
import { requireUsable } from './acceptance.ts';
import { gunzipped, isGzip, isZip, zipMembers } from './archive.ts';
import { fileSource, readHead, type ByteSource } from './byte-source.ts';
import { previewDelimited, type DelimitedPreview } from './delimited/preview.ts';
import { detectEncoding } from './encoding.ts';
import { FORMATS, type Head } from './formats.ts';
import { DEFAULT_MAX_FIXES, type IngestOptions, type IngestResult, type ReadContext } from './options.ts';

export type { DelimitedPreview } from './delimited/preview.ts';
export type { IngestOptions, IngestResult } from './options.ts';

/** Enough to see past a preamble and the first of other messages. */
const HEAD_BYTES = 1 << 16;

/** First bytes of a source for the recognisers. */
async function headOf(source: ByteSource): Promise<Head> {
  const bytes = await readHead(source, HEAD_BYTES);
  return { bytes, text: new TextDecoder(detectEncoding(bytes)).decode(bytes).replaceAll('\0', '') };
}

/** Archives inside archives are opened this deep. */
const MAX_NESTING = 2;

/** Gathers the outcome of one file: each log a recording or a refusal. */
class Ingestion {
  readonly recordings: Recording[] = [];
  readonly refused: { name: string; fault: Fault }[] = [];
  readonly #context: ReadContext;
  readonly #signal: AbortSignal | undefined;

  constructor(context: ReadContext, signal: AbortSignal | undefined) {
    this.#context = context;
    this.#signal = signal;
  }

  /**
   * Reads a log or the members of an archive. Throws only when cancelled.
   * @param path The file itself where `source` is a file on disk.
   */
  async take(source: ByteSource, path: string | null, nesting: number): Promise<void> {
    try {
      this.#signal?.throwIfAborted();
      const head = await headOf(source);
      if (isGzip(head.bytes) || isZip(head.bytes)) await this.#archive(source, path, head, nesting);
      else this.recordings.push(await this.#log(source, head));
    } catch (error) {
      this.refuse(source.name, error);
    }
  }

  refuse(name: string, error: unknown): void {
    if (this.#signal?.aborted === true) throw error;
    this.refused.push({ name, fault: faultOf(error, name) });
  }

  async #archive(source: ByteSource, path: string | null, head: Head, nesting: number): Promise<void> {
    if (nesting >= MAX_NESTING) {
      throw new BendbookError('ingest/nested-archive', {
        cause: 'The archive holds archives in archives',
        place: { file: source.name },
        remedy: 'Unpack it yourself and load the logs',
      });
    }
    if (isGzip(head.bytes)) {
      await this.take(gunzipped(source), null, nesting + 1);
      return;
    }
    let members = 0;
    for await (const member of zipMembers(source, path)) {
      members++;
      if ('error' in member) this.refuse(member.name, member.error);
      else await this.take(member.source, null, nesting + 1);
    }
    if (members === 0) {
      throw new BendbookError('ingest/empty', {
        cause: 'The archive holds no files',
        place: { file: source.name },
        remedy: 'Pack the logs again',
      });
    }
  }

  /** Reads one log of any format. Throws BendbookError when nothing can come of it. */
  async #log(source: ByteSource, head: Head): Promise<Recording> {
    if (head.text.trim() === '') {
      throw new BendbookError('ingest/empty', {
        cause: head.bytes.length === 0 ? 'The file is empty (0 bytes)' : 'The file holds nothing but blanks',
        place: { file: source.name, byte: 0 },
        remedy: 'Export or copy the log again: it was not written or not transferred',
      });
    }
    const format = FORMATS.find(({ recognises }) => recognises(head));
    if (format !== undefined) return requireUsable(await format.read(source, this.#context));
    throw new BendbookError('ingest/not-a-log', {
      cause: 'The content is of no format that is known here',
      place: { file: source.name, byte: 0 },
      remedy: `Use one of: ${FORMATS.map(({ name }) => name.toUpperCase()).join(', ')}, or a zip or gzip archive of them`,
    });
  }
}

/** The fault of anything thrown while reading: ours as it is, the rest as damage. */
function faultOf(error: unknown, name: string): Fault {
  if (error instanceof BendbookError) {
    return { ...error.fault, place: { file: name, ...error.fault.place } };
  }
  return {
    code: 'ingest/damaged',
    cause: `The file is damaged: ${error instanceof Error ? error.message : String(error)}`,
    place: { file: name },
    remedy: 'Export the log again, or convert it to GPX, NMEA or CSV',
  };
}

/**
 * Reads a file of any known format, told by its content: one recording for a log, one for each member
 * for an archive. What cannot be used is in `refused` with its cause and remedy; this function throws
 * only when `options.signal` aborts.
 */
export async function ingestFile(path: string, options: IngestOptions): Promise<IngestResult> {
  const { name, signal, columns = {}, maxFixes = DEFAULT_MAX_FIXES } = options;
  const ingestion = new Ingestion({ columns, maxFixes }, signal);
  try {
    const source = await fileSource(path, name, signal, options.onProgress?.bind(options));
    await ingestion.take(source, path, 0);
  } catch (error) {
    ingestion.refuse(name, error);
  }
  return { recordings: ingestion.recordings, refused: ingestion.refused };
}

const PREVIEW_ROWS = 20;

/**
 * First look at a delimited file: what each column is taken for, the headers and the first rows.
 * Null for files of any other format. Throws BendbookError when the file cannot be read.
 */
export async function previewFile(
  path: string,
  name: string,
  columns: ColumnNames = {},
): Promise<DelimitedPreview | null> {
  const source = await fileSource(path, name);
  const head = await headOf(source);
  const format = FORMATS.find(({ recognises }) => recognises(head));
  return format?.name === 'csv' ? await previewDelimited(source, columns, PREVIEW_ROWS) : null;
}
