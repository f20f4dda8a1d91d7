import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BendbookError } from '../../../shared/model/fault.ts';
import {
  checkLimitSet,
  compareLimitSets,
  CRITERIA,
  criterionOf,
  describeSource,
  limitFor,
  parseLimitSet,
  parseVehicle,
} from '../../../shared/limits/index.ts';
import type { LimitBand, LimitSet } from '../../../shared/schema/limit-set.ts';
import { CriterionId } from '../../../shared/schema/limit-set.ts';
import { limitSet, vehicle } from '../assess/example.ts';

function set(bands: LimitBand[], over: Partial<LimitSet> = {}): LimitSet {
  return {
    formatVersion: 1,
    id: 'own',
    name: 'Own set',
    mode: 'rail',
    appliesTo: 'a line for tests',
    speedStepKmh: 5,
    limits: [
      {
        criterion: 'cant_deficiency',
        bands,
        source: { document: 'operator', clause: '4.2', year: 2024, status: 'operator' },
      },
    ],
    cautions: [],
    ...over,
  };
}

function faultOf(action: () => unknown): { code: string; cause: string; file: string | undefined } {
  try {
    action();
  } catch (error) {
    if (error instanceof BendbookError)
      return { code: error.fault.code, cause: error.fault.cause, file: error.fault.place.file };
    throw error;
  }
  throw new Error('no fault was raised');
}

describe('criteria', () => {
  it('describe every criterion of the schema once', () => {
    expect(CRITERIA.map((c) => c.id).sort()).toEqual([...CriterionId.options].sort());
    expect(criterionOf('element_length').sense).toBe('least');
  });
});

describe('limit lookup', () => {
  const banded = set([
    { maxSpeedKmh: 80, normal: 100, exceptional: null },
    { minSpeedKmh: 80, minRadiusM: 650, normal: 150, exceptional: 165 },
    { minSpeedKmh: 80, normal: null, exceptional: 130 },
  ]);

  it.each([
    [60, 300, 'normal', 100],
    [80, 1000, 'normal', 100],
    [81, 1000, 'normal', 150],
    [81, 1000, 'exceptional', 165],
    [81, 400, 'normal', null],
    [81, 400, 'exceptional', 130],
    [60, 300, 'exceptional', 100],
  ] as const)('at %d km/h and R %d m the %s limit is %s', (speed, radius, tier, expected) => {
    expect(limitFor(banded, 'cant_deficiency', tier, speed, radius)?.value ?? null).toBe(expected);
  });

  it('a speed that comes back from m/s a hair above a bound still belongs to the band', () => {
    expect((60 / 3.6) * 3.6).toBeGreaterThan(60);
    expect(
      limitFor(
        set([{ maxSpeedKmh: 60, normal: 130, exceptional: null }]),
        'cant_deficiency',
        'normal',
        (60 / 3.6) * 3.6,
        300,
      )?.value,
    ).toBe(130);
  });

  it('has none for a criterion that the set lacks', () => {
    expect(limitFor(banded, 'jerk', 'normal', 60, 300)).toBeNull();
  });

  it('tells the tier that a value was taken from', () => {
    expect(limitFor(banded, 'cant_deficiency', 'exceptional', 60, 300)?.tier).toBe('normal');
  });

  it('names document, clause, year and how a value was obtained', () => {
    expect(describeSource(banded.limits[0]!)).toBe("operator, 4.2 (2024); operator's own");
  });
});

describe('checks of a limit set', () => {
  it.each([
    ['a band that ends before it begins', [{ minSpeedKmh: 100, maxSpeedKmh: 80, normal: 1, exceptional: null }]],
    ['an exceptional value stricter than the normal one', [{ normal: 130, exceptional: 100 }]],
    ['a limit of zero', [{ normal: 0, exceptional: null }]],
  ])('refuse %s', (_, bands) => {
    expect(checkLimitSet(set(bands)).map((p) => p.severity)).toContain('serious');
  });

  it('warn of a band that an earlier one covers, and of a criterion without meaning in the mode', () => {
    const shadowed = set([
      { normal: 130, exceptional: null },
      { maxSpeedKmh: 80, normal: 100, exceptional: null },
    ]);
    expect(checkLimitSet(shadowed)).toEqual([
      { severity: 'warning', message: 'cant_deficiency: band 2 never applies, an earlier one covers it' },
    ]);
    expect(checkLimitSet(set([{ normal: 130, exceptional: null }], { mode: 'road' })).map((p) => p.severity)).toEqual([
      'warning',
    ]);
  });

  it('refuse a criterion that stands twice', () => {
    const once = set([{ normal: 130, exceptional: null }]);
    expect(checkLimitSet({ ...once, limits: [...once.limits, ...once.limits] }).map((p) => p.message)).toContain(
      'cant_deficiency stands twice',
    );
  });
});

describe('reading files', () => {
  it('a set written out is read back the same', () => {
    const original = limitSet('conventional-train');
    expect(parseLimitSet(JSON.stringify(original), 'x.json')).toEqual(original);
    expect(parseVehicle(`\uFEFF${JSON.stringify(vehicle('tram'))}`, 'x.json')).toEqual(vehicle('tram'));
  });

  it('text that is not JSON is told with file and code', () => {
    expect(faultOf(() => parseLimitSet('cant;160', 'own.json'))).toMatchObject({
      code: 'limits/not-json',
      file: 'own.json',
    });
    expect(faultOf(() => parseVehicle('', 'v.json'))).toMatchObject({ code: 'vehicle/not-json', file: 'v.json' });
  });

  it('missing fields are named by their path', () => {
    const rest = { ...limitSet('tram-metro'), limits: undefined };
    expect(faultOf(() => parseLimitSet(JSON.stringify(rest)))).toMatchObject({
      code: 'limits/not-a-limit-set',
      cause: expect.stringContaining('limits') as string,
    });
    expect(faultOf(() => parseVehicle('{"formatVersion":2}')).cause).toContain('formatVersion');
  });

  it('a set that contradicts itself is refused with the criterion', () => {
    const bad = set([{ normal: 130, exceptional: 100 }]);
    expect(faultOf(() => parseLimitSet(JSON.stringify(bad)))).toMatchObject({
      code: 'limits/contradictory',
      cause: expect.stringContaining('cant_deficiency') as string,
    });
  });

  it('whatever JSON is given, the outcome is a set or a fault', () => {
    fc.assert(
      fc.property(fc.json(), (text) => {
        expect(['limits/not-json', 'limits/not-a-limit-set', 'limits/contradictory']).toContain(
          faultOf(() => parseLimitSet(text)).code,
        );
      }),
    );
  });
});

describe('comparison of two sets', () => {
  it('lists what either has, in the order of the sheet, and what is the same', () => {
    const rows = compareLimitSets(limitSet('conventional-train'), limitSet('tsi-infrastructure'));
    const by = new Map(rows.map((r) => [r.criterion, r]));
    expect(by.get('cant')?.same).toBe(true);
    expect(by.get('cant_deficiency')?.same).toBe(false);
    expect(by.get('jerk')?.second).toBeNull();
    expect(rows.map((r) => r.criterion)).toEqual(CRITERIA.map((c) => c.id).filter((id) => by.has(id)));
  });
});
