import { FitEncoder } from 'fit-file-parser/encoder';

/** Header of at least 12 bytes: size, protocol, profile (2), data size (4, little endian), ".FIT". */
const LEAST_HEADER = 12;

export function isFit(bytes: Uint8Array): boolean {
  return (
    bytes.length >= LEAST_HEADER &&
    bytes[0]! >= LEAST_HEADER &&
    bytes[8] === 0x2e &&
    bytes[9] === 0x46 &&
    bytes[10] === 0x49 &&
    bytes[11] === 0x54
  );
}

/** One FIT file of a chain, made whole if need be. */
export interface FitPart {
  readonly bytes: Uint8Array;
  /** The file ended before its announced end: messages up to there are kept. */
  readonly cutOff: boolean;
  /** The checksum did not match: some bytes are not what was written. */
  readonly damaged: boolean;
  /** Byte offset where reading had to stop; the announced end when all is well. */
  readonly stop: number;
}

/**
 * Walks the record headers (FIT protocol: definition and data messages, compressed time stamps, developer fields); returns
 * the end of the last whole record at or before `end`.
 */
function lastWholeRecord(bytes: Uint8Array, start: number, end: number): number {
  const sizes = new Map<number, number>();
  let at = start;
  while (at < end) {
    const header = bytes[at]!;
    const compressed = (header & 0x80) !== 0;
    const type = compressed ? (header >> 5) & 3 : header & 15;
    let length: number;
    if (!compressed && (header & 0x40) !== 0) {
      const fields = bytes[at + 5];
      if (fields === undefined) break;
      length = 6 + 3 * fields;
      let size = 0;
      for (let f = 0; f < fields; f++) size += bytes[at + 6 + 3 * f + 1] ?? 0;
      if ((header & 0x20) !== 0) {
        const developer = bytes[at + length];
        if (developer === undefined) break;
        for (let f = 0; f < developer; f++) size += bytes[at + length + 1 + 3 * f + 1] ?? 0;
        length += 1 + 3 * developer;
      }
      if (at + length <= end) sizes.set(type, size);
    } else {
      const size = sizes.get(type);
      // A message that was never defined: what follows cannot be cut into records.
      if (size === undefined) break;
      length = 1 + size;
    }
    if (at + length > end) break;
    at += length;
  }
  return at;
}

/**
 * Splits a chain of FIT files and makes each readable: a file cut off is ended at its last whole record with a new
 * size and checksum; a wrong checksum is noted and replaced.
 */
export function fitParts(bytes: Uint8Array): FitPart[] {
  const parts: FitPart[] = [];
  let at = 0;
  while (at < bytes.length && isFit(bytes.subarray(at))) {
    const whole = bytes.subarray(at);
    const view = new DataView(whole.buffer, whole.byteOffset, whole.length);
    const header = whole[0]!;
    const size = view.getUint32(4, true);
    const announced = header + size + 2;
    const cutOff = announced > whole.length;
    const dataEnd = cutOff ? whole.length : header + size;
    const crcFits = !cutOff && FitEncoder.calculateCRC(whole.subarray(0, dataEnd)) === view.getUint16(dataEnd, true);
    if (crcFits)
      parts.push({ bytes: whole.subarray(0, announced), cutOff: false, damaged: false, stop: at + announced });
    else {
      const stop = lastWholeRecord(whole, header, dataEnd);
      const mended = new Uint8Array(stop + 2);
      mended.set(whole.subarray(0, stop));
      const target = new DataView(mended.buffer);
      target.setUint32(4, stop - header, true);
      if (header >= 14) target.setUint16(12, FitEncoder.calculateCRC(mended.subarray(0, 12)), true);
      target.setUint16(stop, FitEncoder.calculateCRC(mended.subarray(0, stop)), true);
      parts.push({ bytes: mended, cutOff, damaged: !cutOff, stop: at + stop });
    }
    if (cutOff) break;
    at += announced;
  }
  return parts;
}
