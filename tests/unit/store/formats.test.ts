import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { parseWire, stringifyWire } from '../../../server/store/json.ts';
import { decodeProfile, encodeProfile } from '../../../server/store/profile-files.ts';
import { anyProfile } from './any-profile.ts';

describe('profile files', () => {
  it.each([0, 1, 3, 1001])('of %i places give back every number', (count) => {
    expect(decodeProfile(encodeProfile(anyProfile(count)))).toEqual(anyProfile(count));
  });

  it('of columns that are views of larger buffers hold the columns only', () => {
    const whole = anyProfile(10);
    const part = { ...anyProfile(4), speedMps: whole.speedMps.subarray(2, 6) };
    expect(decodeProfile(encodeProfile(part)).speedMps).toEqual(whole.speedMps.slice(2, 6));
  });

  it('that are cut off, longer or of another kind are refused', () => {
    const bytes = encodeProfile(anyProfile(5));
    expect(() => decodeProfile(bytes.subarray(0, -1))).toThrow('cut off');
    expect(() => decodeProfile(Buffer.concat([bytes, Buffer.alloc(1)]))).toThrow('cut off');
    expect(() => decodeProfile(Buffer.from('PK\u0003\u0004 something else'))).toThrow('not a profile file');
  });
});

describe('stored JSON', () => {
  it('gives back what was put in, NaN and infinities included', () => {
    const value = fc.letrec((tie) => ({
      value: fc.oneof(
        fc.double().map((v) => (v === 0 ? 0 : v)),
        // Texts that look like the marks themselves are not made by the program.
        fc.string().filter((text) => !text.startsWith('~')),
        fc.boolean(),
        fc.constant(null),
        fc.array(tie('value'), { maxLength: 4 }),
        fc.dictionary(
          fc.string({ minLength: 1 }).filter((key) => key !== '__proto__'),
          tie('value'),
          { maxKeys: 4, noNullPrototype: true },
        ),
      ),
    })).value;
    fc.assert(
      fc.property(value, (v) => {
        expect(parseWire(stringifyWire(v))).toEqual(v);
      }),
      { seed: 7, numRuns: 300 },
    );
  });
});
