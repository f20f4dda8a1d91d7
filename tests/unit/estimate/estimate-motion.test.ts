import { describe, expect, it } from 'vitest';
import type { FamilyName } from '../../../data/synthetic/families.ts';
import type { ReceiverOptions } from '../../../data/synthetic/receiver.ts';
import { simulateRun } from '../../../data/synthetic/simulate.ts';
import { estimateMotion } from '../../../server/estimate/index.ts';
import type { Motion } from '../../../shared/model/motion.ts';
import type { Run, RunFixes } from '../../../shared/model/run.ts';
import { FLAG } from '../../../shared/model/run.ts';

const MOVING_MPS = 2;
const FAMILIES = ['main', 'secondary', 'tram', 'road'] as const;

interface Coverage {
  inside: number;
  count: number;
}

/** Share of moving fixes of several runs whose 95 % interval holds the true speed and the true curvature. */
function coverage(receiver: ReceiverOptions, families: readonly FamilyName[], seed: number) {
  const speed: Coverage = { inside: 0, count: 0 };
  const curvature: Coverage = { inside: 0, count: 0 };
  families.forEach((family, k) => {
    const { run, truth } = simulateRun(family, receiver, seed + k);
    const { motion } = estimateMotion(run);
    for (let i = 0; i < motion.count; i++) {
      const v = truth.speedMps[i]!;
      if (v < MOVING_MPS) continue;
      const kappa = truth.line.curvatureAt(truth.chainageM[i]!);
      speed.count++;
      curvature.count++;
      if (Math.abs(motion.speedMps[i]! - v) < 1.96 * motion.speedSdMps[i]!) speed.inside++;
      if (Math.abs(motion.curvaturePerM[i]! - kappa) < 1.96 * motion.curvatureSdPerM[i]!) curvature.inside++;
    }
  });
  return { speed: speed.inside / speed.count, curvature: curvature.inside / curvature.count };
}

function withFixes(run: Run, change: Partial<RunFixes>): Run {
  return { ...run, fixes: { ...run.fixes, ...change } };
}

function allFinite(motion: Motion): boolean {
  const columns = [
    motion.chainageM,
    motion.xM,
    motion.headingRad,
    motion.speedMps,
    motion.curvaturePerM,
    motion.curvatureSdPerM,
  ];
  return columns.every((column) => column.every(Number.isFinite));
}

describe('intervals of the smoothed motion hold the truth about 95 times in 100', () => {
  const cases: readonly (readonly [string, ReceiverOptions])[] = [
    ['1 Hz with course', { rateHz: 1, course: true, condition: 'clean' }],
    ['1 Hz, positions only', { rateHz: 1, course: false, condition: 'clean' }],
    ['5 Hz with course', { rateHz: 5, course: true, condition: 'clean' }],
    ['1 Hz with course, dirty', { rateHz: 1, course: true, condition: 'dirty' }],
  ];
  // Neighbouring fixes are correlated: some 6,000 fixes of 4 runs are a few hundred independent ones, 3 standard errors 4 %.
  it.each(cases)('%s', (_name, receiver) => {
    const found = coverage(receiver, FAMILIES, 4100);
    console.log(_name, found);
    expect(found.speed).toBeGreaterThan(0.9);
    expect(found.speed).toBeLessThan(0.99);
    expect(found.curvature).toBeGreaterThan(0.92);
    expect(found.curvature).toBeLessThan(0.99);
  });
});

describe('a vehicle that stands', () => {
  const { run, truth } = simulateRun('stop', { rateHz: 1, course: true, condition: 'clean' }, 77);
  const { motion } = estimateMotion(run);

  it('gains no chainage and no curvature', () => {
    let stops = 0;
    for (let i = 1; i < motion.count; i++) {
      if ((run.fixes.flags[i]! & run.fixes.flags[i - 1]! & FLAG.STOPPED) === 0) continue;
      stops++;
      expect(motion.chainageM[i]! - motion.chainageM[i - 1]!).toBe(0);
      expect(Math.abs(motion.curvaturePerM[i]! - motion.curvaturePerM[i - 1]!)).toBeLessThan(1e-6);
    }
    expect(stops).toBeGreaterThan(20);
  });

  it('keeps the chainage of the whole run within a thousandth', () => {
    const length = motion.chainageM[motion.count - 1]!;
    const first = truth.chainageM[0]!;
    expect(Math.abs(length / (truth.chainageM[motion.count - 1]! - first) - 1)).toBeLessThan(1e-3);
  });
});

