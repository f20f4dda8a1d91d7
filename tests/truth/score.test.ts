import { describe, expect, it } from 'vitest';
import type { Curve, Estimate } from '../../shared/model/alignment.ts';
import type { Motion } from '../../shared/model/motion.ts';
import { seededStream, type RandomStream } from '../../data/synthetic/random.ts';
import { simulateRun, type SimulatedRun, type TrueCurve } from '../../data/synthetic/simulate.ts';
import { curveBounds, type CurveBound } from './bound.ts';
import { addNaive, emptyNaiveScore } from './naive.ts';
import { addRun, emptyScore, type Fitted } from './score.ts';
import { absoluteQuantile, rootMeanSquare, share } from './statistics.ts';

/** Estimate with a normal error of the given sd and an interval that knows it. */
function drawn(truth: number, sd: number, random: RandomStream): Estimate {
  const value = truth + sd * random.normal();
  return { value, sd, low: value - 1.96 * sd, high: value + 1.96 * sd };
}

/** A fit as good as the bound: what the score must call efficient and well covered. */
function oracle(sim: SimulatedRun, random: RandomStream, keep: (curve: TrueCurve) => boolean): Fitted {
  const { run, truth } = sim;
  const flat = new Float32Array(run.fixes.count);
  const curvature = Float64Array.from(truth.chainageM, (s) => truth.line.curvatureAt(s));
  const motion: Motion = {
    count: run.fixes.count,
    timeS: run.fixes.timeS,
    // A constant shift and a little stretch of the log's own chainage must not count as errors.
    chainageM: truth.chainageM.map((s) => 12 + 1.001 * s),
    xM: run.fixes.xM,
    yM: run.fixes.yM,
    headingRad: curvature,
    speedMps: truth.speedMps,
    accelerationMps2: new Float64Array(run.fixes.count),
    curvaturePerM: curvature,
    positionSdM: flat,
    headingSdRad: flat,
    speedSdMps: flat.map(() => 0.01),
    curvatureSdPerM: flat.map(() => 1e-4),
    speedCurvatureCorrelation: flat,
    positionVarianceFactor: flat,
    dopplerVarianceFactor: flat,
    quality: {
      noise: {
        sigmaWhiteM: 1,
        sigmaWanderM: 1,
        wanderTimeS: 1,
        sigmaDopplerWhiteMps: 1,
        sigmaDopplerSlowMps: 1,
        dopplerTimeS: 1,
        sigmaSpeedMps: 1,
        lagS: 0,
        lagSdS: 0,
      },
      fixCount: run.fixes.count,
      rateHz: 1,
      effectiveFixes: 1,
      courseShare: 1,
      speedShare: 1,
      smallestCurvaturePerM: 1,
    },
  };
  const own = (s: number) => 12 + 1.001 * s;
  const curves = curveBounds(sim)
    .filter((bound) => keep(bound.curve))
    .map((bound) => fittedCurve(bound, own, random));
  return {
    motion,
    alignment: { lengthM: own(truth.line.lengthM), elements: [], curves },
    passages: { run: '1', lengthM: 0, durationS: 0, intervalS: 1, hasCourse: true, passages: [] },
  };
}

function fittedCurve(bound: CurveBound, own: (s: number) => number, random: RandomStream): Curve {
  const { curve } = bound;
  const kappa = drawn(curve.curvaturePerM, bound.curvatureSdPerM, random);
  const relativeSd = bound.speedSdMps / curve.arcSpeedMps;
  const end = (truth: TrueCurve['entry'], sd: number) => ({
    kind: 'transition' as const,
    lengthM: drawn(truth.lengthM, 5, random),
    middleM: drawn(own(truth.middleM), sd, random),
    fromCurvaturePerM: truth.fromCurvaturePerM,
    joins: null,
  });
  return {
    number: curve.number,
    hand: kappa.value > 0 ? 'left' : 'right',
    shape: 'simple',
    startM: own(curve.startM),
    endM: own(curve.endM),
    arcStartM: own(curve.arcStartM),
    arcEndM: own(curve.arcEndM),
    entry: end(curve.entry, bound.entry.middleSdM),
    exit: end(curve.exit, bound.exit.middleSdM),
    curvaturePerM: kappa,
    radiusM: { value: 1 / Math.abs(kappa.value), sd: 1, low: 0, high: 1e9 },
    deflectionRad: { value: 1, sd: 1, low: 0, high: 2 },
    // Speed and curvature errors are drawn independently here: both enter.
    lateralRelativeSd: Math.hypot(kappa.sd / kappa.value, 2 * relativeSd),
    speedMps: drawn(curve.arcSpeedMps, bound.speedSdMps, random),
    observedShare: 1,
    chi2PerDof: 1,
    remarks: [],
  };
}

