import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { stepOf } from '../../../server/clean/resolution.ts';
import { cleanRecording } from '../../../server/clean/index.ts';
import { FLAG } from '../../../shared/model/run.ts';
import { eastward, fixAt, recordingWith, START_S, type TestFix } from './support.ts';

function clean(list: readonly TestFix[]) {
  const { runs, findings } = cleanRecording(recordingWith(list));
  const kept = runs.reduce((total, { fixes }) => total + fixes.count, 0);
  const dropped = findings.reduce((total, finding) => total + finding.dropped, 0);
  // The first law of this stage: every fix is in a run or counted as dropped, once.
  expect(kept + dropped).toBe(list.length);
  const all = [...findings, ...runs.flatMap((run) => run.findings)];
  return {
    runs,
    findings,
    count: (code: string) => all.find((finding) => finding.code === `clean/${code}`)?.count ?? 0,
  };
}

const flagged = (flags: Uint8Array, bit: number) => [...flags].filter((flag) => (flag & bit) !== 0).length;

describe('trips', () => {
  it('keeps a run whole over a stop of ten minutes, a tunnel and a station with wandering positions', () => {
    const list = [
      ...eastward(120),
      ...Array.from({ length: 600 }, (_, i) => fixAt(120 + i, 1800 + 2 * Math.sin(i), 2 * Math.cos(i / 3))),
      ...eastward(100, 15, 720, 1800),
      ...eastward(100, 15, 1000, 1800 + 280 * 15),
    ];
    const { runs, count } = clean(list);
    expect(runs).toHaveLength(1);
    expect(count('gap')).toBe(1);
    expect(flagged(runs[0]!.fixes.flags, FLAG.GAP_BEFORE)).toBe(1);
  });

  it('ends a run at a gap of more than twenty minutes, and at a day-long leap', () => {
    const { runs, count } = clean([...eastward(60), ...eastward(60, 15, 1300), ...eastward(60, 15, 90_000)]);
    expect(runs.map(({ fixes }) => fixes.count)).toEqual([60, 60, 60]);
    expect(runs.map(({ id }) => id)).toEqual(['1', '2', '3']);
    expect(count('trip-end')).toBe(2);
  });

  it('leaves out lone false fixes and short displaced stretches, with their places', () => {
    const list = eastward(200).map((fix, i) =>
      i === 50 || (i >= 100 && i < 110) ? { ...fix, lat: fix.lat + 0.01 } : fix,
    );
    const { runs, findings } = clean(list);
    expect(runs).toHaveLength(1);
    const finding = findings.find(({ code }) => code === 'clean/impossible-jump')!;
    expect(finding.dropped).toBe(11);
    expect(finding.places[0]).toEqual({ file: 'test', line: 51, utcS: START_S + 50 });
  });

  it('splits where the position leaps aside and stays', () => {
    const { runs, count } = clean([...eastward(200), ...eastward(200, 15, 200, 3000, 800)]);
    expect(runs.map(({ fixes }) => fixes.count)).toEqual([200, 200]);
    expect(count('position-leap')).toBe(1);
  });

  it('does not split where positions that lagged behind catch up along the line', () => {
    const { runs, count } = clean([...eastward(200), ...eastward(200, 15, 200, 3000 + 120)]);
    expect(runs).toHaveLength(1);
    expect(count('catch-up')).toBe(1);
  });

  it('lets a train accelerate and brake at 2 m/s² without a word', () => {
    let [x, v] = [0, 0];
    const list = Array.from({ length: 120 }, (_, t) => {
      v = Math.max(0, Math.min(60, v + (t < 60 ? 1.5 : -2)));
      x += v;
      return fixAt(t, x, 0);
    });
    expect(clean(list).findings).toEqual([]);
  });

  it('separates two vehicles by their segments, or by alternation when the log does not tell them apart', () => {
    const a = eastward(100).map((fix) => ({ ...fix, segment: 0 }));
    const b = eastward(100, 12, 0, 0, 5000).map((fix) => ({ ...fix, segment: 1, utcS: fix.utcS + 0.5 }));
    const mixed = a.flatMap((fix, i) => [fix, b[i]!]);
    const bySegment = clean(mixed);
    expect(bySegment.runs.map(({ fixes }) => fixes.count)).toEqual([100, 100]);
    const byMotion = clean(mixed.map((fix) => ({ ...fix, segment: 0 })));
    expect(byMotion.runs.map(({ fixes }) => fixes.count)).toEqual([100, 100]);
    expect(byMotion.count('two-vehicles')).toBe(1);
  });

  it('makes no run of fewer than 8 fixes or less than 100 m, and says so', () => {
    expect(clean(eastward(7)).count('too-short')).toBe(1);
    const still = Array.from({ length: 500 }, (_, i) => fixAt(i, 3 * Math.sin(i), 3 * Math.cos(i)));
    expect(clean(still).count('too-short')).toBe(1);
    expect(clean([]).runs).toEqual([]);
  });

  it('keeps a run over the antimeridian whole', () => {
    const list = eastward(100).map((fix, i) => ({
      ...fix,
      lat: -16.8,
      lon: i < 50 ? 179.99 + i * 2e-4 : -180 + (i - 50) * 2e-4,
    }));
    const { runs } = clean(list);
    expect(runs).toHaveLength(1);
    const { xM, yM } = runs[0]!.fixes;
    const steps = [...xM.slice(1)].map((x, i) => Math.hypot(x - xM[i]!, yM[i + 1]! - yM[i]!));
    expect(Math.max(...steps) - Math.min(...steps)).toBeLessThan(0.01);
  });
});

