import type { Recording } from '../../shared/model/recording.ts';
import type { ByteSource } from './byte-source.ts';
import { readDecimal } from './decimal.ts';
import { asciiCompatibleBytes, ENCODING_NAMES, type TextNote } from './encoding.ts';
import { counted, FindingLog } from './finding-log.ts';
import { courseFromDegrees, FixBuilder } from './fix-builder.ts';
import { lineBlocks } from './line-blocks.ts';
import type { ReadContext } from './options.ts';
import { checkedDays, fullYear } from './timestamp.ts';

const DAY_S = 86400;
const KNOT_MPS = 1852 / 3600;
const KMH_MPS = 1 / 3.6;

const [LF, CR, DOLLAR, STAR, COMMA, DOT] = [10, 13, 36, 42, 44, 46];

/** Sentence type as a number: its three letters. */
const code = (letters: string) => (letters.charCodeAt(0) << 16) | (letters.charCodeAt(1) << 8) | letters.charCodeAt(2);
const [RMC, GGA, VTG, GSA, GST, ZDA, GLL, GNS] = ['RMC', 'GGA', 'VTG', 'GSA', 'GST', 'ZDA', 'GLL', 'GNS'].map(code);

/** GGA quality: 0 none, 1 autonomous, 2 differential, 3 PPS, 4 RTK, 5 float RTK, 6 dead reckoning, 7 manual, 8 simulator. */
const GGA_QUALITY = [0, 1, 2, 1, 4, 5, 3, 1, 1];
/** Mode letters of RMC, VTG, GLL, GNS. */
const MODE_QUALITY: Record<number, number> = { 78: 0, 65: 1, 68: 2, 80: 1, 82: 4, 70: 5, 69: 3, 77: 1, 83: 1 };

const MAX_FIELDS = 40;

const hexDigit = (c: number): number =>
  c >= 48 && c <= 57 ? c - 48 : c >= 65 && c <= 70 ? c - 55 : c >= 97 && c <= 102 ? c - 87 : -1;

/**
 * One reader of one log: sentences from the bytes in one pass, gathered by time of day into fixes.
 *
 * Sentences with the same time of day make one fix; VTG and GSA, which carry no time, join the fix that
 * is open. A fix without a date takes the last known one, a day later when its time of day falls by more
 * than half a day. Fixes before the first date get theirs backwards from it.
 */
class NmeaReader {
  readonly fixes: FixBuilder;
  readonly log = new FindingLog('ingest');
  readonly #file: string;
  /** Starts and ends of the fields of the sentence at hand; field 0 is the address. */
  readonly #starts = new Int32Array(MAX_FIELDS + 1);
  #fields = 0;
  #bytes: Uint8Array = new Uint8Array(0);
  #line = 1;
  sentences = 0;
  checksums = 0;
  #unchecked = 0;

  // The fix being gathered.
  #open = false;
  #tod = NaN;
  #lat = NaN;
  #lon = NaN;
  #isVoid = false;
  #isBad = false;
  #speed = NaN;
  #course = NaN;
  #elevation = NaN;
  #hdop = NaN;
  #satellites = 255;
  #quality = 255;
  #accuracy = NaN;
  #day = NaN;
  #row = 0;

  /** Day of the last dated fix, days since 1970; NaN before the first. */
  #lastDay = NaN;
  #lastTod = NaN;
  /** Fixes before this one have only their time of day. */
  #undated = 0;
  #voids = 0;

  constructor(file: string, maxFixes: number) {
    this.#file = file;
    this.fixes = new FixBuilder(file, maxFixes);
  }

