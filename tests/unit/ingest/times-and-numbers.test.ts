import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseAngle } from '../../../server/ingest/delimited/angles.ts';
import { guessDateOrder, parseClock, parseDate } from '../../../server/ingest/delimited/dates.ts';
import { decimal, readDecimal } from '../../../server/ingest/decimal.ts';
import { courseFromDegrees, wrapLongitude } from '../../../server/ingest/fix-builder.ts';
import { checkedDays, daysFromCivil, parseIso } from '../../../server/ingest/timestamp.ts';

const stamp = { utcS: NaN, zoned: false };
const iso = (text: string) => parseIso(text, stamp);

describe('parseIso', () => {
  it('agrees with the language on every date that both read', () => {
    // Source: Date.parse of the language (ECMA-262), an independent implementation.
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 4_102_444_800_000 }), (ms) => {
        const text = new Date(ms).toISOString();
        expect(iso(text)).toBeCloseTo(ms / 1000, 6);
      }),
      { seed: 1 },
    );
  });

  it('shifts offsets to UTC and tells a missing zone', () => {
    expect(iso('2024-05-17T11:12:49.5+02:00')).toBe(Date.parse('2024-05-17T09:12:49.500Z') / 1000);
    expect(iso('2024-05-17T11:12:49-0330')).toBe(Date.parse('2024-05-17T14:42:49Z') / 1000);
    expect(stamp.zoned).toBe(true);
    expect(iso('2024-05-17 09:12:49')).toBe(Date.parse('2024-05-17T09:12:49Z') / 1000);
    expect(stamp.zoned).toBe(false);
  });

  it('takes the leap second of 31 December 2016 as the second after it', () => {
    // Source: IERS Bulletin C 52 (July 2016): 2016-12-31T23:59:60Z.
    expect(iso('2016-12-31T23:59:60Z')).toBe(Date.parse('2017-01-01T00:00:00Z') / 1000);
  });

  it('keeps microseconds', () => {
    expect(iso('2024-05-17T09:12:49.123456Z') % 1).toBeCloseTo(0.123456, 6);
  });

  it.each([
    '',
    '1',
    '2024',
    '2024-13-01T00:00:00Z',
    '2023-02-29T00:00:00Z',
    '2024-05-17T25:00:00Z',
    '2024-05-17T09:61:00Z',
    '2024-05-17T09:12:49.Z',
    '2024-05-17T09:12:49+25:00',
    'yesterday',
    '2024-05-17T09:12:49Zx',
  ])('refuses %j instead of guessing', (text) => {
    expect(iso(text)).toBeNaN();
  });
});

describe('dates', () => {
  it('counts days as the language does, leap years included', () => {
    for (const [y, m, d] of [
      [1970, 1, 1],
      [2000, 2, 29],
      [2100, 3, 1],
      [1980, 1, 6],
      [2038, 1, 19],
    ] as const) {
      expect(daysFromCivil(y, m, d)).toBe(Date.UTC(y, m - 1, d) / 86_400_000);
    }
    expect(checkedDays(2100, 2, 29)).toBeNaN();
  });

  it.each([
    ['2008/05/04', 'dmy', '2008-05-04'],
    ['24-May-2019 18:11:23.018', 'dmy', '2019-05-24'],
    ['Fri May 24 2019', 'dmy', '2019-05-24'],
    ['31.12.2025', 'dmy', '2025-12-31'],
    ['12/31/2025', 'mdy', '2025-12-31'],
    ['250724', 'ymd', '2025-07-24'],
    ['240725', 'dmy', '2025-07-24'],
    ['90404', 'ymd', '2009-04-04'],
    ['20250724', 'dmy', '2025-07-24'],
  ] as const)('reads %s (%s) as %s', (text, order, date) => {
    expect(parseDate(text, order).days).toBe(Date.parse(`${date}T00:00:00Z`) / 86_400_000);
  });

  it('finds the order of day and month from the days beyond 12, and says when it cannot', () => {
    expect(guessDateOrder(['01/02/2025', '13/02/2025'], ['dmy', 'mdy'])).toEqual({ order: 'dmy', sure: true });
    expect(guessDateOrder(['01/02/2025', '02/13/2025'], ['dmy', 'mdy'])).toEqual({ order: 'mdy', sure: true });
    expect(guessDateOrder(['01/02/2025'], ['dmy', 'mdy']).sure).toBe(false);
  });

  it.each([
    ['09:12:49.4', 33169.4],
    ['9:12 pm', 76320],
    ['12:00:00 AM', 0],
    ['091249.25', 33169.25],
    ['74852200', 28132.2],
    ['11:12:49 +02:00', 33169],
    ['53000', 19800],
  ])('reads the clock %s', (text, seconds) => {
    expect(parseClock(text).seconds).toBeCloseTo(seconds, 6);
  });

  it.each(['', '25:00:00', '09:60:00', 'noon', '9'.repeat(20)])('refuses the clock %j', (text) => {
    expect(parseClock(text).seconds).toBeNaN();
  });
});

