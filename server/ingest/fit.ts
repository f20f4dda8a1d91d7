import { FitMessageReaderError, readFitMessages, type FitRawMessage } from 'fit-file-parser/raw';
import { BendbookError } from '../../shared/model/fault.ts';
import type { Recording } from '../../shared/model/recording.ts';
import { readAll, type ByteSource } from './byte-source.ts';
import { counted, FindingLog } from './finding-log.ts';
import { fitParts } from './fit-container.ts';
import { courseFromDegrees, FixBuilder } from './fix-builder.ts';
import type { ReadContext } from './options.ts';

const MAX_BYTES = 256 << 20;
/** 31 December 1989, from which FIT counts seconds. */
const FIT_EPOCH_S = 631_065_600;
/** Times below this count from the recorder's start, not from the epoch. */
const LEAST_DATE = 0x10000000;

// Message and field numbers: FIT profile, messages "record" and "gps_metadata".
const RECORD = 20;
const GPS_METADATA = 160;
const TIMESTAMP = 253;

const SEMICIRCLE_DEG = 180 / 2 ** 31;

/** Value of an integer field, NaN when it is absent or holds the value that FIT reserves for "invalid". */
function integer(message: FitRawMessage, number: number): number {
  const field = message.fields.find(({ fieldNumber }) => fieldNumber === number);
  if (field === undefined) return NaN;
  const { bytes, size } = field;
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.length);
  const signed = [1, 3, 5].includes(field.baseType & 31);
  const little = message.littleEndian;
  if (size === 1) return signed ? valid(view.getInt8(0), 0x7f) : valid(view.getUint8(0), 0xff);
  if (size === 2) return signed ? valid(view.getInt16(0, little), 0x7fff) : valid(view.getUint16(0, little), 0xffff);
  if (size !== 4) return NaN;
  return signed ? valid(view.getInt32(0, little), 0x7fffffff) : valid(view.getUint32(0, little), 0xffffffff);
}

const valid = (value: number, invalid: number) => (value === invalid ? NaN : value);

/** Headings of the receiver itself, beside the records, at their own times. */
interface Headings {
  readonly timeS: number[];
  readonly deg: number[];
  /** Added to FIT times that count from the recorder's start, s; NaN when unknown. */
  readonly utcOffsetS: number;
}

function headingsOf(messages: readonly FitRawMessage[]): Headings {
  const timeS: number[] = [];
  const deg: number[] = [];
  let utcOffsetS = NaN;
  for (const message of messages) {
    if (message.globalMessageNumber !== GPS_METADATA) continue;
    const time = integer(message, TIMESTAMP) + (integer(message, 0) || 0) / 1000;
    const heading = integer(message, 5) / 100;
    if (Number.isFinite(time) && Number.isFinite(heading) && !(time <= (timeS.at(-1) ?? -1))) {
      timeS.push(time);
      deg.push(heading);
    }
    // UTC is given in whole seconds: the true offset is the largest of the differences, to one interval.
    const utc = integer(message, 6);
    if (Number.isFinite(utc - time))
      utcOffsetS = Number.isNaN(utcOffsetS) ? utc - time : Math.max(utcOffsetS, utc - time);
  }
  return { timeS, deg, utcOffsetS };
}

/** Heading at a time between two of the receiver's, not more than half a second apart; NaN otherwise. */
function headingAt({ timeS, deg }: Headings, at: number, from: number): { heading: number; next: number } {
  let i = from;
  while (i < timeS.length - 1 && timeS[i + 1]! < at) i++;
  const [a, b] = [timeS[i] ?? NaN, timeS[i + 1] ?? NaN];
  if (!(a <= at && at <= b && b - a <= 0.5)) return { heading: NaN, next: i };
  const turn = ((deg[i + 1]! - deg[i]! + 540) % 360) - 180;
  return { heading: deg[i]! + (turn * (at - a)) / (b - a), next: i };
}

