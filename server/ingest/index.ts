import { BendbookError, type Fault } from '../../shared/model/fault.ts';
import type { Recording } from '../../shared/model/recording.ts';
import type { ColumnNames } from '../../shared/schema/api.ts';
import { requireUsable } from './acceptance.ts';
import { fileSource, readHead, type ByteSource } from './byte-source.ts';
import { previewDelimited, type DelimitedPreview } from './delimited/preview.ts';
import { detectEncoding } from './encoding.ts';
import { FORMATS, type Head } from './formats.ts';
import { DEFAULT_MAX_FIXES, type IngestOptions, type IngestResult, type ReadContext } from './options.ts';

export type { DelimitedPreview } from './delimited/preview.ts';
export { COLUMN_FIELDS } from './delimited/columns.ts';
export type { IngestOptions, IngestResult } from './options.ts';

/** Enough to see past a preamble and the first of other messages. */
const HEAD_BYTES = 1 << 16;

/** First bytes of a source for the recognisers. */
export async function headOf(source: ByteSource): Promise<Head> {
  const bytes = await readHead(source, HEAD_BYTES);
  return { bytes, text: new TextDecoder(detectEncoding(bytes)).decode(bytes).replaceAll('\0', '') };
}

/** Reads one log of any format. Throws BendbookError when nothing can come of it. */
async function readOne(source: ByteSource, context: ReadContext): Promise<Recording> {
  const head = await headOf(source);
  if (head.text.trim() === '') {
    throw new BendbookError('ingest/empty', {
      cause: head.bytes.length === 0 ? 'The file is empty (0 bytes)' : 'The file holds nothing but blanks',
      place: { file: source.name, byte: 0 },
      remedy: 'Export or copy the log again: it was not written or not transferred',
    });
  }
  for (const format of FORMATS) {
    if (format.recognises(head)) return requireUsable(await format.read(source, context));
  }
  throw new BendbookError('ingest/not-a-log', {
    cause: 'The content is of no format that is known here',
    place: { file: source.name, byte: 0 },
    remedy: `Use one of: ${FORMATS.map(({ name }) => name.toUpperCase()).join(', ')}`,
  });
}

/** The fault of anything thrown while reading: ours as it is, a cancellation passed on, the rest as damage. */
function faultOf(error: unknown, name: string, signal: AbortSignal | undefined): Fault {
  if (signal?.aborted === true) throw error;
  if (error instanceof BendbookError) return error.fault;
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
  const recordings: Recording[] = [];
  const refused: { name: string; fault: Fault }[] = [];
  const context: ReadContext = {
    columns: options.columns ?? {},
    maxFixes: options.maxFixes ?? DEFAULT_MAX_FIXES,
  };
  try {
    const source = await fileSource(path, options.name, options.signal, options.onProgress?.bind(options));
    recordings.push(await readOne(source, context));
  } catch (error) {
    refused.push({ name: options.name, fault: faultOf(error, options.name, options.signal) });
  }
  return { recordings, refused };
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