  /** Reads a block of whole lines. */
  block(bytes: Uint8Array): void {
    this.#bytes = bytes;
    const starts = this.#starts;
    const length = bytes.length;
    let p = 0;
    while (p < length) {
      const c = bytes[p]!;
      if (c !== DOLLAR) {
        if (c === LF || (c === CR && bytes[p + 1] !== LF)) this.#line++;
        p++;
        continue;
      }
      // From here: `$` address, fields, `*hh`.
      let sum = 0;
      let fields = 0;
      starts[0] = ++p;
      let b = 0;
      while (p < length) {
        b = bytes[p]!;
        if (b === COMMA) {
          if (fields < MAX_FIELDS - 1) starts[++fields] = p + 1;
        } else if (b === STAR || b === DOLLAR || b < 32) break;
        sum ^= b;
        p++;
      }
      this.sentences++;
      starts[fields + 1] = p + 1;
      this.#fields = fields;
      if (b === STAR && p < length) {
        const stated = (hexDigit(bytes[p + 1] ?? 0) << 4) | hexDigit(bytes[p + 2] ?? 0);
        if (stated === sum) {
          this.checksums++;
          this.#sentence();
        } else this.#bad('checksum', (n) => `${counted(n, 'sentence')} with a wrong checksum left out`);
        p++;
      } else if (this.checksums === 0) {
        // Old loggers write none at all; where others have one, a missing one means a sentence cut short.
        this.#unchecked++;
        this.#sentence();
      } else this.#bad('cut-sentence', (n) => `${counted(n, 'sentence')} cut short (no checksum) left out`);
    }
  }

