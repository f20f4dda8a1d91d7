import { describe, expect, it } from 'vitest';
import type { Alignment, Curve, Estimate } from '../../../shared/model/alignment.ts';
import { combineCurvature, radiusFromCurvature } from '../../../server/fuse/combine-curvature.ts';
import { fuseAsOneLine, fuseRuns, type RunTrace } from '../../../server/fuse/index.ts';
import { longestMonotone, toLineChainage } from '../../../server/fuse/match-runs.ts';

const exact = (value: number, sd = 0.01): Estimate => ({ value, sd, low: value - 2 * sd, high: value + 2 * sd });

function curve(number: number, kappa: number, from: number, to: number): Curve {
  const end = (middle: number) => ({
    kind: 'abrupt' as const,
    lengthM: exact(0),
    middleM: exact(middle),
    fromCurvaturePerM: 0,
    joins: null,
  });
  return {
    number,
    hand: kappa > 0 ? 'left' : 'right',
    shape: 'abrupt',
    startM: from,
    endM: to,
    arcStartM: from,
    arcEndM: to,
    entry: end(from),
    exit: end(to),
    curvaturePerM: exact(kappa, Math.abs(kappa) * 0.01),
    radiusM: exact(1 / Math.abs(kappa)),
    deflectionRad: exact(Math.abs(kappa) * (to - from)),
    lateralRelativeSd: 0.01,
    speedMps: exact(20),
    observedShare: 1,
    chi2PerDof: 1,
    remarks: [],
  };
}

/** A line of 4 km: a left bend R 400 at 1000-1300 m, a right bend R 600 at 2500-2900 m; shifted sideways, reversed at will. */
function trace(
  runId: string,
  options: { from?: number; to?: number; reverse?: boolean; eastShiftM?: number } = {},
): RunTrace {
  const { from = 0, to = 4000, reverse = false, eastShiftM = 0 } = options;
  const places: { s: number; lat: number; lon: number; course: number }[] = [];
  let [x, y, heading] = [0, 0, 0.4];
  for (let s = 0; s <= 4000; s += 5) {
    if (s >= from && s <= to) {
      const turn = reverse ? Math.PI : 0;
      places.push({
        s,
        lat: 47 + y / 111180,
        lon: 179.99 + (x + eastShiftM) / 76000,
        course: Math.PI / 2 - heading - turn,
      });
    }
    heading += s >= 1000 && s < 1300 ? 5 / 400 : s >= 2500 && s < 2900 ? -5 / 600 : 0;
    x += 5 * Math.cos(heading);
    y += 5 * Math.sin(heading);
  }
  if (reverse) places.reverse();
  const own = (s: number) => (reverse ? to - s : s - from);
  const curves = [curve(1, 1 / 400, 1000, 1300), curve(2, -1 / 600, 2500, 2900)].filter(
    (c) => c.startM >= from && c.endM <= to,
  );
  const mine = curves
    .map((c) =>
      curve(
        0,
        reverse ? -c.curvaturePerM.value : c.curvaturePerM.value,
        Math.min(own(c.startM), own(c.endM)),
        Math.max(own(c.startM), own(c.endM)),
      ),
    )
    .sort((a, b) => a.startM - b.startM)
    .map((c, i) => ({ ...c, number: i + 1 }));
  const alignment: Alignment = { lengthM: to - from, elements: [], curves: mine };
  return {
    runId,
    chainageM: places.map(({ s }) => own(s)),
    latDeg: places.map(({ lat }) => lat),
    lonDeg: places.map(({ lon }) => (lon > 180 ? lon - 360 : lon)),
    courseRad: places.map(({ course }) => course),
    alignment,
  };
}

describe('runs of one line', () => {
  it('are found in both directions, across the antimeridian, and the line beside them stays apart', () => {
    const lines = fuseRuns([
      trace('long'),
      trace('back', { reverse: true, eastShiftM: 6 }),
      trace('part', { from: 800, to: 3200, eastShiftM: -5 }),
      trace('other', { eastShiftM: 900 }),
    ]);
    expect(lines).toHaveLength(2);
    const [line] = lines;
    expect(line!.members.map(({ runId, direction }) => [runId, direction]).sort()).toEqual([
      ['back', -1],
      ['long', 1],
      ['part', 1],
    ]);
    expect(lines[1]!.members.map(({ runId }) => runId)).toEqual(['other']);
  });

  it('see the same curves: hand and chainage in the direction of the reference', () => {
    const [line] = fuseRuns([trace('long'), trace('back', { reverse: true }), trace('part', { from: 800, to: 3200 })]);
    expect(line!.curves.map(({ hand }) => hand)).toEqual(['left', 'right']);
    const [first] = line!.curves;
    expect(first!.seen.map(({ runId, curve: n }) => `${runId}:${String(n)}`).sort()).toEqual([
      'back:2',
      'long:1',
      'part:1',
    ]);
    expect(first!.startM).toBeCloseTo(1000, -1);
    expect(first!.endM).toBeCloseTo(1300, -1);
    expect(first!.radiusM.value).toBeCloseTo(400, 6);
    // Three equal runs: the standard error falls by sqrt(3).
    expect(first!.curvaturePerM.sd).toBeCloseTo(0.01 / 400 / Math.sqrt(3), 12);
  });

  it('map chainage back and forth', () => {
    const [line] = fuseRuns([trace('long'), trace('back', { reverse: true })]);
    const back = line!.members.find(({ runId }) => runId === 'back')!;
    expect(toLineChainage(back, 1000)).toBeGreaterThan(2990);
    expect(toLineChainage(back, 1000)).toBeLessThan(3010);
    expect(toLineChainage(back, 9000)).toBeNaN();
  });

  it('grouped by hand keep a run that shares nothing, without a mapping', () => {
    const line = fuseAsOneLine([trace('a'), trace('b', { eastShiftM: 5000 })]);
    expect(line.members.find(({ runId }) => runId === 'b')!.chainageM).toEqual([]);
    expect(line.curves).toHaveLength(2);
  });
});

describe('combined curvature', () => {
  it('equal runs that agree: weighted mean, sigma / sqrt(N)', () => {
    const { estimate, consistency } = combineCurvature([0.002, 0.002], [1e-5, 1e-5]);
    expect(estimate.value).toBeCloseTo(0.002, 12);
    expect(estimate.sd).toBeCloseTo(1e-5 / Math.SQRT2, 12);
    expect(consistency).toBe(0);
  });

  it('runs that disagree: the interval widens to their scatter instead of shrinking', () => {
    const { estimate, consistency } = combineCurvature([0.002, 0.0022], [1e-6, 1e-6]);
    expect(consistency).toBeGreaterThan(100);
    expect(estimate.low).toBeLessThan(0.002);
    expect(estimate.high).toBeGreaterThan(0.0022);
  });

  it('radius interval comes from that of curvature and is open when it reaches straight', () => {
    expect(radiusFromCurvature(exact(-0.002, 0.0001))).toMatchObject({ value: 500, low: 1 / 0.0022, high: 1 / 0.0018 });
    expect(radiusFromCurvature(exact(0.002, 0.002)).high).toBe(Infinity);
  });
});

describe('longestMonotone', () => {
  it('drops the places that turn back', () => {
    expect(longestMonotone([1, 2, 9, 3, 4, 5], 1)).toEqual([0, 1, 3, 4, 5]);
    expect(longestMonotone([5, 4, 1, 3, 2], -1)).toHaveLength(4);
    expect(longestMonotone([], 1)).toEqual([]);
  });
});
