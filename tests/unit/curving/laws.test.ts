import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { roundDownToStep } from '../../../shared/curving/advisory-speed.ts';
import { cantDeficiencyMm, speedForDeficiencyMps } from '../../../shared/curving/cant-deficiency.ts';
import {
  arcDegreeFromRadius,
  chordDegreeFromRadius,
  radiusFromArcDegreeM,
  radiusFromChordDegreeM,
} from '../../../shared/curving/degree-of-curve.ts';
import { entryDecelerationMps2 } from '../../../shared/curving/entry-deceleration.ts';
import { equilibriumCantMm, equilibriumSpeedMps } from '../../../shared/curving/equilibrium-cant.ts';
import { cantBaseForGaugeMm, GAUGES } from '../../../shared/curving/gauges.ts';
import { rateOfChange, speedForDeficiencyRateMps } from '../../../shared/curving/rate-of-change.ts';
import {
  sideFriction,
  speedForSideFrictionMps,
  superelevationForSideFriction,
} from '../../../shared/curving/side-friction.ts';
import {
  cantForTrackPlaneMm,
  speedForTrackPlaneMps,
  trackPlaneAccelerationMps2,
} from '../../../shared/curving/track-plane-acceleration.ts';
import { radiusFromVersineM, versineM } from '../../../shared/curving/versine.ts';
import { convert, formatQuantity, fromSi, STANDARD_GRAVITY_MPS2 as G, toSi, UNITS } from '../../../shared/units.ts';
import type { Unit } from '../../../shared/units.ts';

const speed = fc.double({ min: 1, max: 90, noNaN: true });
const radius = fc.double({ min: 20, max: 8000, noNaN: true });
const cant = fc.double({ min: 0, max: 180, noNaN: true });
const base = fc.double({ min: 1050, max: 1750, noNaN: true });

/** Equal to a relative exactness. */
function near(a: number, b: number, relative = 1e-9): void {
  expect(Math.abs(a - b)).toBeLessThanOrEqual(relative * Math.max(Math.abs(a), Math.abs(b), 1e-9));
}

describe('laws of curving', () => {
  it('equilibrium cant grows with the square of speed and falls with radius', () => {
    fc.assert(
      fc.property(speed, radius, base, (v, R, b) => {
        near(equilibriumCantMm(2 * v, 1 / R, b), 4 * equilibriumCantMm(v, 1 / R, b));
        near(equilibriumCantMm(v, 1 / (3 * R), b), equilibriumCantMm(v, 1 / R, b) / 3);
      }),
    );
  });

  it('left and right hands give the same figures', () => {
    fc.assert(
      fc.property(speed, radius, cant, (v, R, D) => {
        expect(cantDeficiencyMm(v, 1 / R, D, 1500)).toBe(cantDeficiencyMm(v, -1 / R, D, 1500));
        expect(trackPlaneAccelerationMps2(v, 1 / R, D, 1500)).toBe(trackPlaneAccelerationMps2(v, -1 / R, D, 1500));
        expect(sideFriction(v, 1 / R, 0.04)).toBe(sideFriction(v, -1 / R, 0.04));
      }),
    );
  });

  it('cant and deficiency make up equilibrium cant, and the inverses return the speed', () => {
    fc.assert(
      fc.property(speed, radius, cant, base, (v, R, D, b) => {
        const I = cantDeficiencyMm(v, 1 / R, D, b);
        near(I + D, equilibriumCantMm(v, 1 / R, b), 1e-7);
        near(speedForDeficiencyMps(I, 1 / R, D, b), v, 1e-7);
        near(equilibriumSpeedMps(equilibriumCantMm(v, 1 / R, b), 1 / R, b), v);
        const a = trackPlaneAccelerationMps2(v, 1 / R, D, b);
        near(speedForTrackPlaneMps(a, 1 / R, D, b), v, 1e-7);
        expect(cantForTrackPlaneMm(a, v, 1 / R, b)).toBeCloseTo(D, 5);
      }),
    );
  });

  it('at balance tan(theta) = v²/(gR), no lateral force is left and the support force is m g / cos(theta)', () => {
    // Common practice, no source.
    fc.assert(
      fc.property(speed, radius, (v, R) => {
        const theta = Math.atan((v * v) / (G * R));
        fc.pre(theta < 1);
        const D = 1500 * Math.sin(theta);
        expect(trackPlaneAccelerationMps2(v, 1 / R, D, 1500)).toBeCloseTo(0, 9);
        const support = G * Math.cos(theta) + ((v * v) / R) * Math.sin(theta);
        near(support, G / Math.cos(theta));
      }),
    );
  });

  it('the small-angle acceleration exceeds the exact one by v² kappa (1 - cos theta)', () => {
    fc.assert(
      fc.property(speed, radius, cant, (v, R, D) => {
        const small = (G * cantDeficiencyMm(v, 1 / R, D, 1500)) / 1500;
        const exact = trackPlaneAccelerationMps2(v, 1 / R, D, 1500);
        const theta = Math.asin(D / 1500);
        expect(small - exact).toBeCloseTo(((v * v) / R) * (1 - Math.cos(theta)), 9);
      }),
    );
  });

  it('the speed for a rate of deficiency gives just that rate, with any cant', () => {
    fc.assert(
      fc.property(
        radius,
        cant,
        fc.double({ min: 10, max: 200, noNaN: true }),
        fc.double({ min: 20, max: 100, noNaN: true }),
        (R, D, L, limit) => {
          const v = speedForDeficiencyRateMps(limit, 1 / R, D, L, 1500);
          near(rateOfChange(cantDeficiencyMm(v, 1 / R, D, 1500), v, L), limit, 1e-6);
          expect(v).toBeGreaterThan(0);
        },
      ),
    );
  });

  it('side friction has its inverses and vanishes at balance', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 5, max: 40, noNaN: true }),
        fc.double({ min: 30, max: 2000, noNaN: true }),
        fc.double({ min: -0.06, max: 0.1, noNaN: true }),
        (v, R, e) => {
          const f = sideFriction(v, 1 / R, e);
          fc.pre(f < 2 && f > -0.5 && 1 - e * f > 0.5);
          near(speedForSideFrictionMps(f, 1 / R, e), v, 1e-7);
          expect(superelevationForSideFriction(f, v, 1 / R)).toBeCloseTo(e, 9);
          expect(sideFriction(v, 1 / R, (v * v) / (G * R))).toBeCloseTo(0, 12);
        },
      ),
    );
  });

  it('degree of curve and versine return the radius', () => {
    fc.assert(
      fc.property(radius, (R) => {
        near(radiusFromArcDegreeM(arcDegreeFromRadius(R)), R);
        near(radiusFromChordDegreeM(chordDegreeFromRadius(R)), R);
        near(radiusFromVersineM(10, versineM(10, R)), R);
      }),
    );
  });
});