describe('clocks', () => {
  it('puts swapped fixes in order and leaves out a block written twice', () => {
    const list = eastward(100);
    const swapped = [...list];
    [swapped[40], swapped[41]] = [swapped[41]!, swapped[40]!];
    expect(clean(swapped).count('out-of-order')).toBe(1);
    const twice = clean([...list.slice(0, 50), ...list.slice(20, 50), ...list.slice(50)]);
    expect(twice.runs[0]!.fixes.count).toBe(100);
    expect(twice.count('repeated')).toBe(30);
  });

  it('spreads fixes that share a whole second', () => {
    // 5 Hz, fractions lost by the recorder.
    const list = Array.from({ length: 300 }, (_, i) => ({ ...fixAt(Math.floor(i / 5), i * 3, 0) }));
    const { runs, count } = clean(list);
    expect(count('shared-second')).toBe(300);
    expect(runs[0]!.intervalS).toBeCloseTo(0.2, 6);
    const { timeS } = runs[0]!.fixes;
    for (let i = 1; i < timeS.length; i++) expect(timeS[i]! - timeS[i - 1]!).toBeCloseTo(0.2, 6);
  });

  it.each([
    ['back by an hour', -3600],
    ['forward by 1,024 weeks', 1024 * 604_800],
    ['forward by an hour', 3600],
  ])('repairs a clock that jumps %s while the vehicle moves on', (_, jump) => {
    const list = eastward(300).map((fix, i) => (i >= 200 ? { ...fix, utcS: fix.utcS + jump } : fix));
    const { runs, count } = clean(list);
    expect(runs).toHaveLength(1);
    expect(runs[0]!.fixes.timeS[299]).toBeCloseTo(299, 6);
    expect(count('clock-jump') + count('week-rollover')).toBe(1);
  });

  it('leaves out times before satellite navigation and after 2100, places at 0°/0° and fixes without a time', () => {
    const list = eastward(100);
    list[10] = { ...list[10]!, utcS: 0 };
    list[20] = { ...list[20]!, utcS: 9e9 };
    list[30] = { ...list[30]!, lat: 0, lon: 0 };
    list[40] = { ...list[40]!, utcS: NaN };
    const { runs, count } = clean(list);
    expect(runs[0]!.fixes.count).toBe(96);
    expect([count('wrong-time'), count('nowhere'), count('no-time')]).toEqual([2, 1, 1]);
  });

  it('gives strictly increasing times and counts every fix, whatever the order, repeats and leaps', () => {
    const fix = fc.record({
      utcS: fc.integer({ min: 0, max: 4000 }).map((t) => START_S + t),
      lat: fc.integer({ min: 0, max: 300 }).map((k) => 47 + k / 10_000),
      lon: fc.integer({ min: 0, max: 300 }).map((k) => 8 + k / 10_000),
      segment: fc.integer({ min: 0, max: 2 }),
    });
    fc.assert(
      fc.property(fc.array(fix, { maxLength: 120 }), (list) => {
        for (const { fixes } of clean(list).runs) {
          for (let i = 1; i < fixes.count; i++) expect(fixes.timeS[i]!).toBeGreaterThan(fixes.timeS[i - 1]!);
        }
      }),
      { seed: 5, numRuns: 300 },
    );
  });
});

