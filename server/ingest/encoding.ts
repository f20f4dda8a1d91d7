import { TextDecoder, TextEncoder } from 'node:util';
import type { ByteSource } from './byte-source.ts';

export type Encoding = 'utf-8' | 'utf-16le' | 'utf-16be' | 'windows-1252';

/** Names shown to the user. windows-1252 is ISO-8859-1 with printable characters in its unused row. */
export const ENCODING_NAMES: Record<Encoding, string> = {
  'utf-8': 'UTF-8',
  'utf-16le': 'UTF-16LE',
  'utf-16be': 'UTF-16BE',
  'windows-1252': 'ISO-8859-1',
};

/** How text was decoded; `replaced` counts bytes that belong to no character. */
export interface TextNote {
  encoding: Encoding;
  replaced: number;
}

/**
 * Encoding by byte-order mark, else by the zero bytes that UTF-16 leaves between ASCII characters,
 * else UTF-8 until a byte proves otherwise.
 */
export function detectEncoding(head: Uint8Array): Encoding {
  if (head[0] === 0xff && head[1] === 0xfe) return 'utf-16le';
  if (head[0] === 0xfe && head[1] === 0xff) return 'utf-16be';
  const pairs = Math.min(head.length, 4096) >> 1;
  if (pairs < 2) return 'utf-8';
  let [evenZero, oddZero] = [0, 0];
  for (let i = 0; i < pairs; i++) {
    if (head[2 * i] === 0) evenZero++;
    if (head[2 * i + 1] === 0) oddZero++;
  }
  if (oddZero > 0.7 * pairs && evenZero < 0.1 * pairs) return 'utf-16le';
  if (evenZero > 0.7 * pairs && oddZero < 0.1 * pairs) return 'utf-16be';
  return 'utf-8';
}

/**
 * True when bytes that are not valid UTF-8 look like single-byte text rather than damaged UTF-8:
 * fewer than half of the characters beyond ASCII decode.
 */
function looksSingleByte(bytes: Uint8Array): boolean {
  const text = new TextDecoder('utf-8').decode(bytes);
  let [good, bad] = [0, 0];
  for (let i = 0; i < text.length; i++) {
    const code = text.charCodeAt(i);
    if (code === 0xfffd) bad++;
    else if (code > 0x7f) good++;
  }
  return bad > good;
}

function isAscii(bytes: Uint8Array): boolean {
  for (const byte of bytes) if (byte > 0x7f) return false;
  return true;
}

/**
 * The source as text, chunk by chunk. UTF-8 is checked: at the first byte that is not UTF-8 the rest
 * is read as ISO-8859-1 when everything before was ASCII and the chunk looks like it; otherwise bad
 * bytes become U+FFFD and are counted in `note`.
 * A single-byte encoding named in an XML declaration is obeyed.
 */
export async function* textChunks(source: ByteSource, note: TextNote): AsyncGenerator<string> {
  let decoder: TextDecoder | null = null;
  let lenient = false;
  let ascii = true;
  // Bytes of a character cut by the end of the last chunk, to start afresh if decoding fails.
  let pending = new Uint8Array(0);
  for await (const chunk of source.open()) {
    if (decoder === null) {
      note.encoding = detectEncoding(chunk);
      if (note.encoding === 'utf-8') {
        const declared = /^\s*<\?xml[^>]{0,200}encoding=["']([\w-]+)["']/.exec(
          new TextDecoder('windows-1252').decode(chunk.subarray(0, 256)),
        );
        if (declared !== null && /^(iso-8859-1|latin-?1|windows-1252|us-ascii)$/i.test(declared[1]!)) {
          // Files that declare Latin-1 and hold UTF-8 exist: valid UTF-8 beyond ASCII cannot be chance.
          if (!isAscii(chunk) && looksSingleByte(chunk)) note.encoding = 'windows-1252';
        }
      }
      decoder = new TextDecoder(note.encoding, { fatal: note.encoding === 'utf-8' });
    }
    let text: string;
    try {
      text = decoder.decode(chunk, { stream: true });
      if (decoder.fatal) pending = unfinished(chunk);
    } catch {
      const bytes = new Uint8Array(pending.length + chunk.length);
      bytes.set(pending);
      bytes.set(chunk, pending.length);
      if (ascii && looksSingleByte(bytes)) {
        note.encoding = 'windows-1252';
        decoder = new TextDecoder('windows-1252');
      } else {
        lenient = true;
        decoder = new TextDecoder('utf-8');
      }
      text = decoder.decode(bytes, { stream: true });
      pending = pending.subarray(0, 0);
    }
    if (ascii && text.length !== chunk.length) ascii = false;
    if (lenient || note.encoding.startsWith('utf-16')) note.replaced += countReplaced(text);
    yield text;
  }
  if (decoder !== null) {
    let rest: string;
    try {
      rest = decoder.decode();
    } catch {
      // The file ends inside a character.
      rest = '\ufffd';
    }
    note.replaced += countReplaced(rest);
    if (rest !== '') yield rest;
  }
}

function countReplaced(text: string): number {
  let count = 0;
  for (let at = text.indexOf('\ufffd'); at >= 0; at = text.indexOf('\ufffd', at + 1)) count++;
  return count;
}

/** The bytes at the end of a chunk that begin a UTF-8 character and do not complete it. */
function unfinished(chunk: Uint8Array): Uint8Array<ArrayBuffer> {
  for (let back = 1; back <= Math.min(3, chunk.length); back++) {
    const byte = chunk[chunk.length - back]!;
    if (byte < 0x80) break;
    if (byte >= 0xc0) {
      const needed = byte >= 0xf0 ? 4 : byte >= 0xe0 ? 3 : 2;
      return needed > back ? chunk.slice(chunk.length - back) : new Uint8Array(0);
    }
  }
  return new Uint8Array(0);
}

/**
 * The source as bytes in which every ASCII character is one byte: UTF-16 is rewritten as UTF-8, a
 * byte-order mark is left out, everything else passes. `note.encoding` tells UTF-8 from single bytes.
 */
export async function* asciiCompatibleBytes(source: ByteSource, note: TextNote): AsyncGenerator<Uint8Array> {
  let transcode: TextDecoder | null = null;
  let first = true;
  const encoder = new TextEncoder();
  for await (const chunk of source.open()) {
    let bytes = chunk;
    if (first) {
      first = false;
      note.encoding = detectEncoding(chunk);
      if (note.encoding !== 'utf-8') transcode = new TextDecoder(note.encoding);
      else if (!isAscii(chunk) && looksSingleByte(chunk)) note.encoding = 'windows-1252';
      if (chunk[0] === 0xef && chunk[1] === 0xbb && chunk[2] === 0xbf) bytes = chunk.subarray(3);
    }
    yield transcode === null ? bytes : encoder.encode(transcode.decode(bytes, { stream: true }));
  }
  if (transcode !== null) {
    const rest = transcode.decode();
    if (rest !== '') yield encoder.encode(rest);
  }
}
