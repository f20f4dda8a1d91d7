import { describe, expect, it } from 'vitest';
import type { FamilyName } from '../../../data/synthetic/families.ts';
import { simulateRun } from '../../../data/synthetic/simulate.ts';
import { buildPassages, buildProfile, fitAlignment } from '../../../server/alignment/index.ts';
import { estimateMotion } from '../../../server/estimate/index.ts';

function fitted(family: FamilyName, rateHz: number, course: boolean, seed: number) {
  const sim = simulateRun(family, { rateHz, course }, seed, { curves: 8 });
  const { motion: smoothed } = estimateMotion(sim.run);
  const { alignment, motion } = fitAlignment(sim.run, smoothed);
  return { sim, motion, alignment };
}

describe.each([
  ['secondary', 1, true],
  ['reverse', 1, true],
  ['compound', 1, true],
  ['stop', 10, true],
  ['tram', 1, false],
] as const)('alignment of a run: %s, %d Hz, course %s', (family, rateHz, course) => {
  const { sim, motion, alignment } = fitted(family, rateHz, course, 91);

  it('has elements over the whole run, without gaps, and curvature that does not jump but into arcs', () => {
    const { elements, lengthM } = alignment;
    expect(lengthM).toBe(motion.chainageM[motion.count - 1]);
    expect(elements[0]!.startM).toBe(0);
    expect(elements.at(-1)!.endM).toBe(lengthM);
    elements.forEach((element, i) => {
      expect(element.endM).toBeGreaterThan(element.startM);
      const next = elements[i + 1];
      if (next === undefined) return;
      expect(next.startM).toBe(element.endM);
      if (element.kind === 'straight') expect([element.startCurvaturePerM, element.endCurvaturePerM]).toEqual([0, 0]);
      if (element.kind === 'transition' && next.kind === 'arc') {
        expect(next.startCurvaturePerM).toBe(element.endCurvaturePerM);
      }
    });
  });

  it('has curves in order, each inside its own tangent points, with intervals about their values', () => {
    expect(alignment.curves.length).toBeGreaterThan(0);
    alignment.curves.forEach((curve, i) => {
      expect(curve.number).toBe(i + 1);
      const places = [curve.startM, curve.arcStartM, curve.arcEndM, curve.endM];
      expect([...places].sort((a, b) => a - b)).toEqual(places);
      for (const { value, low, high, sd } of [
        curve.curvaturePerM,
        curve.radiusM,
        curve.deflectionRad,
        curve.speedMps,
      ]) {
        expect(low).toBeLessThanOrEqual(value);
        expect(high).toBeGreaterThanOrEqual(value);
        expect(sd).toBeGreaterThan(0);
      }
      expect(curve.radiusM.value).toBeCloseTo(1 / Math.abs(curve.curvaturePerM.value), 9);
      expect(curve.hand).toBe(curve.curvaturePerM.value > 0 ? 'left' : 'right');
      for (const end of [curve.entry, curve.exit]) {
        if (end.joins === null) continue;
        const other = alignment.curves[end.joins - 1]!;
        expect(Math.abs(end.joins - curve.number)).toBe(1);
        expect([other.entry.joins, other.exit.joins]).toContain(curve.number);
      }
    });
  });

  it('finds the curves of the line at their places', () => {
    const near = sim.truth.curves.filter((truth) =>
      alignment.curves.some(
        (curve) =>
          curve.startM < truth.arcEndM + 30 &&
          curve.endM > truth.arcStartM - 30 &&
          curve.curvaturePerM.value * truth.curvaturePerM > 0,
      ),
    );
    expect(near.length).toBeGreaterThanOrEqual(Math.ceil(0.9 * sim.truth.curves.length));
  });

  it('is passed at stations that hold every tangent point, at speeds of the motion', () => {
    const { passages, lengthM } = buildPassages(sim.run, motion, alignment);
    expect(lengthM).toBe(alignment.lengthM);
    expect(passages.map(({ curve }) => curve)).toEqual(alignment.curves);
    const fastest = Math.max(...motion.speedMps);
    for (const { curve, chainageM, speedMps, speedSdMps, start, end } of passages) {
      for (const place of [curve.startM, curve.arcStartM, curve.arcEndM, curve.endM])
        expect(chainageM).toContain(place);
      for (let k = 1; k < chainageM.length; k++) {
        const step = chainageM[k]! - chainageM[k - 1]!;
        expect(step).toBeGreaterThan(0);
        expect(step).toBeLessThanOrEqual(5 + 1e-9);
      }
      expect(speedMps).toHaveLength(chainageM.length);
      expect(Math.min(...speedMps)).toBeGreaterThanOrEqual(0);
      expect(Math.max(...speedMps)).toBeLessThanOrEqual(fastest);
      expect(Math.min(...speedSdMps)).toBeGreaterThanOrEqual(0);
      // Start and end lie as far apart as a chord may: no more than the length of the line between them.
      const metresPerDegree = 111_320;
      const east = (end[1] - start[1]) * metresPerDegree * Math.cos((start[0] * Math.PI) / 180);
      const north = (end[0] - start[0]) * metresPerDegree;
      expect(Math.hypot(east, north)).toBeLessThan(1.01 * (curve.endM - curve.startM) + 3);
    }
  });

  it('has a profile at even steps that follows its elements', () => {
    const profile = buildProfile(sim.run, motion, alignment, 5);
    expect(profile.count).toBe(Math.floor(alignment.lengthM / 5) + 1);
    for (let k = 0; k < profile.count; k++) {
      const s = profile.chainageM[k]!;
      expect(s).toBe(5 * k);
      if (k > 0) expect(profile.timeS[k]).toBeGreaterThanOrEqual(profile.timeS[k - 1]!);
      expect(profile.courseRad[k]).toBeGreaterThanOrEqual(0);
      expect(profile.courseRad[k]).toBeLessThan(2 * Math.PI + 1e-6);
      const element = alignment.elements.find(({ startM, endM }) => s >= startM && s < endM);
      if (element === undefined || s === element.startM) continue;
      const share = (s - element.startM) / (element.endM - element.startM);
      const fit = element.startCurvaturePerM + share * (element.endCurvaturePerM - element.startCurvaturePerM);
      expect(profile.fittedCurvaturePerM[k]).toBeCloseTo(fit, 7);
    }
  });
});
