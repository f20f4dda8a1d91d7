import { createHash } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { mkdir, open, readdir, readFile, rename, rm, stat, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import type { Readable } from 'node:stream';
import { z } from 'zod';
import { BendbookError } from '../../shared/model/fault.ts';
import { ColumnNames } from '../../shared/schema/api.ts';
import { Mode } from '../../shared/schema/common.ts';

/** What is needed to list a recording again when the database is lost: the JSON beside each raw file. */
const Sidecar = z.object({
  id: z.string(),
  name: z.string(),
  title: z.string().nullable(),
  bytes: z.number(),
  sha256: z.string(),
  uploadedUtcS: z.number(),
  demo: z.boolean(),
  mode: Mode.nullable(),
  columns: ColumnNames,
});
export type Sidecar = z.infer<typeof Sidecar>;

export const RAW_MISSING = {
  cause: 'the uploaded file is no longer in the data folder',
  remedy: 'Results made from it are kept; upload it again to analyse it anew',
};

/**
 * Uploaded files, byte for byte, each with a small JSON beside it: `<id>.raw` and `<id>.json` under
 * `recordings/`. A file is whole under its final name or not there: it is written under `incoming/`,
 * brought to the disk and renamed; the JSON follows last and marks it complete.
 */
export class RawFiles {
  readonly incoming: string;
  readonly #folder: string;

  constructor(dataDir: string) {
    this.incoming = join(dataDir, 'incoming');
    this.#folder = join(dataDir, 'recordings');
  }

  /** Makes the folders and sweeps what a killed server left half made. */
  async prepare(): Promise<void> {
    await rm(this.incoming, { recursive: true, force: true });
    await mkdir(this.incoming, { recursive: true });
    await mkdir(this.#folder, { recursive: true });
    const names = new Set(await readdir(this.#folder));
    for (const name of names) {
      const halfMade = name.endsWith('.raw') && !names.has(name.replace(/\.raw$/, '.json'));
      const rawGone = name.endsWith('.json') && !names.has(name.replace(/\.json$/, '.raw'));
      if (halfMade || rawGone || name.endsWith('.new')) await rm(join(this.#folder, name), { force: true });
    }
  }

  path(id: string): string {
    return join(this.#folder, `${id}.raw`);
  }

  /**
   * The bytes of a recording.
   *
   * @throws BendbookError `store/raw-missing` when somebody took the file away.
   */
  async read(id: string): Promise<Readable> {
    try {
      return (await open(this.path(id), 'r')).createReadStream();
    } catch (error) {
      throw new BendbookError('store/raw-missing', RAW_MISSING, { cause: error });
    }
  }

  /** Takes over an uploaded temporary file. On return it is on the disk under its final name. */
  async keep(temporary: string, sidecar: Sidecar): Promise<void> {
    await flush(temporary, 'r+');
    await rename(temporary, this.path(sidecar.id));
    const json = join(this.#folder, `${sidecar.id}.json`);
    await writeFile(`${json}.new`, JSON.stringify(sidecar), { flush: true });
    await rename(`${json}.new`, json);
    // Windows brings a renamed entry to the disk with its file and does not open folders.
    if (process.platform !== 'win32') await flush(this.#folder, 'r');
  }

  async remove(id: string): Promise<void> {
    // The JSON first: a raw file without it is swept at the next start.
    await rm(join(this.#folder, `${id}.json`), { force: true });
    await rm(this.path(id), { force: true });
    await rm(join(this.#folder, `${id}.json.new`), { force: true });
  }

  /** All whole files, oldest first; one whose JSON cannot be read is described from its bytes. */
  async list(): Promise<Sidecar[]> {
    const found: Sidecar[] = [];
    for (const name of await readdir(this.#folder)) {
      if (!name.endsWith('.json')) continue;
      const id = name.replace(/\.json$/, '');
      found.push((await readSidecar(join(this.#folder, name))) ?? (await describeRaw(id, this.path(id))));
    }
    return found.sort((a, b) => a.uploadedUtcS - b.uploadedUtcS);
  }
}

/** Size and SHA-256 of a file, read as a stream. */
export async function fingerprint(path: string): Promise<{ bytes: number; sha256: string }> {
  const sum = createHash('sha256');
  for await (const chunk of createReadStream(path)) sum.update(chunk as Buffer);
  return { bytes: (await stat(path)).size, sha256: sum.digest('hex') };
}

async function readSidecar(path: string): Promise<Sidecar | null> {
  try {
    return Sidecar.parse(JSON.parse(await readFile(path, 'utf8')));
  } catch (error) {
    // Unreadable text or other fields: the recording itself is there all the same.
    if (error instanceof SyntaxError || error instanceof z.ZodError) return null;
    throw error;
  }
}

async function describeRaw(id: string, path: string): Promise<Sidecar> {
  const { bytes, sha256 } = await fingerprint(path);
  const uploadedUtcS = (await stat(path)).mtimeMs / 1000;
  return { id, name: id, title: null, bytes, sha256, uploadedUtcS, demo: false, mode: null, columns: {} };
}

async function flush(path: string, flags: 'r' | 'r+'): Promise<void> {
  const handle = await open(path, flags);
  try {
    await handle.sync();
  } finally {
    await handle.close();
  }
}