/**
 * FIT: the records with a position, their speed, height and accuracy; course from the receiver's own messages where
 * the recorder keeps them. Files cut off or with a wrong checksum are read as far as they hold.
 */
export async function readFit(source: ByteSource, context: ReadContext): Promise<Recording> {
  const bytes = await readAll(source, MAX_BYTES);
  const log = new FindingLog('ingest');
  const fixes = new FixBuilder(source.name, context.maxFixes);
  let record = 0;
  let without = 0;
  fitParts(bytes).forEach((part, segment) => {
    if (part.cutOff) {
      log.note(
        'cut-off',
        'warning',
        () => 'The file ends before its announced end: the recording was cut off; all records up to there are kept',
        { file: source.name, byte: part.stop },
      );
    }
    if (part.damaged) {
      log.note(
        'damaged',
        'serious',
        () => 'The checksum of the file is wrong: some values are not what was written, and records may be missing',
        { file: source.name, byte: part.stop },
      );
    }
    const messages = messagesOf(part.bytes, source.name, part.stop);
    const headings = headingsOf(messages);
    let next = 0;
    for (const message of messages) {
      if (message.globalMessageNumber !== RECORD) continue;
      record++;
      const lat = integer(message, 0) * SEMICIRCLE_DEG;
      const lon = integer(message, 1) * SEMICIRCLE_DEG;
      if (Number.isNaN(lat) || Number.isNaN(lon)) {
        without++;
        continue;
      }
      if (Math.abs(lat) > 90) {
        log.note(
          'bad-position',
          'warning',
          (n) => `${counted(n, 'record')} with an impossible position left out`,
          { file: source.name, line: record },
          1,
        );
        continue;
      }
      const timestamp = message.timestamp ?? message.compressedTimestamp ?? NaN;
      const offsetS = timestamp < LEAST_DATE && !Number.isNaN(headings.utcOffsetS) ? headings.utcOffsetS : 0;
      fixes.add(timestamp + offsetS + FIT_EPOCH_S, lat, lon, segment, record);
      const speed = first(integer(message, 73), integer(message, 6)) / 1000;
      if (!Number.isNaN(speed)) fixes.set('speedMps', speed);
      const height = first(integer(message, 78), integer(message, 2)) / 5 - 500;
      if (!Number.isNaN(height)) fixes.set('elevationM', height);
      const accuracy = integer(message, 31);
      if (!Number.isNaN(accuracy)) fixes.set('accuracyM', accuracy);
      const found = headingAt(headings, timestamp, next);
      next = found.next;
      if (!Number.isNaN(found.heading)) fixes.set('courseRad', courseFromDegrees(found.heading));
    }
    if (fixes.count > 0 && fixes.utcAt(fixes.count - 1) < FIT_EPOCH_S + LEAST_DATE) {
      log.note('no-date', 'warning', () => 'The recorder had no date: times count from its start', {
        file: source.name,
      });
    }
  });
  if (without > 0) {
    log.note('no-fix', 'info', (n) => `${counted(n, 'record')} without a position`, null, 0, without);
  }
  return {
    name: source.name,
    format: 'fit',
    bytes: source.bytes,
    encoding: '',
    title: '',
    fixes: fixes.columns(),
    sensors: null,
    waypoints: [],
    columns: [],
    findings: log.findings(),
  };
}

const first = (preferred: number, other: number) => (Number.isNaN(preferred) ? other : preferred);

function messagesOf(bytes: Uint8Array, file: string, byte: number): FitRawMessage[] {
  try {
    return readFitMessages(bytes, { messageNumbers: [RECORD, GPS_METADATA] }).messages;
  } catch (error) {
    if (!(error instanceof FitMessageReaderError)) throw error;
    throw new BendbookError(
      'ingest/damaged',
      {
        cause: `The FIT file is damaged (${error.code.replaceAll('_', ' ')})`,
        place: { file, byte },
        remedy: 'Copy it from the recorder again, or export the activity as GPX or TCX',
      },
      { cause: error },
    );
  }
}
