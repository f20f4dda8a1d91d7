import { createGunzip } from 'node:zlib';
import { Readable } from 'node:stream';
import yauzl, { type Entry, type ZipFile } from 'yauzl';
import { BendbookError } from '../../shared/model/fault.ts';
import { readAll, type ByteSource } from './byte-source.ts';

/** Entries of an archive that are looked at. */
const MAX_MEMBERS = 1000;
/** Unpacked bytes of one archive, all members together. */
const MAX_UNPACKED = 4 * 2 ** 30;
/** Unpacked size above which the ratio of packing is judged, and the ratio no log reaches. */
const RATIO_FROM = 64 << 20;
const MAX_RATIO = 250;
/** An archive inside an archive is read into memory, up to this. */
const MAX_NESTED_BYTES = 64 << 20;

export function isGzip(bytes: Uint8Array): boolean {
  return bytes[0] === 0x1f && bytes[1] === 0x8b && bytes[2] === 8;
}

export function isZip(bytes: Uint8Array): boolean {
  return (
    bytes[0] === 0x50 && bytes[1] === 0x4b && ((bytes[2] === 3 && bytes[3] === 4) || (bytes[2] === 5 && bytes[3] === 6))
  );
}

function bomb(file: string): BendbookError {
  return new BendbookError('ingest/archive-too-large', {
    cause: 'The archive unpacks to more than any log would',
    place: { file },
    remedy: 'Unpack it yourself and load the logs one by one',
  });
}

function damaged(file: string, error: unknown): BendbookError {
  return new BendbookError(
    'ingest/damaged-archive',
    {
      cause: `The archive is damaged: ${error instanceof Error ? error.message : String(error)}`,
      place: { file },
      remedy: 'Copy or pack it again',
    },
    { cause: error },
  );
}

/** What a gzip file holds, unpacked as it is read. Throws `ingest/damaged-archive`, `ingest/archive-too-large` while reading. */
export function gunzipped(source: ByteSource): ByteSource {
  return {
    name: source.name.replace(/\.gz$/i, ''),
    bytes: source.bytes,
    async *open() {
      const gunzip = createGunzip();
      // Chunks of a source are overwritten by the next: the unpacker works later, on its own copy.
      const copies = async function* () {
        for await (const chunk of source.open()) yield chunk.slice();
      };
      const packed = Readable.from(copies());
      let failure: unknown = null;
      packed.on('error', (error) => {
        failure = error;
        gunzip.destroy(error);
      });
      packed.pipe(gunzip);
      let total = 0;
      try {
        for await (const chunk of gunzip as AsyncIterable<Buffer>) {
          total += chunk.length;
          if (total > MAX_UNPACKED || (total > RATIO_FROM && total > MAX_RATIO * source.bytes)) throw bomb(source.name);
          yield chunk;
        }
      } catch (error) {
        if (error instanceof BendbookError || failure !== null) throw error;
        throw damaged(source.name, error);
      } finally {
        packed.destroy();
        gunzip.destroy();
      }
    },
  };
}

/** One member of an archive: its bytes, or why it cannot be read. */
export type Member =
  | { readonly name: string; readonly source: ByteSource }
  | { readonly name: string; readonly error: BendbookError };

/** Names that operating systems put beside the members: never logs. */
const LITTER = /(^|\/)(__MACOSX\/|\.DS_Store$|Thumbs\.db$|\._)/;

/**
 * The members of a zip file one after another, in its order; directories left out. Names are only shown, never used as
 * paths; those that would leave a folder are refused all the same. Throws `ingest/damaged-archive`.
 * @param path The file on disk, or null for an archive inside another.
 */
export async function* zipMembers(source: ByteSource, path: string | null): AsyncGenerator<Member> {
  const options = { lazyEntries: true, autoClose: false, decodeStrings: false, validateEntrySizes: true } as const;
  const zip = await new Promise<ZipFile>((resolve, reject) => {
    const done = (error: Error | null, file?: ZipFile) =>
      file === undefined ? reject(damaged(source.name, error)) : resolve(file);
    if (path !== null) yauzl.open(path, options, done);
    else {
      readAll(source, MAX_NESTED_BYTES).then((bytes) => {
        yauzl.fromBuffer(Buffer.from(bytes.buffer, bytes.byteOffset, bytes.length), options, done);
      }, reject);
    }
  });
  try {
    let members = 0;
    const budget = { unpacked: 0 };
    for (;;) {
      const entry = await nextEntry(zip, source.name);
      if (entry === null) return;
      const name = entryName(entry);
      if (name.endsWith('/') || LITTER.test(name)) continue;
      if (++members > MAX_MEMBERS) {
        yield {
          name: source.name,
          error: new BendbookError('ingest/too-many-members', {
            cause: `The archive holds more than ${MAX_MEMBERS} files: those after the first ${MAX_MEMBERS} were not looked at`,
            place: { file: source.name },
            remedy: 'Split the archive',
          }),
        };
        return;
      }
      yield memberOf(zip, entry, name, source.name, budget);
    }
  } finally {
    zip.close();
  }
}

/** The next entry, or null at the end. */
function nextEntry(zip: ZipFile, file: string): Promise<Entry | null> {
  return new Promise((resolve, reject) => {
    const settle = (act: () => void) => {
      zip.removeAllListeners('entry').removeAllListeners('end').removeAllListeners('error');
      // A late error must not end the process.
      zip.on('error', () => undefined);
      act();
    };
    zip.removeAllListeners('error');
    zip.once('entry', (entry: Entry) => settle(() => resolve(entry)));
    zip.once('end', () => settle(() => resolve(null)));
    zip.once('error', (error: Error) => settle(() => reject(damaged(file, error))));
    zip.readEntry();
  });
}

/** UTF-8 where the entry says so or the bytes are; else Latin-1. */
function entryName(entry: Entry): string {
  const raw = entry.fileName as unknown as Buffer;
  try {
    return new TextDecoder('utf-8', { fatal: true }).decode(raw);
  } catch {
    return raw.toString('latin1');
  }
}

function memberOf(zip: ZipFile, entry: Entry, member: string, archive: string, budget: { unpacked: number }): Member {
  const name = `${archive}/${member}`;
  const refuse = (code: string, cause: string, remedy: string): Member => ({
    name,
    error: new BendbookError(code, { cause, place: { file: name }, remedy }),
  });
  if (yauzl.validateFileName(member) !== null) {
    return refuse(
      'ingest/unsafe-name',
      'The name of this member leads out of the archive',
      'Pack the log anew under a plain name',
    );
  }
  if (entry.isEncrypted()) {
    return refuse(
      'ingest/encrypted',
      'This member is encrypted',
      'Unpack it with its password and load the log itself',
    );
  }
  const announced = entry.uncompressedSize;
  if (announced > RATIO_FROM && announced > MAX_RATIO * Math.max(1, entry.compressedSize))
    return { name, error: bomb(name) };
  return {
    name,
    source: {
      name,
      bytes: announced,
      async *open() {
        const stream = await new Promise<Readable>((resolve, reject) => {
          zip.openReadStream(entry, (error, opened) => {
            if (error !== null) reject(damaged(name, error));
            else resolve(opened);
          });
        });
        try {
          for await (const chunk of stream as AsyncIterable<Buffer>) {
            budget.unpacked += chunk.length;
            // Each member is opened twice: to be recognised and to be read.
            if (budget.unpacked > 2 * MAX_UNPACKED) throw bomb(archive);
            yield chunk;
          }
        } catch (error) {
          throw error instanceof BendbookError ? error : damaged(name, error);
        } finally {
          stream.destroy();
        }
      },
    },
  };
}