describe('what the log itself tells', () => {
  it('noise levels come out as they were drawn', () => {
    const errors = {
      sigmaWhiteM: 0.5,
      sigmaWanderM: 2,
      wanderTimeS: 120,
      sigmaDopplerWhiteMps: 0.05,
      sigmaDopplerSlowMps: 0.05,
    };
    const { run } = simulateRun('secondary', { rateHz: 5, course: true, condition: 'clean', errors }, 31);
    const { noise } = estimateMotion(run).motion.quality;
    expect(noise.sigmaWhiteM / 0.5).toBeGreaterThan(0.85);
    expect(noise.sigmaWhiteM / 0.5).toBeLessThan(1.15);
    expect(noise.sigmaWanderM / 2).toBeGreaterThan(0.6);
    expect(noise.sigmaWanderM / 2).toBeLessThan(1.6);
    expect(Math.hypot(noise.sigmaDopplerWhiteMps, noise.sigmaDopplerSlowMps) / 0.0707).toBeGreaterThan(0.75);
    expect(Math.hypot(noise.sigmaDopplerWhiteMps, noise.sigmaDopplerSlowMps) / 0.0707).toBeLessThan(1.4);
  });

  it.each([0, 0.5, 1])('a lag of course and speed of %s s is found', (lagS) => {
    const { run } = simulateRun('road', { rateHz: 1, course: true, condition: 'clean', errors: { lagS } }, 12);
    const { motion, findings } = estimateMotion(run);
    expect(Math.abs(motion.quality.noise.lagS - lagS)).toBeLessThan(0.12);
    expect(findings.some((finding) => finding.code === 'estimate/lag-corrected')).toBe(lagS > 0);
  });
});

describe('symmetries', () => {
  const { run } = simulateRun('tram', { rateHz: 1, course: true, condition: 'clean' }, 5, { curves: 8 });
  const { motion } = estimateMotion(run);

  it('a run seen in a mirror curves the other way', () => {
    const { fixes } = run;
    const mirrored = withFixes(run, {
      yM: fixes.yM.map((y) => -y),
      northRad: fixes.northRad.map((north) => -north),
      courseRad: fixes.courseRad!.map((course) => -course),
    });
    const other = estimateMotion(mirrored).motion;
    for (let i = 0; i < motion.count; i += 7) {
      expect(other.curvaturePerM[i]! + motion.curvaturePerM[i]!).toBeCloseTo(0, 5);
      expect(other.speedMps[i]!).toBeCloseTo(motion.speedMps[i]!, 4);
    }
  });

  it('a run moved elsewhere has the same motion', () => {
    const moved = withFixes(run, { xM: run.fixes.xM.map((x) => x + 1e5), yM: run.fixes.yM.map((y) => y - 2e5) });
    const other = estimateMotion(moved).motion;
    for (let i = 0; i < motion.count; i += 7) expect(other.curvaturePerM[i]!).toBeCloseTo(motion.curvaturePerM[i]!, 5);
  });
});

describe('runs that give little', () => {
  const { run } = simulateRun('tram', { rateHz: 1, course: true, condition: 'clean' }, 9, { curves: 2 });
  const head = (n: number): Run => {
    const { fixes } = run;
    return withFixes(run, {
      count: n,
      timeS: fixes.timeS.slice(0, n),
      latDeg: fixes.latDeg.slice(0, n),
      lonDeg: fixes.lonDeg.slice(0, n),
      xM: fixes.xM.slice(0, n),
      yM: fixes.yM.slice(0, n),
      northRad: fixes.northRad.slice(0, n),
      elevationM: null,
      speedMps: fixes.speedMps!.slice(0, n),
      courseRad: fixes.courseRad!.slice(0, n),
      accuracyM: null,
      flags: fixes.flags.slice(0, n),
      row: fixes.row.slice(0, n),
    });
  };

  it.each([0, 1, 2, 3, 10])('%s fixes give finite numbers', (n) => {
    const { motion } = estimateMotion(head(n));
    expect(motion.count).toBe(n);
    expect(allFinite(motion)).toBe(true);
  });

  it('a run that never moves has no length', () => {
    const { fixes } = run;
    const still = withFixes(run, {
      xM: new Float64Array(fixes.count).fill(3),
      yM: new Float64Array(fixes.count).fill(4),
      speedMps: new Float32Array(fixes.count),
      courseRad: new Float32Array(fixes.count).fill(NaN),
      flags: new Uint8Array(fixes.count).fill(FLAG.STOPPED),
    });
    const { motion } = estimateMotion(still);
    expect(allFinite(motion)).toBe(true);
    expect(motion.chainageM[motion.count - 1]).toBe(0);
  });

  it('stops when told to', () => {
    const controller = new AbortController();
    controller.abort();
    expect(() => estimateMotion(run, { signal: controller.signal })).toThrow();
  });
});
