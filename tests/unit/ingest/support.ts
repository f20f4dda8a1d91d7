import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { ingestFile, type IngestOptions, type IngestResult } from '../../../server/ingest/index.ts';
import type { Recording } from '../../../shared/model/recording.ts';

let folder = '';
let next = 0;

/** Path of a temporary file with this content; removed after the tests of the file. */
export function temporaryFile(content: string | Uint8Array, name = 'log'): string {
  if (folder === '') {
    folder = mkdtempSync(join(tmpdir(), 'bendbook-ingest-'));
    afterAllRemove();
  }
  const path = join(folder, `${String(next++)}-${name}`);
  writeFileSync(path, content);
  return path;
}

function afterAllRemove(): void {
  process.once('exit', () => {
    rmSync(folder, { recursive: true, force: true });
  });
}

export async function ingest(
  content: string | Uint8Array,
  options: Partial<IngestOptions> = {},
): Promise<IngestResult> {
  return await ingestFile(temporaryFile(content), { name: 'log', ...options });
}

/** The one recording of a log; fails with the refusal otherwise. */
export async function recordingOf(
  content: string | Uint8Array,
  options: Partial<IngestOptions> = {},
): Promise<Recording> {
  const { recordings, refused } = await ingest(content, options);
  if (refused[0] !== undefined) throw new Error(`${refused[0].fault.code}: ${refused[0].fault.cause}`);
  return recordings[0]!;
}

/** Code of the refusal of a log; fails when it is read. */
export async function refusalOf(content: string | Uint8Array, options: Partial<IngestOptions> = {}) {
  const { recordings, refused } = await ingest(content, options);
  if (refused.length !== 1 || recordings.length !== 0) throw new Error(`read ${String(recordings.length)} recordings`);
  return refused[0]!.fault;
}

export const codes = (recording: Recording) => recording.findings.map(({ code }) => code);

/** NMEA sentence with its checksum: exclusive or of the characters between `$` and `*` (NMEA 0183). */
export function sentence(body: string): string {
  let sum = 0;
  for (let i = 0; i < body.length; i++) sum ^= body.charCodeAt(i);
  return `$${body}*${sum.toString(16).toUpperCase().padStart(2, '0')}\r\n`;
}
