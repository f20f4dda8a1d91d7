import { createHash } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { mkdir, open, readdir, readFile, rename, rm, stat, writeFile } from 'node:fs/promises';
import { join } from 'node:path';

/** What is needed to list a recording again when the database is lost. */
export interface Sidecar {
  readonly id: string;
  readonly name: string;
  readonly bytes: number;
  readonly sha256: string;
  readonly uploadedUtcS: number;
  readonly demo: boolean;
  readonly mode: 'rail' | 'road' | null;
}

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
      const whole = name.endsWith('.json') || names.has(name.replace(/\.raw$/, '.json'));
      if (!whole || name.endsWith('.new')) await rm(join(this.#folder, name), { force: true });
    }
  }

  path(id: string): string {
    return join(this.#folder, `${id}.raw`);
  }

  /** Takes over an uploaded temporary file. On return it is on the disk under its final name. */
  async keep(temporary: string, sidecar: Sidecar): Promise<void> {
    await flush(temporary);
    await rename(temporary, this.path(sidecar.id));
    const json = join(this.#folder, `${sidecar.id}.json`);
    await writeFile(`${json}.new`, JSON.stringify(sidecar), { flush: true });
    await rename(`${json}.new`, json);
    await flush(this.#folder);
  }

  async remove(id: string): Promise<void> {
    // The JSON first: a raw file without it is swept at the next start.
    await rm(join(this.#folder, `${id}.json`), { force: true });
    await rm(this.path(id), { force: true });
  }

  async list(): Promise<Sidecar[]> {
    const found: Sidecar[] = [];
    for (const name of await readdir(this.#folder)) {
      if (name.endsWith('.json')) found.push(JSON.parse(await readFile(join(this.#folder, name), 'utf8')) as Sidecar);
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

async function flush(path: string): Promise<void> {
  const handle = await open(path, 'r');
  try {
    await handle.sync();
  } finally {
    await handle.close();
  }
}
