import { readDecimal } from '../decimal.ts';
import { checkedDays, parseIso, type Stamp } from '../timestamp.ts';
import { parseClock, parseDate } from './dates.ts';
import type { TimeForm } from './plan.ts';

/** A row as its reader sees it: cell `i` is bytes `starts[i]`..`ends[i]`. */
export interface RowCells {
  bytes: Buffer;
  readonly starts: Int32Array;
  readonly ends: Int32Array;
  count: number;
}

/** Reads the time of a row in the planned form; keeps what repeats from row to row. */
export class TimeReader {
  /** Some time had no zone. */
  unzoned = false;
  readonly #form: TimeForm;
  readonly #mark: number;
  readonly #stamp: Stamp = { utcS: NaN, zoned: false };
  #dateText = '';
  #days = NaN;
  readonly #isoDate = new Uint8Array(10);
  #isoDays = NaN;

  constructor(form: TimeForm, decimalMark: number) {
    this.#form = form;
    this.#mark = decimalMark;
  }

  /** Seconds since 1970 UTC (from the start for elapsed times), or NaN. */
  read(row: RowCells): number {
    const form = this.#form;
    switch (form.kind) {
      case 'epoch':
      case 'elapsed': {
        if (form.column >= row.count) return NaN;
        const value = readDecimal(row.bytes, row.starts[form.column]!, row.ends[form.column]!, this.#mark);
        // Division, where it is one, rounds correctly: 1392364131182 ms is 1392364131.182 s.
        return form.secondsPerUnit === 1 ? value : value / Math.round(1 / form.secondsPerUnit);
      }
      case 'text':
        return form.column < row.count ? this.#text(row, form.column) : NaN;
      case 'pair': {
        if (form.time >= row.count || form.date >= row.count) return NaN;
        if (form.date >= 0) this.#date(this.#cell(row, form.date));
        else this.#days = 0;
        const clock = parseClock(this.#cell(row, form.time));
        if (!clock.zoned) this.unzoned = true;
        return this.#days * 86400 + clock.seconds;
      }
    }
  }

  #cell(row: RowCells, column: number): string {
    return row.bytes.toString('latin1', row.starts[column], row.ends[column]);
  }

  #date(text: string): void {
    if (text === this.#dateText) return;
    this.#dateText = text;
    const form = this.#form;
    this.#days = form.kind === 'pair' || form.kind === 'text' ? parseDate(text, form.order).days : NaN;
  }

  #text(row: RowCells, column: number): number {
    const fast = this.#iso(row.bytes, row.starts[column]!, row.ends[column]!);
    if (!Number.isNaN(fast)) return fast;
    const text = this.#cell(row, column);
    const iso = parseIso(text, this.#stamp);
    if (!Number.isNaN(iso)) {
      if (!this.#stamp.zoned) this.unzoned = true;
      return iso;
    }
    const form = this.#form;
    if (form.kind !== 'text') return NaN;
    const { days, length } = parseDate(text, form.order);
    if (Number.isNaN(days)) return NaN;
    const clock = parseClock(text.slice(length).replace(/^[\sT,]+/, ''));
    if (!clock.zoned) this.unzoned = true;
    return days * 86400 + clock.seconds;
  }

  /** The common layout `yyyy-mm-dd?hh:mm:ss[.fff][Z]` straight from the bytes; NaN for any other. */
  #iso(bytes: Buffer, start: number, end: number): number {
    const length = end - start;
    if (length < 19 || bytes[start + 13] !== 58 || bytes[start + 16] !== 58) return NaN;
    const separator = bytes[start + 10];
    if (separator !== 84 && separator !== 32) return NaN;
    let fresh = false;
    for (let i = 0; i < 10; i++) {
      if (this.#isoDate[i] !== bytes[start + i]) {
        fresh = true;
        break;
      }
    }
    if (fresh) {
      const text = bytes.toString('latin1', start, start + 10);
      if (!/^\d{4}-\d\d-\d\d$/.test(text)) return NaN;
      this.#isoDays = checkedDays(Number(text.slice(0, 4)), Number(text.slice(5, 7)), Number(text.slice(8)));
      this.#isoDate.set(bytes.subarray(start, start + 10));
    }
    let stop = end;
    const last = bytes[end - 1];
    const zulu = last === 90;
    if (zulu) stop--;
    const hour = readDecimal(bytes, start + 11, start + 13);
    const minute = readDecimal(bytes, start + 14, start + 16);
    const second = readDecimal(bytes, start + 17, stop);
    if (!(hour < 24 && minute < 60 && second >= 0 && second < 61)) return NaN;
    if (!zulu) this.unzoned = true;
    return this.#isoDays * 86400 + hour * 3600 + minute * 60 + second;
  }
}
