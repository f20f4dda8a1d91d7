/** Days from 1970-01-01 to a date of the proleptic Gregorian calendar; month 1..12, day 1..31, unchecked. */
export function daysFromCivil(year: number, month: number, day: number): number {
  // Count years from March, so that the leap day is the last of its year.
  const y = month <= 2 ? year - 1 : year;
  const era = Math.floor(y / 400);
  const yearOfEra = y - era * 400;
  const dayOfYear = Math.floor((153 * (month > 2 ? month - 3 : month + 9) + 2) / 5) + day - 1;
  return era * 146097 + yearOfEra * 365 + Math.floor(yearOfEra / 4) - Math.floor(yearOfEra / 100) + dayOfYear - 719468;
}

const MONTH_DAYS = [31, 29, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31];

/** Days from 1970-01-01, or NaN when there is no such date. */
export function checkedDays(year: number, month: number, day: number): number {
  if (!(month >= 1 && month <= 12 && day >= 1 && day <= MONTH_DAYS[month - 1]!)) return NaN;
  if (month === 2 && day === 29 && !(year % 4 === 0 && (year % 100 !== 0 || year % 400 === 0))) return NaN;
  return daysFromCivil(year, month, day);
}

/** Seconds of the day, or NaN when there is no such time. Second 60 is a leap second and counts as the next second. */
export function checkedSeconds(hour: number, minute: number, second: number): number {
  if (!(hour >= 0 && hour <= 24 && minute >= 0 && minute < 60 && second >= 0 && second < 61)) return NaN;
  const total = hour * 3600 + minute * 60 + second;
  return total <= 86401 ? total : NaN;
}

/** Two-digit years: 80-99 are 1980-1999 (satellite navigation has no earlier ones), 00-79 are 2000-2079. */
export function fullYear(year: number): number {
  return year >= 100 ? year : year >= 80 ? 1900 + year : 2000 + year;
}

/** Value of `count` digits at `at`, or -1. */
function digits(text: string, at: number, count: number): number {
  let value = 0;
  for (let i = at; i < at + count; i++) {
    const digit = text.charCodeAt(i) - 48;
    // NaN past the end of the text fails the test as well.
    if (!(digit >= 0 && digit <= 9)) return -1;
    value = value * 10 + digit;
  }
  return value;
}

/** A time as read: seconds since 1970 UTC, and whether the text said which zone it is in. */
export interface Stamp {
  utcS: number;
  zoned: boolean;
}

let cachedDate = '';
let cachedDays = NaN;

/**
 * Reads an ISO 8601 date and time: `2024-05-17T09:12:49.4Z`, with `T` or a blank, any number of
 * fractional digits after point or comma, zone `Z`, `+02:00`, `+0200`, `+02` or none (then taken as UTC
 * and `zoned` false). Anything else gives NaN: no guessing.
 */
export function parseIso(text: string, out: Stamp): number {
  out.utcS = NaN;
  out.zoned = false;
  let days: number;
  if (text.startsWith(cachedDate) && cachedDate !== '') days = cachedDays;
  else {
    const year = digits(text, 0, 4);
    if (year < 0 || text.charCodeAt(4) !== 45 || text.charCodeAt(7) !== 45) return NaN;
    days = checkedDays(year, digits(text, 5, 2), digits(text, 8, 2));
    if (Number.isNaN(days)) return NaN;
    cachedDate = text.slice(0, 10);
    cachedDays = days;
  }
  const separator = text.charCodeAt(10);
  if (separator !== 84 && separator !== 32 && separator !== 116) return NaN;
  const hour = digits(text, 11, 2);
  const minute = digits(text, 14, 2);
  if (hour < 0 || minute < 0 || text.charCodeAt(13) !== 58) return NaN;
  let at = 16;
  let second = 0;
  if (text.charCodeAt(at) === 58) {
    second = digits(text, 17, 2);
    if (second < 0) return NaN;
    at = 19;
    const mark = text.charCodeAt(at);
    if (mark === 46 || mark === 44) {
      const from = ++at;
      let fraction = 0;
      for (; ; at++) {
        const digit = text.charCodeAt(at) - 48;
        if (!(digit >= 0 && digit <= 9)) break;
        // Beyond microseconds nothing is left of a double that counts seconds since 1970.
        if (at - from < 9) fraction = fraction * 10 + digit;
      }
      if (at === from) return NaN;
      second += fraction / 10 ** Math.min(9, at - from);
    }
  }
  const seconds = checkedSeconds(hour, minute, second);
  if (at === text.length) return (out.utcS = days * 86400 + seconds);
  const zone = text.charCodeAt(at);
  let offsetS = 0;
  if (zone === 90 || zone === 122) {
    if (at + 1 !== text.length) return NaN;
  } else if (zone === 43 || zone === 45) {
    const hours = digits(text, at + 1, 2);
    const colon = text.charCodeAt(at + 3) === 58 ? 1 : 0;
    const minutes = at + 3 === text.length ? 0 : digits(text, at + 3 + colon, 2);
    if (hours < 0 || hours > 18 || minutes < 0 || minutes > 59) return NaN;
    if (at + 3 !== text.length && at + 5 + colon !== text.length) return NaN;
    offsetS = (zone === 45 ? -1 : 1) * (hours * 3600 + minutes * 60);
  } else return NaN;
  out.zoned = true;
  return (out.utcS = days * 86400 + seconds - offsetS);
}