describe('the score', () => {
  it('calls a fit that scatters as the bound efficient and well covered', () => {
    const score = emptyScore();
    const random = seededStream(5);
    for (let seed = 1; seed <= 12; seed += 1) {
      const sim = simulateRun('secondary', { rateHz: 1, course: true }, seed);
      addRun(
        score,
        sim,
        oracle(sim, random, () => true),
      );
    }
    const n = score.curves;
    expect(n).toBeGreaterThan(280);
    expect(score.found).toBe(n);
    expect(score.clearFound).toBe(score.clear);
    expect([score.invented, score.splits, score.hidden, score.failures]).toEqual([0, 0, 0, 0]);
    expect(Math.abs(rootMeanSquare(score.overBound) - 1)).toBeLessThan(3 / Math.sqrt(2 * n));
    // Two ends a curve; the stretch of 0.1 % adds nothing to ends known to a metre.
    expect(Math.abs(rootMeanSquare(score.tangentOverBound) - 1)).toBeLessThan(3 / Math.sqrt(4 * n));
    const tolerance = 3 * Math.sqrt((0.95 * 0.05) / n);
    for (const judged of [score.radius, score.lateral, score.tangent, score.length]) {
      expect(Math.abs(share(judged) - 0.95)).toBeLessThan(tolerance);
    }
    expect(score.hotspots).toBe(0);
    expect(score.curvatureHeld).toBe(score.moving);
  });

  it('counts what is missed, what is invented and what is split', () => {
    const score = emptyScore();
    const sim = simulateRun('main', { rateHz: 1, course: true }, 3);
    const fit = oracle(sim, seededStream(1), (curve) => curve.number !== 4);
    const second = fit.alignment.curves[1]!;
    const middle = (second.arcStartM + second.arcEndM) / 2;
    const place = (curve: Curve, from: number, to: number): Curve => ({
      ...curve,
      entry: { ...curve.entry, middleM: { ...curve.entry.middleM, value: from } },
      exit: { ...curve.exit, middleM: { ...curve.exit.middleM, value: to } },
    });
    const straightFrom = 12 + 1.001 * (sim.truth.curves[6]!.endM + 40);
    const curves = fit.alignment.curves.flatMap((curve) =>
      curve === second ? [place(curve, curve.startM, middle - 5), place(curve, middle, curve.endM)] : [curve],
    );
    curves.push(place(second, straightFrom, straightFrom + 80));
    addRun(score, sim, { ...fit, alignment: { ...fit.alignment, curves } });
    expect(score.curves - score.found).toBe(1);
    expect(score.clear - score.clearFound).toBe(1);
    expect(score.splits).toBe(1);
    expect(score.invented).toBe(1);
  });

  it('sees a hotspot that the truth does not have, once', () => {
    const score = emptyScore();
    const sim = simulateRun('straights', { rateHz: 1, course: true }, 2);
    const fit = oracle(sim, seededStream(1), () => true);
    const curvaturePerM = fit.motion.curvaturePerM.slice();
    const fast = sim.truth.speedMps.findIndex((v) => v > 20);
    for (let i = fast; i < fast + 5; i += 1) curvaturePerM[i] = 3 / 400;
    addRun(score, sim, { ...fit, motion: { ...fit.motion, curvaturePerM } });
    expect(score.hotspots).toBe(1);
  });
});

describe('the baseline of local circle fits', () => {
  it('finds clear curves with errors of some per cent and curves that are not there', () => {
    const score = emptyNaiveScore();
    for (let seed = 1; seed <= 8; seed += 1) {
      addNaive(score, simulateRun('secondary', { rateHz: 1, course: true }, seed), 3, 500);
    }
    expect(score.found / score.curves).toBeGreaterThan(0.85);
    const median = absoluteQuantile(score.radius, 0.5);
    expect(median).toBeGreaterThan(0.015);
    expect(median).toBeLessThan(0.12);
    expect(score.invented).toBeGreaterThan(0);
  });

  it('is exact on exact positions of long arcs', () => {
    const score = emptyNaiveScore();
    const exact = { sigmaWhiteM: 1e-4, sigmaWanderM: 1e-4, lagS: 0, coordinateDecimals: 10 };
    addNaive(score, simulateRun('main', { rateHz: 1, course: true, errors: exact }, 1), 2, 3000);
    expect(absoluteQuantile(score.radius, 0.5)).toBeLessThan(0.01);
  });
});
