import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { readFileSync } from 'node:fs';
import { assessRun, fitRegister, parseCantRegister } from '../../../shared/assess/index.ts';
import { BendbookError } from '../../../shared/model/fault.ts';
import type { Passage } from '../../../shared/model/passage.ts';
import type { CantEntry, CantRegister } from '../../../shared/schema/cant-register.ts';
import { CantRegister as RegisterSchema } from '../../../shared/schema/cant-register.ts';
import { ROOT } from '../../support/shared.ts';
import { passage, run, setup } from './example.ts';

function read(text: string): ReturnType<typeof parseCantRegister> {
  return parseCantRegister(text, { id: 'r', name: 'register.csv' });
}

function register(entries: CantEntry[], over: Partial<CantRegister> = {}): CantRegister {
  return { id: 'r', name: 'register.csv', offsetM: 0, stretch: 1, entries, ...over };
}

function codeOf(action: () => unknown): string {
  try {
    action();
  } catch (error) {
    if (error instanceof BendbookError) return error.fault.code;
    throw error;
  }
  return 'none';
}

// Arcs at 1080-1380, 3080-3380, 5080-5380, 7080-7380 m; hands left, right, left, right.
const line: Passage[] = [0, 1, 2, 3].map((i) =>
  passage({ number: i + 1, startM: 1000 + 2000 * i, hand: i % 2 === 0 ? 'left' : 'right' }),
);

function cants(reg: CantRegister): (number | null)[] {
  return assessRun(run(line), setup({ register: reg, cantRule: { kind: 'unknown' } }), { working: false }).curves.map(
    (c) => c.row.cant_mm,
  );
}

function codes(reg: CantRegister, passages: Passage[] = line): string[] {
  return assessRun(run(passages), setup({ register: reg, cantRule: { kind: 'unknown' } }), {
    working: false,
  }).findings.map((f) => f.code);
}

describe('reading a cant register', () => {
  it('takes comma, semicolon with decimal commas, and tab', () => {
    const wanted = [{ line: 2, fromM: 1080.5, toM: 1380, cantMm: 95 }];
    expect(read('from_m,to_m,cant_mm\n1080.5,1380,95').register.entries).toEqual(wanted);
    expect(read('From (m);To (m);Cant (mm)\r\n1080,5;1380;95\r\n').register.entries).toEqual(wanted);
    expect(read('start_m\tend_m\tcant\n1080,5\t1380\t95').register.entries).toEqual(wanted);
  });

  it('takes kilometres, stationing, feet and inches', () => {
    expect(read('from_km,to_km,cant_mm\n12.5,12.7,80').register.entries[0]).toMatchObject({ fromM: 12500, toM: 12700 });
    expect(read('from_km;to_km;cant_mm\n12+345,5;12+700;80').register.entries[0]).toMatchObject({
      fromM: 12345.5,
      toM: 12700,
    });
    const us = read('from_ft,to_ft,cant_in\n1000,2000,4').register.entries[0]!;
    expect(us.fromM).toBeCloseTo(304.8, 9);
    expect(us.cantMm).toBeCloseTo(101.6, 9);
  });

  it('takes positions of the ends, curve numbers, percent for roads, and notes', () => {
    expect(read('from_lat,from_lon,to_lat,to_lon,cant_mm\n51,4,51.002,4.004,60').register.entries[0]).toMatchObject({
      fromLatDeg: 51,
      toLonDeg: 4.004,
    });
    expect(read('curve,superelevation_pct,remark\n3,2.5,"wide, wet"').register.entries[0]).toEqual({
      line: 2,
      curve: 3,
      superelevationPct: 2.5,
      note: 'wide, wet',
    });
  });

  it('passes over comments and blank lines and keeps the line numbers of the file', () => {
    expect(read('# register\n\nfrom_m,to_m,cant_mm\n# none here\n10,20,30\n').register.entries[0]).toMatchObject({
      line: 5,
    });
  });

  it('leaves out rows that cannot be read and counts each', () => {
    const { register: reg, findings } = read('from_m,to_m,cant_mm\n10,20,30\n30,40,n/a\n,,50\n60,70,\n80,90,40');
    expect(reg.entries).toHaveLength(2);
    expect(findings).toHaveLength(1);
    expect(findings[0]).toMatchObject({ code: 'assess/cant-rows-unreadable', count: 3, dropped: 3 });
    expect(findings[0]!.places.map((p) => p.line)).toEqual([3, 4, 5]);
  });

  it.each([
    ['cant/empty', ''],
    ['cant/empty', '# only a comment\n'],
    ['cant/no-value-column', 'from_m,to_m,height\n1,2,3'],
    ['cant/no-place-column', 'name,cant_mm\na,3'],
    ['cant/no-rows', 'from_m,to_m,cant_mm\na,b,c'],
  ])('is refused with %s', (code, text) => {
    expect(codeOf(() => read(text))).toBe(code);
  });

  it('a refusal lists the columns found', () => {
    try {
      read('von;bis;Hoehe\n1;2;3');
      expect.unreachable();
    } catch (error) {
      expect((error as BendbookError).fault.cause).toContain('"von", "bis", "Hoehe"');
    }
  });

  it('whatever text is given, the outcome is a register or a fault', () => {
    fc.assert(
      fc.property(fc.string(), (text) => {
        const withHeader = `from_m,to_m,cant_mm\n${text}`;
        const code = codeOf(() => expect(RegisterSchema.safeParse(read(withHeader).register).success).toBe(true));
        expect(['none', 'cant/no-rows']).toContain(code);
      }),
    );
  });

  it('the example that is shipped reads without a finding', () => {
    const { register: reg, findings } = read(readFileSync(`${ROOT}data/cant/example.csv`, 'utf8'));
    expect(findings).toEqual([]);
    expect(reg.entries.map((e) => e.cantMm)).toEqual([95, 110, 0]);
  });
});