  #bad(what: string, describe: (count: number) => string): void {
    this.log.note(what, 'warning', describe, { file: this.#file, line: this.#line });
  }

  #sentence(): void {
    const bytes = this.#bytes;
    const at = this.#starts[0]!;
    // Address: talker of two letters (any) and three of the type; proprietary sentences begin with P.
    if (this.#starts[1]! - 1 - at !== 5 || bytes[at] === 80) return;
    const type = (bytes[at + 2]! << 16) | (bytes[at + 3]! << 8) | bytes[at + 4]!;
    switch (type) {
      case RMC:
        if (this.#fields >= 9) this.#rmc();
        return;
      case GGA:
        if (this.#fields >= 9) this.#gga();
        return;
      case VTG:
        if (this.#fields >= 7 && this.#open) this.#vtg();
        return;
      case GSA:
        if (this.#open && Number.isNaN(this.#hdop)) this.#hdop = this.#number(16);
        return;
      case GST:
        if (this.#fields >= 7) this.#gst();
        return;
      case ZDA:
        if (this.#fields >= 4) this.#zda();
        return;
      case GLL:
        if (this.#fields >= 6) {
          this.#at(this.#time(5));
          this.#position(1);
          this.#status(6, 7);
        }
        return;
      case GNS:
        if (this.#fields >= 9) {
          this.#at(this.#time(1));
          this.#position(2);
          this.#dilution(7, 8);
          this.#elevation = this.#number(9);
          if (this.#starts[7]! - 1 === this.#starts[6]! || this.#byte(6) === 78) this.#isVoid = true;
        }
    }
  }

  #rmc(): void {
    const tod = this.#time(1);
    this.#at(tod);
    this.#position(3);
    this.#status(2, 12);
    const knots = this.#number(7);
    if (knots >= 0) this.#speed = knots * KNOT_MPS;
    const course = this.#number(8);
    if (!Number.isNaN(course)) this.#course = courseFromDegrees(course);
    const date = this.#number(9);
    if (this.#starts[10]! - 1 - this.#starts[9]! === 6 && date >= 0) {
      const day = checkedDays(fullYear(date % 100), Math.floor(date / 100) % 100, Math.floor(date / 10000));
      if (Number.isNaN(day)) this.#bad('bad-time', (n) => `${counted(n, 'date')} that cannot be`);
      else this.#day = day;
    }
  }

  #gga(): void {
    this.#at(this.#time(1));
    this.#position(2);
    const quality = this.#number(6);
    if (quality === 0) this.#isVoid = true;
    else if (quality >= 1 && quality <= 8) this.#quality = GGA_QUALITY[quality] ?? 255;
    this.#dilution(7, 8);
    const elevation = this.#number(9);
    if (!Number.isNaN(elevation)) this.#elevation = elevation;
  }

  #vtg(): void {
    const course = this.#number(1);
    if (!Number.isNaN(course) && Number.isNaN(this.#course)) this.#course = courseFromDegrees(course);
    if (!Number.isNaN(this.#speed)) return;
    const knots = this.#number(5);
    const kmh = this.#number(7);
    if (knots >= 0) this.#speed = knots * KNOT_MPS;
    else if (kmh >= 0) this.#speed = kmh * KMH_MPS;
  }

  /** Standard deviations of latitude and longitude, m. */
  #gst(): void {
    if (!this.#open || this.#time(1) !== this.#tod) return;
    const accuracy = Math.hypot(this.#number(6), this.#number(7));
    if (accuracy >= 0) this.#accuracy = accuracy;
  }

  #zda(): void {
    const day = checkedDays(this.#number(4), this.#number(3), this.#number(2));
    if (Number.isNaN(day)) return;
    this.#at(this.#time(1));
    this.#day = day;
  }

  #dilution(satelliteField: number, hdopField: number): void {
    const satellites = this.#number(satelliteField);
    if (satellites >= 0 && satellites < 255) this.#satellites = satellites;
    const hdop = this.#number(hdopField);
    if (hdop >= 0) this.#hdop = hdop;
  }

  /** Status `A` valid, `V` void, and the mode letter where the sentence has one. */
  #status(statusField: number, modeField: number): void {
    if (this.#byte(statusField) !== 65) this.#isVoid = true;
    if (this.#fields >= modeField && this.#quality === 255) {
      const quality = MODE_QUALITY[this.#byte(modeField)];
      if (quality === 0) this.#isVoid = true;
      else if (quality !== undefined) this.#quality = quality;
    }
  }

  /** Starts a new fix when the time of day differs from that of the open one. */
  #at(tod: number): void {
    if (this.#open && tod === this.#tod) return;
    this.flush();
    this.#open = true;
    this.#tod = tod;
    this.#row = this.#line;
  }

  /** Ends the open fix. */
  flush(): void {
    if (!this.#open) return;
    this.#open = false;
    const tod = this.#tod;
    if (!Number.isNaN(this.#day)) this.#date();
    const placed = !Number.isNaN(this.#lat) && !Number.isNaN(this.#lon);
    if (placed && !this.#isVoid) {
      if (!Number.isNaN(tod)) this.#keep(tod);
      else {
        this.log.note(
          'bad-time',
          'warning',
          (n) => `${counted(n, 'fix', 'fixes')} with a time that cannot be read left out`,
          { file: this.#file, line: this.#row },
          1,
        );
      }
    } else if (this.#isVoid) this.#voids++;
    else if (this.#isBad) {
      this.log.note(
        'bad-position',
        'warning',
        (n) => `${counted(n, 'fix', 'fixes')} with a position that cannot be left out`,
        { file: this.#file, line: this.#row },
        1,
      );
    }
    this.#lat = this.#lon = this.#speed = this.#course = this.#elevation = this.#hdop = this.#accuracy = NaN;
    this.#day = NaN;
    this.#satellites = this.#quality = 255;
    this.#isVoid = this.#isBad = false;
  }

  /** Takes over the date of the open fix, and dates what came before the first. */
  #date(): void {
    const { fixes } = this;
    if (Number.isNaN(this.#lastDay)) {
      let day = this.#day;
      let next = this.#tod;
      for (let i = this.#undated - 1; i >= 0; i--) {
        const tod = fixes.utcAt(i);
        if (tod > next + DAY_S / 2) day--;
        next = tod;
        fixes.setUtcAt(i, day * DAY_S + tod);
      }
    }
    this.#lastDay = this.#day;
    this.#lastTod = this.#tod;
  }

  #keep(tod: number): void {
    const { fixes } = this;
    const dated = !Number.isNaN(this.#lastDay);
    if (dated && this.#lastTod > tod + DAY_S / 2) this.#lastDay++;
    this.#lastTod = tod;
    fixes.add(dated ? this.#lastDay * DAY_S + tod : tod, this.#lat, this.#lon, 0, this.#row);
    if (!dated) this.#undated = fixes.count;
    if (!Number.isNaN(this.#speed)) fixes.set('speedMps', this.#speed);
    if (!Number.isNaN(this.#course)) fixes.set('courseRad', this.#course);
    if (!Number.isNaN(this.#elevation)) fixes.set('elevationM', this.#elevation);
    if (!Number.isNaN(this.#hdop)) fixes.set('hdop', this.#hdop);
    if (!Number.isNaN(this.#accuracy)) fixes.set('accuracyM', this.#accuracy);
    if (this.#satellites !== 255) fixes.setByte('satellites', this.#satellites);
    if (this.#quality !== 255) fixes.setByte('fixQuality', this.#quality);
  }

  end(): void {
    this.flush();
    const { fixes, log } = this;
    if (Number.isNaN(this.#lastDay) && fixes.count > 0) {
      // No date anywhere: count days from the first midnight met.
      let day = 0;
      let last = fixes.utcAt(0);
      for (let i = 0; i < fixes.count; i++) {
        const tod = fixes.utcAt(i);
        if (last > tod + DAY_S / 2) day++;
        last = tod;
        fixes.setUtcAt(i, day * DAY_S + tod);
      }
      log.note(
        'no-date',
        'warning',
        () => 'No sentence states a date: times count from midnight of an unknown day, shown as 1 January 1970',
        { file: this.#file },
      );
    }
    if (this.#voids > 0) {
      log.note('no-fix', 'info', (n) => `At ${counted(n, 'time')} the receiver had no valid fix`, null, 0, this.#voids);
    }
    if (this.#unchecked > 0 && fixes.count > 0) {
      log.note(
        'no-checksums',
        'warning',
        (n) => `${counted(n, 'sentence')} without a checksum: damage to them cannot be noticed`,
        null,
        0,
        this.#unchecked,
      );
    }
  }

  #byte(field: number): number {
    return this.#starts[field + 1]! - 1 > this.#starts[field]! ? this.#bytes[this.#starts[field]!]! : 0;
  }

  /** Decimal number of a field, NaN when it is empty, absent or anything else. */
  #number(field: number): number {
    if (field > this.#fields) return NaN;
    return readDecimal(this.#bytes, this.#starts[field]!, this.#starts[field + 1]! - 1);
  }

  /** Time of day in seconds from `hhmmss` with an optional fraction; NaN when it is no time. */
  #time(field: number): number {
    const at = this.#starts[field]!;
    const end = this.#starts[field + 1]! - 1;
    const dot = end - at > 6 ? this.#bytes[at + 6] : DOT;
    if (end - at < 6 || dot !== DOT) return NaN;
    const value = end - at === 7 ? readDecimal(this.#bytes, at, at + 6) : readDecimal(this.#bytes, at, end);
    const hhmm = Math.floor(value / 100);
    const hour = Math.floor(hhmm / 100);
    const minute = hhmm % 100;
    // From the digits after the point, so that 0.1 s stays 0.1 s.
    const second = end - at > 7 ? readDecimal(this.#bytes, at + 4, end) : value % 100;
    return hour < 24 && minute < 60 && second < 61 ? hour * 3600 + minute * 60 + second : NaN;
  }

  /** `ddmm.mmmm,N,dddmm.mmmm,E` from a field on; the open fix keeps its position when these are empty. */
  #position(field: number): void {
    const lat = this.#angle(field, 2);
    const lon = this.#angle(field + 2, 3);
    const ns = this.#byte(field + 1);
    const ew = this.#byte(field + 3);
    if (lat <= 90 && lon <= 180 && (ns === 78 || ns === 83) && (ew === 69 || ew === 87)) {
      this.#lat = ns === 83 ? -lat : lat;
      this.#lon = ew === 87 ? -lon : lon;
    } else if (this.#starts[field + 1]! - 1 > this.#starts[field]!) {
      this.#isBad = true;
    }
  }

  /** Degrees from `d..dmm.mm` with `degreeDigits` digits of degrees. */
  #angle(field: number, degreeDigits: number): number {
    const at = this.#starts[field]!;
    const end = this.#starts[field + 1]! - 1;
    if (end - at < degreeDigits + 2) return NaN;
    const degrees = readDecimal(this.#bytes, at, at + degreeDigits);
    const minutes = readDecimal(this.#bytes, at + degreeDigits, end);
    return minutes < 60 ? degrees + minutes / 60 : NaN;
  }
}

/**
 * NMEA 0183: RMC, GGA, GNS, GLL, VTG, GSA, GST and ZDA of any talker, other text between them ignored.
 * Source: NMEA 0183 sentences as published by receiver makers; checksum: exclusive or of the characters
 * between `$` and `*`.
 */
export async function readNmea(source: ByteSource, context: ReadContext): Promise<Recording> {
  const note: TextNote = { encoding: 'utf-8', replaced: 0 };
  const reader = new NmeaReader(source.name, context.maxFixes);
  for await (const block of lineBlocks(asciiCompatibleBytes(source, note))) reader.block(block);
  reader.end();
  return {
    name: source.name,
    format: 'nmea',
    bytes: source.bytes,
    encoding: ENCODING_NAMES[note.encoding],
    title: '',
    fixes: reader.fixes.columns(),
    sensors: null,
    waypoints: [],
    columns: [],
    findings: reader.log.findings(),
  };
}
