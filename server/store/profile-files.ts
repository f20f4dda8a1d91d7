import { mkdir, readdir, readFile, rename, rm, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { BendbookError } from '../../shared/model/fault.ts';
import type { Profile } from '../../shared/model/motion.ts';

/** Columns of a profile in the order in which they lie in the file; names and element types are the format. */
const LAYOUT = [
  ['chainageM', Float64Array],
  ['timeS', Float64Array],
  ['latDeg', Float64Array],
  ['lonDeg', Float64Array],
  ['elevationM', Float32Array],
  ['speedMps', Float32Array],
  ['speedSdMps', Float32Array],
  ['courseRad', Float32Array],
  ['accelerationMps2', Float32Array],
  ['curvaturePerM', Float32Array],
  ['curvatureSdPerM', Float32Array],
  ['speedCurvatureCorrelation', Float32Array],
  ['fittedCurvaturePerM', Float32Array],
  ['positionSdM', Float32Array],
  ['observed', Uint8Array],
] as const;

/** First bytes of a profile file: name and version of the format. */
const MAGIC = 'BBPROF01';
/** Magic, count (uint32), padding, spacing (float64). */
const HEADER_BYTES = 24;

/** Profiles of runs as binary columns, one file a run, `profiles/<run>.bin`; kept out of the database for their size. */
export class ProfileFiles {
  readonly #folder: string;

  constructor(dataDir: string) {
    this.#folder = join(dataDir, 'profiles');
  }

  async prepare(): Promise<void> {
    await mkdir(this.#folder, { recursive: true });
  }

  async write(runId: string, profile: Profile): Promise<void> {
    const path = this.path(runId);
    await writeFile(`${path}.new`, encodeProfile(profile), { flush: true });
    await rename(`${path}.new`, path);
  }

  async read(runId: string): Promise<Profile> {
    try {
      return decodeProfile(await readFile(this.path(runId)));
    } catch (error) {
      throw new BendbookError(
        'store/result-missing',
        {
          cause: `the profile of this run cannot be read: ${error instanceof Error ? error.message : String(error)}`,
          remedy: 'Analyse the recording again',
        },
        { cause: error },
      );
    }
  }

  async remove(runId: string): Promise<void> {
    await rm(this.path(runId), { force: true });
  }

  /** Removes files of runs that are no longer listed. */
  async sweep(runIds: ReadonlySet<string>): Promise<void> {
    for (const name of await readdir(this.#folder)) {
      if (!runIds.has(name.replace(/\.bin$/, ''))) await rm(join(this.#folder, name), { force: true });
    }
  }

  path(runId: string): string {
    return join(this.#folder, `${runId}.bin`);
  }
}

export function encodeProfile(profile: Profile): Buffer {
  const parts: Buffer[] = [Buffer.alloc(HEADER_BYTES)];
  parts[0]!.write(MAGIC, 0, 'latin1');
  parts[0]!.writeUInt32LE(profile.count, 8);
  parts[0]!.writeDoubleLE(profile.spacingM, 16);
  for (const [name] of LAYOUT) {
    const column = profile[name];
    parts.push(Buffer.from(column.buffer, column.byteOffset, column.byteLength));
  }
  return Buffer.concat(parts);
}

export function decodeProfile(bytes: Buffer): Profile {
  if (bytes.toString('latin1', 0, 8) !== MAGIC) throw new Error('not a profile file of this version');
  const count = bytes.readUInt32LE(8);
  const bytesPerPlace = LAYOUT.reduce((sum, [, Column]) => sum + Column.BYTES_PER_ELEMENT, 0);
  if (bytes.length !== HEADER_BYTES + count * bytesPerPlace) throw new Error('the profile file is cut off');
  const profile: Record<string, unknown> = { count, spacingM: bytes.readDoubleLE(16) };
  let offset = HEADER_BYTES;
  for (const [name, Column] of LAYOUT) {
    const length = count * Column.BYTES_PER_ELEMENT;
    // Copied, not viewed: columns after an odd count of bytes would lie off their alignment.
    profile[name] = new Column(new Uint8Array(bytes.subarray(offset, offset + length)).buffer);
    offset += length;
  }
  return profile as unknown as Profile;
}