describe('laying a register onto a run', () => {
  const entries: CantEntry[] = [
    { fromM: 1080, toM: 1380, cantMm: 90 },
    { fromM: 3080, toM: 3380, cantMm: 100 },
    { fromM: 5080, toM: 5380, cantMm: 110 },
    { fromM: 7080, toM: 7380, cantMm: 120 },
  ];

  it('meets curves by chainage', () => {
    expect(cants(register(entries))).toEqual([90, 100, 110, 120]);
  });

  it('with offset and stretch', () => {
    const moved = entries.map((e) => ({ ...e, fromM: 40000 + 1.001 * e.fromM!, toM: 40000 + 1.001 * e.toM! }));
    expect(cants(register(moved, { offsetM: 40000, stretch: 1.001 }))).toEqual([90, 100, 110, 120]);
  });

  it('against the direction of the run', () => {
    const reversed = entries.map((e) => ({ ...e, fromM: 50000 - e.toM!, toM: 50000 - e.fromM! }));
    expect(cants(register(reversed, { offsetM: 50000, stretch: -1 }))).toEqual([90, 100, 110, 120]);
  });

  it('by curve number, and by positions', () => {
    expect(cants(register([{ curve: 3, cantMm: 77 }]))).toEqual([null, null, 77, null]);
    const placed = line.map((p, i) => ({
      ...p,
      start: [51 + i, 4] as const,
      middle: [51.001 + i, 4.002] as const,
      end: [51.002 + i, 4.004] as const,
    }));
    const reg = register([{ fromLatDeg: 53, fromLonDeg: 4, toLatDeg: 53.002, toLonDeg: 4.004, cantMm: 66 }]);
    expect(assessRun(run(placed), setup({ register: reg })).curves.map((c) => c.row.cant_source)).toEqual([
      'assumed',
      'assumed',
      'registered',
      'assumed',
    ]);
  });

  it('by a single chainage on the curve', () => {
    expect(cants(register([{ fromM: 3200, cantMm: 55 }]))).toEqual([null, 55, null, null]);
  });

  it('an entry that only grazes a curve says nothing of it', () => {
    expect(cants(register([{ fromM: 900, toM: 1090, cantMm: 60 }]))).toEqual([null, null, null, null]);
  });

  it('where it is silent the rule holds', () => {
    const { curves } = assessRun(
      run(line),
      setup({ register: register(entries.slice(0, 1)), cantRule: { kind: 'constant', value: 50 } }),
    );
    expect(curves.map((c) => [c.row.cant_mm, c.row.cant_source])).toEqual([
      [90, 'registered'],
      [50, 'assumed'],
      [50, 'assumed'],
      [50, 'assumed'],
    ]);
  });

  it('the share rule gives a share of equilibrium cant, capped', () => {
    const rule = (capMm: number) => ({ kind: 'share', share: 0.5, speedKmh: 120, capMm }) as const;
    const at = (capMm: number): number =>
      assessRun(run(line), setup({ cantRule: rule(capMm) })).curves[0]!.row.cant_mm!;
    expect(at(160)).toBeCloseTo(242.79 / 2, 1);
    expect(at(100)).toBe(100);
  });

  it('signs that follow the hand are read as the raised rail, whichever hand is positive', () => {
    for (const sign of [1, -1]) {
      const signed = entries.map((e, i) => ({ ...e, cantMm: e.cantMm! * sign * (i % 2 === 0 ? 1 : -1) }));
      expect(cants(register(signed))).toEqual([90, 100, 110, 120]);
      expect(codes(register(signed))).toContain('assess/cant-signed-by-hand');
    }
  });

  it('one negative value among positive ones is adverse cant, not a convention', () => {
    const one = entries.map((e, i) => (i === 1 ? { ...e, cantMm: -20 } : e));
    expect(cants(register(one))).toEqual([90, -20, 110, 120]);
    expect(codes(register(one))).toContain('assess/cant-adverse');
  });
});

