import { BendbookError } from '../../shared/model/fault.ts';
import type { FixColumns } from '../../shared/model/recording.ts';

/** Optional channels of FixColumns held in Float32, by name. */
export type FloatChannel =
  | 'elevationM'
  | 'speedMps'
  | 'courseRad'
  | 'accuracyM'
  | 'hdop'
  | 'speedAccuracyMps'
  | 'courseAccuracyRad';

type ByteChannel = 'satellites' | 'fixQuality';

/** Nothing stated, in both byte channels. */
const NOT_STATED: Record<ByteChannel, number> = { satellites: 255, fixQuality: 255 };

const TAU = 2 * Math.PI;

/** Degrees clockwise from north to radians in [0, 2 pi); NaN for anything a course cannot be. */
export function courseFromDegrees(degrees: number): number {
  if (!(degrees >= -360 && degrees <= 720)) return NaN;
  const rad = ((((degrees % 360) + 360) % 360) * Math.PI) / 180;
  // Rounding to Float32 must not give a full turn.
  return Math.fround(rad) >= Math.fround(TAU) ? 0 : rad;
}

/** Longitude in [-180, 180] from one in (-180, 360], as some receivers count; NaN otherwise. */
export function wrapLongitude(degrees: number): number {
  if (degrees >= -180 && degrees <= 180) return degrees;
  return degrees > 180 && degrees <= 360 ? degrees - 360 : NaN;
}

/** Columns that grow by half as fixes arrive. A channel takes memory only once the file gives it. */
export class FixBuilder {
  count = 0;
  readonly #file: string;
  readonly #maxFixes: number;
  #capacity: number;
  #utcS: Float64Array;
  #latDeg: Float64Array;
  #lonDeg: Float64Array;
  #segment: Uint32Array;
  #row: Uint32Array;
  readonly #floats = new Map<FloatChannel, Float32Array>();
  readonly #bytes = new Map<ByteChannel, Uint8Array>();

  constructor(file: string, maxFixes: number) {
    this.#file = file;
    this.#maxFixes = maxFixes;
    this.#capacity = Math.min(1024, maxFixes);
    this.#utcS = new Float64Array(this.#capacity);
    this.#latDeg = new Float64Array(this.#capacity);
    this.#lonDeg = new Float64Array(this.#capacity);
    this.#segment = new Uint32Array(this.#capacity);
    this.#row = new Uint32Array(this.#capacity);
  }

  /** Appends a fix; its channels follow by `set`. Throws `ingest/too-many-points` beyond the limit. */
  add(utcS: number, latDeg: number, lonDeg: number, segment: number, row: number): void {
    if (this.count === this.#capacity) this.#grow();
    const i = this.count++;
    this.#utcS[i] = utcS;
    this.#latDeg[i] = latDeg;
    this.#lonDeg[i] = lonDeg;
    this.#segment[i] = segment;
    this.#row[i] = row;
  }

  /** Sets a channel of the last fix. */
  set(channel: FloatChannel, value: number): void {
    let column = this.#floats.get(channel);
    if (column === undefined) {
      column = new Float32Array(this.#capacity).fill(NaN);
      this.#floats.set(channel, column);
    }
    column[this.count - 1] = value;
  }

  /** Sets a channel of the last fix. */
  setByte(channel: ByteChannel, value: number): void {
    let column = this.#bytes.get(channel);
    if (column === undefined) {
      column = new Uint8Array(this.#capacity).fill(NOT_STATED[channel]);
      this.#bytes.set(channel, column);
    }
    column[this.count - 1] = value;
  }

  /** Sets a channel of fix `i`, which must exist. */
  setAt(i: number, channel: FloatChannel, value: number): void {
    const count = this.count;
    this.count = i + 1;
    this.set(channel, value);
    this.count = count;
  }

  /** Takes the last fix back with all its channels. */
  dropLast(): void {
    const i = --this.count;
    for (const column of this.#floats.values()) column[i] = NaN;
    for (const [name, column] of this.#bytes) column[i] = NOT_STATED[name];
  }

  utcAt(i: number): number {
    return this.#utcS[i]!;
  }

  setUtcAt(i: number, utcS: number): void {
    this.#utcS[i] = utcS;
  }

  #grow(): void {
    if (this.count >= this.#maxFixes) {
      throw new BendbookError('ingest/too-many-points', {
        cause: `The file holds more than ${this.#maxFixes.toLocaleString('en-GB')} points`,
        place: { file: this.#file },
        remedy: 'Split the recording, one day or one trip a file',
      });
    }
    this.#capacity = Math.min(this.#maxFixes, Math.ceil(this.#capacity * 1.5));
    const wider = <T extends Float64Array | Float32Array | Uint32Array | Uint8Array>(column: T, rest: number): T => {
      const grown = new (column.constructor as new (length: number) => T)(this.#capacity);
      if (rest !== 0) grown.fill(rest, this.count);
      grown.set(column);
      return grown;
    };
    this.#utcS = wider(this.#utcS, 0);
    this.#latDeg = wider(this.#latDeg, 0);
    this.#lonDeg = wider(this.#lonDeg, 0);
    this.#segment = wider(this.#segment, 0);
    this.#row = wider(this.#row, 0);
    for (const [name, column] of this.#floats) this.#floats.set(name, wider(column, NaN));
    for (const [name, column] of this.#bytes) this.#bytes.set(name, wider(column, NOT_STATED[name]));
  }

  /** The finished columns; the builder must not be used afterwards. */
  columns(): FixColumns {
    const n = this.count;
    const float = (name: FloatChannel) => this.#floats.get(name)?.slice(0, n) ?? null;
    const byte = (name: ByteChannel) => this.#bytes.get(name)?.slice(0, n) ?? null;
    return {
      count: n,
      utcS: this.#utcS.slice(0, n),
      latDeg: this.#latDeg.slice(0, n),
      lonDeg: this.#lonDeg.slice(0, n),
      elevationM: float('elevationM'),
      speedMps: float('speedMps'),
      courseRad: float('courseRad'),
      accuracyM: float('accuracyM'),
      hdop: float('hdop'),
      satellites: byte('satellites'),
      fixQuality: byte('fixQuality'),
      speedAccuracyMps: float('speedAccuracyMps'),
      courseAccuracyRad: float('courseAccuracyRad'),
      segment: this.#segment.slice(0, n),
      row: this.#row.slice(0, n),
    };
  }
}