describe('units', () => {
  const units = Object.keys(UNITS) as Unit[];

  it('return what they were given, there and back, in every unit', () => {
    fc.assert(
      fc.property(fc.constantFrom(...units), fc.double({ min: -1e6, max: 1e6, noNaN: true }), (unit, value) => {
        near(fromSi(toSi(value, unit), unit), value, 1e-14);
      }),
    );
  });

  it('refuse to turn a length into a speed', () => {
    expect(() => convert(1, 'm', 'km/h')).toThrow(RangeError);
  });

  it('show an unknown value as a dash, never as 0, and no negative zero', () => {
    expect(formatQuantity(null, 'mm')).toBe('–');
    expect(formatQuantity(NaN, 'mm')).toBe('–');
    expect(formatQuantity(-0.01, 'mm')).toBe('0.0 mm');
    expect(formatQuantity(12.345, 'km/h')).toBe('12.3 km/h');
    expect(formatQuantity(7.25, '°')).toBe('7.3°');
  });
});

describe('small rules', () => {
  it('a speed is rounded down to the step, an exact multiple stays', () => {
    expect(roundDownToStep(119.9, 5)).toBe(115);
    expect(roundDownToStep(120, 5)).toBe(120);
    expect(roundDownToStep(0.3 * 100, 10)).toBe(30);
    expect(roundDownToStep(4.9, 5)).toBe(0);
  });

  it('the cant base of each gauge lies in its range and 1435 mm has 1500 mm', () => {
    for (const { gaugeMm, cantBaseMm, range } of GAUGES) {
      expect(cantBaseForGaugeMm(gaugeMm)).toBe(cantBaseMm);
      expect(cantBaseMm).toBeGreaterThanOrEqual(range[0]);
      expect(cantBaseMm).toBeLessThanOrEqual(range[1]);
    }
    expect(cantBaseForGaugeMm(1435)).toBe(1500);
    expect(cantBaseForGaugeMm(1372)).toBe(1437);
  });

  it('entry deceleration is the largest braking between two chainages and 0 when there is none', () => {
    const s = [0, 10, 20, 30];
    expect(entryDecelerationMps2(s, [0.2, -0.4, -0.9, -2], 0, 20)).toBe(0.9);
    expect(entryDecelerationMps2(s, [0.2, 0.4, NaN, 0.1], 0, 30)).toBe(0);
  });
});