describe('standing, holding, weakness', () => {
  it('marks standing by the speed channel, and by positions without one', () => {
    const withSpeed = [
      ...eastward(60).map((fix) => ({ ...fix, speed: 15 })),
      ...Array.from({ length: 60 }, (_, i) => ({ ...fixAt(60 + i, 900, 0), speed: 0.1 })),
      ...eastward(60, 15, 120, 900).map((fix) => ({ ...fix, speed: 15 })),
    ];
    expect(flagged(clean(withSpeed).runs[0]!.fixes.flags, FLAG.STOPPED)).toBe(60);
    const without = withSpeed.map(({ utcS, lat, lon }) => ({ utcS, lat, lon }));
    const stopped = flagged(clean(without).runs[0]!.fixes.flags, FLAG.STOPPED);
    expect(stopped).toBeGreaterThanOrEqual(54);
    expect(stopped).toBeLessThanOrEqual(62);
  });

  it('marks positions that a coasting receiver repeats, and not those of a stop', () => {
    const list = eastward(100).map((fix, i, all) => (i > 50 && i <= 55 ? { ...fix, lon: all[50]!.lon } : fix));
    const { runs, count } = clean(list);
    expect(count('held')).toBe(5);
    expect([...runs[0]!.fixes.flags.slice(50, 57)].map((flag) => flag & FLAG.HELD)).toEqual([0, 4, 4, 4, 4, 4, 0]);
  });

  it('trusts fixes with few satellites less', () => {
    const list = eastward(100).map((fix, i) => ({ ...fix, satellites: i < 10 ? 3 : 9 }));
    expect(flagged(clean(list).runs[0]!.fixes.flags, FLAG.WEAK)).toBe(10);
  });
});

/** A run on a circle of 400 m at 12 m/s with its exact course, clockwise from north. */
function circle(
  count: number,
  change: (fix: TestFix & { courseDeg: number }, i: number) => Partial<TestFix>,
): TestFix[] {
  return Array.from({ length: count }, (_, i) => {
    const angle = (i * 12) / 400;
    const fix = { ...fixAt(i, 400 * Math.sin(angle), 400 * (1 - Math.cos(angle))), speed: 12 };
    const courseDeg = (((90 - (angle * 180) / Math.PI) % 360) + 360) % 360;
    return { ...fix, courseDeg, ...change({ ...fix, courseDeg }, i) };
  });
}

const courseErrorDeg = (list: TestFix[], given: TestFix[]) => {
  const { courseRad } = clean(given).runs[0]!.fixes;
  return Math.max(
    ...list.map(({ courseDeg }, i) => {
      const off = (courseRad![i]! * 180) / Math.PI - courseDeg!;
      return Math.abs(off - 360 * Math.round(off / 360));
    }),
  );
};