describe('a register that contradicts the run', () => {
  const fit = (i: number, cantMm: number): CantEntry => ({ fromM: 1080 + 2000 * i, toM: 1380 + 2000 * i, cantMm });
  const good = [fit(0, 90), fit(1, 100), fit(2, 110), fit(3, 120)];

  it('raises nothing when it fits', () => {
    expect(codes(register(good))).toEqual([]);
  });

  it('cant on a straight', () => {
    const { findings } = assessRun(
      run(line),
      setup({ register: register([...good, { line: 9, fromM: 2000, toM: 2200, cantMm: 80 }]) }),
    );
    const found = findings.find((f) => f.code === 'assess/cant-on-straight');
    expect(found).toMatchObject({ count: 1, severity: 'warning' });
    expect(found!.places[0]).toMatchObject({ file: 'register.csv', line: 9, chainageM: 2100 });
  });

  it('no cant on a sharp curve', () => {
    expect(codes(register([fit(0, 0), ...good.slice(1)]))).toContain('assess/no-cant-on-sharp-curve');
  });

  it('more cant than balances the highest recorded speed', () => {
    const slow = line.map((p) => ({ ...p, speedMps: p.speedMps.map(() => 15) }));
    // 1500 * 225 / (9.80665 * 700) = 49 mm balances 15 m/s.
    expect(codes(register(good), slow)).toContain('assess/cant-above-equilibrium');
  });

  it('a curve of which it says nothing', () => {
    const { findings } = assessRun(run(line), setup({ register: register(good.slice(1)) }));
    expect(findings.find((f) => f.code === 'assess/cant-missing')).toMatchObject({
      count: 1,
      message: expect.stringContaining('curve 1') as string,
    });
  });

  it('entries that disagree: the least counts, and it is told', () => {
    const twice = register([...good, fit(1, 60)]);
    expect(cants(twice)).toEqual([90, 60, 110, 120]);
    expect(codes(twice)).toContain('assess/cant-entries-disagree');
  });

  it('an entry that is said twice alike is no contradiction', () => {
    expect(codes(register([...good, fit(1, 100)]))).toEqual([]);
  });

  it('values without meaning: percent for a railway is taken, millimetres for a road are not', () => {
    const percent = register([{ curve: 1, superelevationPct: 6 }, ...good.slice(1)]);
    expect(cants(percent)[0]).toBe(90);
    const road = assessRun(run(line), setup({ mode: 'road', register: register(good) }));
    expect(road.findings.find((f) => f.code === 'assess/cant-unusable')).toMatchObject({ count: 4 });
  });
});

describe('finding offset and stretch of a register', () => {
  const middles = [1230, 3230, 4000, 5230, 7230, 9100];
  const curves = middles.map((m, i) => passage({ number: i + 1, startM: m - 230 }));

  it.each([
    [12000, 1],
    [12000, 1.002],
    [31000, -1],
    [31000, -0.998],
  ])('offset %d, stretch %d', (offsetM, stretch) => {
    const entries = middles.map((m) => {
      const at = offsetM + stretch * m;
      return { fromM: at - 150, toM: at + 150, cantMm: 100 };
    });
    const fit = fitRegister(register(entries), run(curves))!;
    expect(fit.offsetM).toBeCloseTo(offsetM, 3);
    expect(fit.stretch).toBeCloseTo(stretch, 6);
    expect(fit.matched).toBe(6);
    expect(fit.rmsM).toBeLessThan(1e-6);
  });

  it('finds it with an entry missing, one wrong and chainages to 10 m', () => {
    const entries = middles.slice(1).map((m) => ({ fromM: Math.round((12000 + m) / 10) * 10, cantMm: 100 }));
    const fit = fitRegister(register([...entries, { fromM: 14700, cantMm: 80 }]), run(curves))!;
    expect(Math.abs(fit.offsetM - 12000)).toBeLessThan(10);
    expect(fit.matched).toBe(5);
  });

  it('says nothing with fewer than three entries', () => {
    expect(fitRegister(register([{ fromM: 1, cantMm: 100 }]), run(curves))).toBeNull();
  });
});
