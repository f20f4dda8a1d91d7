import { checkedDays, checkedSeconds, fullYear } from '../timestamp.ts';

/** Order of day and month in dates of numbers. */
export type DateOrder = 'ymd' | 'dmy' | 'mdy';

/** No time of day or date is longer; patterns with several runs of blanks must not meet a thousand of them. */
const LONGEST = 64;

const MONTHS = ['jan', 'feb', 'mar', 'apr', 'may', 'jun', 'jul', 'aug', 'sep', 'oct', 'nov', 'dec'];

/** 1..12 from an English month name or its first three letters; NaN otherwise. */
function monthNamed(name: string): number {
  const index = MONTHS.indexOf(name.slice(0, 3).toLowerCase());
  return index < 0 ? NaN : index + 1;
}

const YMD = /^(\d{4})[-/.](\d{1,2})[-/.](\d{1,2})(?!\d)/;
const NUMBERS = /^(\d{1,2})[-/.](\d{1,2})[-/.](\d{4}|\d{2})(?!\d)/;
const DAY_NAME = /^(\d{1,2})[-/. ]+([A-Za-z]{3,9})\.?[-/, ]+(\d{4}|\d{2})(?!\d)/;
const NAME_DAY = /^([A-Za-z]{3,9})\.?[ -]+(\d{1,2}),?[ -]+(\d{4})(?!\d)/;
const WEEKDAY = /^(?:mon|tue|wed|thu|fri|sat|sun)[a-z]*,?\s+/i;

/** Days since 1970 and the number of characters the date took; days NaN when it is no date. */
export interface DatePart {
  readonly days: number;
  readonly length: number;
}

const NO_DATE: DatePart = { days: NaN, length: 0 };

/** A date at the start of `text`, in the given order where it is all numbers. */
export function parseDate(text: string, order: DateOrder): DatePart {
  // The time may follow the date: only its own part is looked at.
  const weekday = WEEKDAY.exec(text.slice(0, LONGEST))?.[0].length ?? 0;
  const rest = text.slice(weekday, weekday + LONGEST);
  const part = (match: RegExpExecArray, year: number, month: number, day: number): DatePart => ({
    days: checkedDays(fullYear(year), month, day),
    length: weekday + match[0].length,
  });
  let match = YMD.exec(rest);
  if (match !== null) return part(match, Number(match[1]), Number(match[2]), Number(match[3]));
  match = DAY_NAME.exec(rest);
  if (match !== null) return part(match, Number(match[3]), monthNamed(match[2]!), Number(match[1]));
  match = NAME_DAY.exec(rest);
  if (match !== null) return part(match, Number(match[3]), monthNamed(match[1]!), Number(match[2]));
  match = NUMBERS.exec(rest);
  if (match !== null) {
    const [a, b, c] = [Number(match[1]), Number(match[2]), Number(match[3])];
    if (order === 'ymd') return part(match, a, b, c);
    return order === 'mdy' ? part(match, c, a, b) : part(match, c, b, a);
  }
  match = /^(\d{4})(\d{2})(\d{2})(?!\d)/.exec(rest);
  if (match !== null) return part(match, Number(match[1]), Number(match[2]), Number(match[3]));
  match = /^(\d{5,6})(?:\.0+)?(?!\d)/.exec(rest);
  if (match !== null) {
    // A table program drops the leading zero of 040904.
    const digits = match[1]!.padStart(6, '0');
    const [a, b, c] = [Number(digits.slice(0, 2)), Number(digits.slice(2, 4)), Number(digits.slice(4))];
    if (order === 'ymd') return part(match, a, b, c);
    return order === 'mdy' ? part(match, c, a, b) : part(match, c, b, a);
  }
  return NO_DATE;
}

/** Seconds of the day, shifted to UTC where the text names its offset. */
export interface ClockPart {
  readonly seconds: number;
  readonly zoned: boolean;
}

const CLOCK =
  /^(\d{1,2}):(\d{2})(?::(\d{2})(?:[.,:](\d{1,9}))?)?\s*([ap])?\.?m?\.?\s*(?:(z|utc|gmt)?\s*([+-]\d{1,2}(?::?\d{2})?)?)?(?:\s*\(.*\))?$/i;

/** A time of day filling `text`: `09:12:49.4`, `9:12 pm`, `091249.4`, `74852200` (hhmmss and milliseconds). */
export function parseClock(text: string): ClockPart {
  if (text.length > LONGEST) return { seconds: NaN, zoned: false };
  const match = CLOCK.exec(text);
  if (match !== null) {
    let hour = Number(match[1]);
    const half = match[5]?.toLowerCase();
    if (half === 'p' && hour < 12) hour += 12;
    if (half === 'a' && hour === 12) hour = 0;
    const second = Number(match[3] ?? 0) + (match[4] === undefined ? 0 : Number(`0.${match[4]}`));
    let offsetS = 0;
    const offset = match[7];
    if (offset !== undefined) {
      const digits = offset.slice(1).replace(':', '');
      const [h, m] = digits.length > 2 ? [digits.slice(0, -2), digits.slice(-2)] : [digits, '0'];
      offsetS = (offset.startsWith('-') ? -1 : 1) * (Number(h) * 3600 + Number(m) * 60);
    }
    return {
      seconds: checkedSeconds(hour, Number(match[2]), second) - offsetS,
      zoned: match[6] !== undefined || offset !== undefined,
    };
  }
  const packed = /^(\d{1,6})(?:\.(\d+))?$|^(\d{7,9})$/.exec(text);
  if (packed === null) return { seconds: NaN, zoned: false };
  const digits = packed[3] === undefined ? packed[1]!.padStart(6, '0') : packed[3].padStart(9, '0');
  const fraction = packed[3] === undefined ? (packed[2] ?? '0') : digits.slice(6);
  return {
    seconds: checkedSeconds(
      Number(digits.slice(0, 2)),
      Number(digits.slice(2, 4)),
      Number(digits.slice(4, 6)) + Number(`0.${fraction}`),
    ),
    zoned: false,
  };
}

/**
 * Order of day and month that makes dates of most samples, preferring year first (six digits are how
 * loggers write), then day first. `sure` is false when another order would do as well and would differ.
 */
export function guessDateOrder(
  samples: readonly string[],
  preferred: readonly DateOrder[],
): { order: DateOrder; sure: boolean } {
  const counts = preferred.map((order) => samples.filter((text) => !Number.isNaN(parseDate(text, order).days)).length);
  const most = Math.max(...counts);
  const fitting = preferred.filter((_, i) => counts[i] === most);
  const order = fitting[0] ?? preferred[0]!;
  const differs = fitting.some((other) =>
    samples.some((text) => parseDate(text, other).days !== parseDate(text, order).days),
  );
  return { order, sure: !differs };
}
