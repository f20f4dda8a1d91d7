import { sampleCorrelation, standardDeviation } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import { FLAG } from '../../../shared/model/run.ts';
import { FAMILY_NAMES } from '../../../data/synthetic/families.ts';
import { gaussMarkov, seededStream } from '../../../data/synthetic/random.ts';
import { simulateRun } from '../../../data/synthetic/simulate.ts';

describe('random deviates', () => {
  it('are the same for the same seed and normal in their moments', () => {
    const a = seededStream(42);
    const b = seededStream(42);
    const values = Array.from({ length: 20_000 }, () => a.normal());
    expect(values.slice(0, 5)).toEqual(Array.from({ length: 5 }, () => b.normal()));
    const n = values.length;
    const moment = (power: number) => values.reduce((sum, value) => sum + value ** power, 0) / n;
    // Standard errors of the first, second and fourth moment of a normal sample: 1, sqrt 2, sqrt 96, over sqrt n.
    expect(Math.abs(moment(1))).toBeLessThan(4 / Math.sqrt(n));
    expect(Math.abs(moment(2) - 1)).toBeLessThan((4 * Math.SQRT2) / Math.sqrt(n));
    expect(Math.abs(moment(4) - 3)).toBeLessThan((4 * Math.sqrt(96)) / Math.sqrt(n));
  });

  it('wander with the asked correlation time', () => {
    const times = Float64Array.from({ length: 60_000 }, (_, i) => i * 0.5);
    const values = Array.from(gaussMarkov(seededStream(3), times, 2, 20));
    expect(standardDeviation(values)).toBeGreaterThan(1.85);
    expect(standardDeviation(values)).toBeLessThan(2.15);
    // exp(-10 s / 20 s) between values 20 samples apart.
    expect(sampleCorrelation(values.slice(20), values.slice(0, -20))).toBeCloseTo(Math.exp(-0.5), 1);
  });
});

describe('simulated runs', () => {
  it('are identical for one seed and different for another', () => {
    const receiver = { rateHz: 1, course: true, condition: 'dirty' } as const;
    const a = simulateRun('road', receiver, 5, { curves: 6 });
    expect(simulateRun('road', receiver, 5, { curves: 6 }).run).toEqual(a.run);
    expect(simulateRun('road', receiver, 6, { curves: 6 }).run).not.toEqual(a.run);
  });

  for (const family of FAMILY_NAMES) {
    it(`${family}: fixes scatter about the true line as the drawn receiver says, chainage never falls back`, () => {
      const { run, truth } = simulateRun(family, { rateHz: 5, course: true }, 11);
      const { fixes } = run;
      const along: number[] = [];
      const across: number[] = [];
      for (let i = 0; i < fixes.count; i += 1) {
        const s = truth.chainageM[i]!;
        const [x, y] = truth.line.positionAt(s);
        const heading = truth.line.headingAt(s);
        const [dx, dy] = [fixes.xM[i]! - x, fixes.yM[i]! - y];
        along.push(dx * Math.cos(heading) + dy * Math.sin(heading));
        across.push(dy * Math.cos(heading) - dx * Math.sin(heading));
        if (i > 0) {
          expect(s).toBeGreaterThanOrEqual(truth.chainageM[i - 1]!);
          expect(fixes.timeS[i]!).toBeGreaterThan(fixes.timeS[i - 1]!);
        }
      }
      const expected = Math.hypot(truth.errors.sigmaWhiteM, truth.errors.sigmaWanderM);
      const found = Math.hypot(standardDeviation(along), standardDeviation(across)) / Math.SQRT2;
      // A wander of some minutes gives few independent values per run: a wide range still catches wrong axes and units.
      expect(found / expected).toBeGreaterThan(0.4);
      expect(found / expected).toBeLessThan(1.8);
      expect(truth.line.lengthM - truth.chainageM.at(-1)!).toBeLessThan(40);
      if (family !== 'straights') expect(truth.curves.length).toBeGreaterThanOrEqual(20);
    });
  }

  it('report course and speed of the travelled line, with the lag asked for', () => {
    const { run, truth } = simulateRun('secondary', { rateHz: 1, course: true, errors: { lagS: 0.8 } }, 21);
    const { fixes } = run;
    let worst = 0;
    let lagged = 0;
    let prompt = 0;
    for (let i = 0; i < fixes.count; i += 1) {
      const course = fixes.courseRad![i]!;
      if (Number.isNaN(course)) continue;
      const at = truth.travel.at(fixes.timeS[i]! - 0.8);
      const heading = truth.line.headingAt(at.chainageM);
      const wrapped = (angle: number) => angle - 2 * Math.PI * Math.round(angle / (2 * Math.PI));
      const error = at.speedMps * wrapped(fixes.northRad[i]! - course - heading);
      worst = Math.max(worst, Math.abs(error));
      lagged += error ** 2;
      prompt += (at.speedMps * wrapped(fixes.northRad[i]! - course - truth.line.headingAt(truth.chainageM[i]!))) ** 2;
    }
    expect(worst).toBeLessThan(0.6);
    expect(prompt).toBeGreaterThan(5 * lagged);
  });

  it('leave out fixes in tunnels, mark the gap, and count hidden curves', () => {
    let gaps = 0;
    let hidden = 0;
    let spoiled = 0;
    for (let seed = 1; seed <= 6; seed += 1) {
      const { run, truth } = simulateRun('main', { rateHz: 1, course: true, condition: 'dirty' }, seed);
      const flagged = run.fixes.flags.filter((flag) => (flag & FLAG.GAP_BEFORE) !== 0).length;
      expect(flagged).toBe(truth.gaps.length);
      gaps += flagged;
      hidden += truth.curves.filter((curve) => curve.observedShare < 0.7).length;
      spoiled += truth.spoiled.reduce((sum, value) => sum + value, 0);
      for (const t of run.fixes.timeS) expect(truth.gaps.some(([a, b]) => t >= a && t < b)).toBe(false);
    }
    expect(gaps).toBeGreaterThan(5);
    expect(hidden).toBeGreaterThan(0);
    expect(spoiled).toBeGreaterThan(30);
  });

  it('stand still in the middle of some curves of the family that stops there', () => {
    const { truth } = simulateRun('stop', { rateHz: 1, course: true }, 4);
    const stopped = truth.curves.filter((curve) => {
      const from = truth.travel.timeAt(curve.startM);
      const to = truth.travel.timeAt(curve.endM);
      return Array.from({ length: 200 }, (_, k) => truth.travel.at(from + ((to - from) * k) / 200).speedMps).some(
        (v) => v === 0,
      );
    });
    expect(stopped.length).toBeGreaterThan(4);
    expect(stopped.length).toBeLessThan(18);
  });

  it('give joined ends to reverse and compound curves', () => {
    const reverse = simulateRun('reverse', { rateHz: 1, course: true }, 8).truth.curves;
    const touching = reverse.filter((curve) => curve.exit.joins !== null);
    expect(touching.length).toBeGreaterThan(2);
    for (const curve of touching) {
      const next = reverse[curve.exit.joins! - 1]!;
      expect(next.entry.joins).toBe(curve.number);
      expect(Math.sign(next.curvaturePerM)).toBe(-Math.sign(curve.curvaturePerM));
    }
    const compound = simulateRun('compound', { rateHz: 1, course: true }, 8).truth.curves;
    for (const curve of compound.filter((one) => one.exit.joins !== null)) {
      expect(curve.exit.fromCurvaturePerM).toBe(compound[curve.exit.joins! - 1]!.curvaturePerM);
    }
  });
});