describe('speed and course channels', () => {
  it.each([
    ['km/h', 3.6],
    ['mph', 1 / 0.44704],
    ['kn', 3600 / 1852],
  ])('finds a speed that is in %s and corrects it', (_, factor) => {
    const { runs, count } = clean(circle(200, ({ speed }) => ({ speed: speed! * factor })));
    expect(count('speed-unit')).toBe(200);
    expect(runs[0]!.fixes.speedMps![100]).toBeCloseTo(12, 1);
  });

  it('drops a speed that follows nothing', () => {
    const { runs, count } = clean(circle(200, (_, i) => ({ speed: i % 2 === 0 ? 55 : 85 })));
    expect(runs[0]!.fixes.speedMps).toBeNull();
    expect(count('speed-dropped')).toBe(200);
  });

  it('keeps a right course as it is', () => {
    const truth = circle(200, () => ({}));
    expect(courseErrorDeg(truth, truth)).toBeLessThan(1e-4);
  });

  it.each([
    ['counter-clockwise from east', (c: number) => 90 - c],
    ['counter-clockwise from north', (c: number) => -c],
    ['backwards', (c: number) => c + 180],
  ])('converts a course counted %s', (_, convention) => {
    const truth = circle(200, () => ({}));
    const given = circle(200, ({ courseDeg }) => ({ courseDeg: (convention(courseDeg) + 720) % 360 }));
    expect(clean(given).count('course-convention')).toBe(200);
    expect(courseErrorDeg(truth, given)).toBeLessThan(1);
  });

  it('takes out a constant offset such as magnetic declination', () => {
    const truth = circle(200, () => ({}));
    const given = circle(200, ({ courseDeg }) => ({ courseDeg: (courseDeg + 7) % 360 }));
    expect(clean(given).count('course-offset')).toBe(200);
    expect(courseErrorDeg(truth, given)).toBeLessThan(1);
  });

  it('drops a course that is always zero', () => {
    const { runs, count } = clean(circle(200, () => ({ courseDeg: 0 })));
    expect(runs[0]!.fixes.courseRad).toBeNull();
    expect(count('course-dropped')).toBe(200);
  });

  it('takes out a stale course while moving, and any course while slow', () => {
    const list = circle(200, ({ courseDeg }, i) => (i >= 100 && i < 110 ? { courseDeg: 321.987 } : { courseDeg }));
    // The stale value is the one before, as receivers repeat it.
    const stale = list.map((fix, i) => (i >= 100 && i < 110 ? { ...fix, courseDeg: list[99]!.courseDeg! } : fix));
    const { runs, count } = clean(stale);
    expect(count('course-stale')).toBe(10);
    expect(runs[0]!.fixes.courseRad![105]).toBeNaN();
    expect(runs[0]!.fixes.courseRad![115]).not.toBeNaN();
    const slow = clean(eastward(300, 1).map((fix) => ({ ...fix, speed: 1, courseDeg: 90 })));
    expect(slow.count('course-slow')).toBe(300);
  });

  it('keeps a whole-degree course that stays the same on a straight', () => {
    const { runs, count } = clean([
      ...eastward(100).map((fix) => ({ ...fix, speed: 15, courseDeg: 90 })),
      ...Array.from({ length: 100 }, (_, i) => ({
        ...fixAt(100 + i, 1500 + 13 * i, 7 * i),
        speed: 14.8,
        courseDeg: 62 + (i % 3) - 1,
      })),
    ]);
    expect(count('course-stale')).toBe(0);
    expect(runs[0]!.fixes.courseRad![50]).toBeCloseTo(Math.PI / 2, 6);
  });
});

describe('resolution', () => {
  const drive = Array.from({ length: 3000 }, (_, i) => 47 + 0.00013 * i + 0.002 * Math.sin(i / 50));

  it.each([
    ['five decimals', 1e-5, (v: number) => Number(v.toFixed(5))],
    ['six decimals', 1e-6, (v: number) => Number(v.toFixed(6))],
    ['thousandths of a minute', 1 / 60_000, (v: number) => Math.round(v * 60_000) / 60_000],
    ['single precision', 2 ** -18, (v: number) => Math.fround(v)],
  ])('finds latitudes written with %s', (_, step, round) => {
    expect(stepOf(Float64Array.from(drive, round), 1e-9) / step).toBeCloseTo(1, 3);
  });

  it('finds tenths of km/h in m/s and whole degrees in radians', () => {
    const speeds = Float32Array.from(drive, (_, i) => (Math.round(300 + 200 * Math.sin(i / 90)) / 10) * (1 / 3.6));
    expect(stepOf(speeds, 2e-5)).toBeCloseTo(0.1 / 3.6, 5);
    const courses = Float32Array.from(drive, (_, i) => (Math.round(180 + 150 * Math.sin(i / 70)) * Math.PI) / 180);
    expect(stepOf(courses, 2e-6)).toBeCloseTo(Math.PI / 180, 5);
  });

  it('says 0 for values without a step', () => {
    expect(stepOf(Float64Array.from(drive), 1e-9)).toBe(0);
    expect(stepOf(Float64Array.of(1, 1, 1), 1e-9)).toBe(0);
  });
});