describe('cells without end', () => {
  it('are refused at once, not searched for ever', () => {
    // Cells like these once took half a minute each.
    const blanks = ' '.repeat(5000);
    expect(parseClock(`12:00:00${blanks}x`).seconds).toBeNaN();
    expect(parseDate(`17 May${blanks}x`, 'dmy').days).toBeNaN();
    expect(parseAngle(`47${blanks}x`)).toBeNaN();
  });
});

describe('numbers', () => {
  const bytes = (text: string) => new TextEncoder().encode(text);
  const read = (text: string, mark?: number) => readDecimal(bytes(text), 0, text.length, mark);

  it('reads every number exactly as the language does', () => {
    // Source: Number() of the language (ECMA-262), correctly rounded.
    fc.assert(
      fc.property(
        fc.double({ noNaN: true, noDefaultInfinity: true }),
        fc.integer({ min: 0, max: 12 }),
        (value, digits) => {
          for (const text of [String(value), value.toFixed(digits)]) {
            if (text.includes('e') && !/^-?[\d.]+e/.test(text)) continue;
            if (text.length > 60) continue;
            expect(Object.is(read(text), Number(text)), text).toBe(true);
            expect(Object.is(decimal(text), Number(text)), text).toBe(true);
          }
        },
      ),
      { seed: 2, numRuns: 2000 },
    );
  });

  it('reads a decimal comma where it is told to', () => {
    expect(read('48,137154', 44)).toBe(48.137154);
    expect(read('48,1,2', 44)).toBeNaN();
  });

  it.each(['', ' ', '-', '.', '1.2.3', '0x10', 'Infinity', 'NaN', '1e', '1e999', '--1', '1,5', '٣'])(
    'refuses %j',
    (text) => {
      expect(read(text)).toBeNaN();
      expect(decimal(text)).toBeNaN();
    },
  );
});

describe('angles', () => {
  it.each([
    ['-1.234', -1.234],
    ['1.234°S', -1.234],
    ['S1.234°', -1.234],
    ['1°14.04′S', -1.234],
    ['1°14′2.4″S', -1.234],
    ['1° 14\' 2.4" S', -1.234],
    ['31.765973N', 31.765973],
    ['125.7648551W', -125.7648551],
  ])('%s is %f', (text, degrees) => {
    expect(parseAngle(text)).toBeCloseTo(degrees, 9);
  });

  it.each(['', 'N', '1°75′', 'abc', '1°14′99″'])('refuses %j', (text) => {
    expect(parseAngle(text)).toBeNaN();
  });

  it('keeps courses in [0, 2 pi) and refuses what is none', () => {
    expect(courseFromDegrees(360)).toBe(0);
    expect(courseFromDegrees(-90)).toBeCloseTo(1.5 * Math.PI, 12);
    expect(Math.fround(courseFromDegrees(359.9999999999))).toBeLessThan(Math.fround(2 * Math.PI));
    expect(courseFromDegrees(1000)).toBeNaN();
  });

  it('brings longitudes counted to 360 into [-180, 180]', () => {
    expect(wrapLongitude(181)).toBe(-179);
    expect(wrapLongitude(180)).toBe(180);
    expect(wrapLongitude(361)).toBeNaN();
  });
});
