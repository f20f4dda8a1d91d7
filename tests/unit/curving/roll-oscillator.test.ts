import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  naturalFrequencyFromDeflectionHz,
  naturalFrequencyHz,
  springsInParallel,
  springsInSeries,
} from '../../../shared/curving/natural-frequency.ts';
import { criticalSpeedMps, resonantStretches } from '../../../shared/curving/resonance.ts';
import type { RollBody } from '../../../shared/curving/roll-oscillator.ts';
import {
  driveRatioOfPeak,
  harmonicAmplification,
  rollResponse,
  stepOvershoot,
} from '../../../shared/curving/roll-oscillator.ts';
import { STANDARD_GRAVITY_MPS2 as G } from '../../../shared/units.ts';

/** Roll of a body over nodes, with s = g so that the static answer to 1 m/s² is 1 rad. */
function respond(
  body: Omit<RollBody, 'rollCoefficient'>,
  time: number[],
  drive: number[],
  fromRest = true,
): { phi: Float64Array; rate: Float64Array } {
  const phi = new Float64Array(time.length);
  const rate = new Float64Array(time.length);
  rollResponse(
    { ...body, rollCoefficient: G },
    time,
    drive,
    phi,
    rate,
    fromRest ? { angleRad: 0, rateRadS: 0 } : undefined,
  );
  return { phi, rate };
}

function grid(endS: number, n: number): number[] {
  return Array.from({ length: n + 1 }, (_, i) => (endS * i) / n);
}

const W = 2 * Math.PI;

// Closed forms: common practice, no source; overshoot column of the check values (read forms).
describe('roll as a damped oscillator against closed forms', () => {
  it.each([
    [0.05, 0.854468],
    [0.1, 0.729248],
    [0.15, 0.620871],
    [0.2, 0.526621],
    [0.3, 0.372326],
    [0.5, 0.163034],
  ])('a step at damping %d overshoots by %d at half a damped period', (zeta, overshoot) => {
    const peakS = 0.5 / Math.sqrt(1 - zeta * zeta);
    // Nodes of quite unequal spacing, one at the peak: spacing must not matter.
    const time = [0, 0.013, 0.2, peakS, 1.7, 9];
    const { phi, rate } = respond(
      { frequencyHz: 1, dampingRatio: zeta },
      time,
      time.map(() => 1),
    );
    expect(phi[3]).toBeCloseTo(1 + overshoot, 6);
    expect(stepOvershoot(zeta)).toBeCloseTo(overshoot, 6);
    expect(Math.abs(rate[3]!)).toBeLessThan(1e-10);
  });

  it.each([0.1, 0.3, 0.9999999, 1, 1.0000001, 1.4])(
    'a step at damping %d follows its closed form for any spacing',
    (zeta) => {
      const w = W * 0.6;
      const exact = (t: number): number => {
        if (Math.abs(zeta - 1) < 1e-5) return 1 - Math.exp(-w * t) * (1 + w * t);
        const root = w * Math.sqrt(Math.abs(1 - zeta * zeta));
        const [c, s] = zeta < 1 ? [Math.cos(root * t), Math.sin(root * t)] : [Math.cosh(root * t), Math.sinh(root * t)];
        return 1 - Math.exp(-zeta * w * t) * (c + ((zeta * w) / root) * s);
      };
      const time = [0, 0.5, 0.55, 2, 2.001, 6];
      const { phi } = respond(
        { frequencyHz: 0.6, dampingRatio: zeta },
        time,
        time.map(() => 1),
      );
      time.forEach((t, i) => expect(phi[i]).toBeCloseTo(exact(t), 6));
    },
  );

  it('a ramp from rest follows m [t - 2 zeta/w + e^(-zeta w t)(...)] and a transition is the difference of two ramps', () => {
    const zeta = 0.2;
    const w = W * 0.7;
    const wd = w * Math.sqrt(1 - zeta * zeta);
    const ramp = (t: number): number =>
      t <= 0
        ? 0
        : t -
          (2 * zeta) / w +
          Math.exp(-zeta * w * t) *
            (((2 * zeta) / w) * Math.cos(wd * t) + ((2 * zeta * zeta - 1) / wd) * Math.sin(wd * t));
    const length = 2.3;
    const time = [0, 0.4, 1.1, length, 3, 4.7, 8];
    const { phi } = respond(
      { frequencyHz: 0.7, dampingRatio: zeta },
      time,
      time.map((t) => Math.min(t, length) / length),
    );
    time.forEach((t, i) => expect(phi[i]).toBeCloseTo((ramp(t) - ramp(t - length)) / length, 12));
  });

  // Check values sdof.ramp: 1 + |sin(pi f T)| / (pi f T).
  it.each([
    [0.5, 1.63662],
    [1, 1.0],
    [1.5, 1.212207],
    [2, 1.0],
    [3, 1.0],
  ])('an undamped roll after a transition of %d periods peaks at %d', (length, peak) => {
    const time = [
      ...grid(length, 7),
      ...grid(2, 4000)
        .slice(1)
        .map((t) => length + t),
    ];
    const { phi } = respond(
      { frequencyHz: 1, dampingRatio: 0 },
      time,
      time.map((t) => Math.min(t, length) / length),
    );
    expect(Math.max(...phi)).toBeCloseTo(peak, 5);
  });

  it.each([
    [0.05, 10.012523],
    [0.1, 5.025189],
    [0.2, 2.551552],
    [0.3, 1.747141],
  ])('driven at its peak with damping %d it settles at %d times the static roll', (zeta, factor) => {
    const r = driveRatioOfPeak(zeta);
    const time = grid(120, 120 * 200);
    const { phi } = respond(
      { frequencyHz: 1, dampingRatio: zeta },
      time,
      time.map((t) => Math.sin(W * r * t)),
    );
    const settled = Math.max(...phi.slice(-400));
    // Piecewise-linear driving of a sine loses sinc²: 1 part in 10^4 at 200 nodes a second.
    expect(settled / factor).toBeCloseTo(1, 3);
    expect(harmonicAmplification(r, zeta)).toBeCloseTo(factor, 6);
  });

  it('is a quarter period behind its driving force at resonance', () => {
    const time = grid(60, 12000);
    const { phi } = respond(
      { frequencyHz: 1, dampingRatio: 0.1 },
      time,
      time.map((t) => Math.sin(W * t)),
    );
    const i = time.findIndex((t) => t >= 50);
    // The drive is zero and rising here, the roll at its lowest: a quarter period apart.
    expect(phi[i]! / 5).toBeCloseTo(-1, 2);
  });

  it('peaks lower and at a lower frequency the more it is damped, and not at all from 0.707 on', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.01, max: 0.68, noNaN: true }),
        fc.double({ min: 0.005, max: 0.02, noNaN: true }),
        (zeta, more) => {
          const peak = (z: number): number => harmonicAmplification(driveRatioOfPeak(z), z);
          expect(peak(zeta + more)).toBeLessThan(peak(zeta));
          expect(driveRatioOfPeak(zeta + more)).toBeLessThan(driveRatioOfPeak(zeta));
        },
      ),
    );
    expect(driveRatioOfPeak(0.72)).toBe(0);
    expect(harmonicAmplification(0, 0.72)).toBe(1);
  });

  it('gives the same answer however its linear pieces are cut', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -2, max: 2, noNaN: true }), { minLength: 2, maxLength: 6 }),
        fc.array(fc.double({ min: 0.05, max: 0.95, noNaN: true }), { minLength: 5, maxLength: 5 }),
        fc.double({ min: 0, max: 1.5, noNaN: true }),
        (drive, cuts, zeta) => {
          const time = drive.map((_, i) => i * 0.8);
          const finer: number[] = [];
          const finerDrive: number[] = [];
          time.forEach((t, i) => {
            finer.push(t);
            finerDrive.push(drive[i]!);
            const cut = cuts[i]!;
            if (i < time.length - 1) {
              finer.push(t + 0.8 * cut);
              finerDrive.push(drive[i]! + (drive[i + 1]! - drive[i]!) * cut);
            }
          });
          const body = { frequencyHz: 0.8, dampingRatio: zeta };
          const coarse = respond(body, time, drive, false).phi;
          const fine = respond(body, finer, finerDrive, false).phi;
          time.forEach((_, i) => expect(fine[2 * i]).toBeCloseTo(coarse[i]!, 9));
        },
      ),
    );
  });

  it('loses amplitude by exp(-2 pi zeta / sqrt(1 - zeta²)) each period when left alone', () => {
    const zeta = 0.12;
    const period = 1 / Math.sqrt(1 - zeta * zeta);
    const phi = new Float64Array(4);
    rollResponse(
      { frequencyHz: 1, dampingRatio: zeta, rollCoefficient: 0.3 },
      [0, period, 2 * period, 3 * period],
      [0, 0, 0, 0],
      phi,
      new Float64Array(4),
      { angleRad: 1, rateRadS: 0 },
    );
    const ratio = Math.exp((-2 * Math.PI * zeta) / Math.sqrt(1 - zeta * zeta));
    expect(phi[1]).toBeCloseTo(ratio, 12);
    expect(phi[3]).toBeCloseTo(ratio ** 3, 12);
  });

  it('starts quasi-static when no state is given: a steady ramp gives no swing', () => {
    const time = [0, 0.3, 1, 2.5];
    const { phi } = respond(
      { frequencyHz: 0.6, dampingRatio: 0.2 },
      time,
      time.map((t) => 0.5 * t),
      false,
    );
    const lag = (2 * 0.2) / (W * 0.6);
    time.forEach((t, i) => expect(phi[i]).toBeCloseTo(0.5 * (t - lag), 12));
  });

  it('refuses columns of different lengths', () => {
    expect(() =>
      rollResponse(
        { frequencyHz: 1, dampingRatio: 0.1, rollCoefficient: 0.3 },
        [0, 1],
        [0],
        new Float64Array(2),
        new Float64Array(2),
      ),
    ).toThrow(RangeError);
  });
});

// Common practice, no source.
describe('natural frequency', () => {
  it('has the period 2 pi sqrt(m/k)', () => {
    expect(1 / naturalFrequencyHz(8, 2)).toBeCloseTo(2 * Math.PI * Math.sqrt(2 / 8), 12);
  });

  it('doubles in stiffness with two equal springs side by side and halves end to end', () => {
    expect(springsInParallel([5e5, 5e5])).toBe(1e6);
    expect(springsInSeries([5e5, 5e5])).toBeCloseTo(2.5e5, 6);
    expect(naturalFrequencyHz(springsInParallel([5e5, 5e5]), 1e4) / naturalFrequencyHz(5e5, 1e4)).toBeCloseTo(
      Math.SQRT2,
      12,
    );
  });

  it('from static deflection agrees with stiffness and mass', () => {
    const m = 12000;
    const k = 2.4e6;
    expect(naturalFrequencyFromDeflectionHz((m * G) / k)).toBeCloseTo(naturalFrequencyHz(k, m), 12);
  });
});

describe('resonance', () => {
  it('is at spacing times frequency without damping, and at none when damped beyond 0.707', () => {
    expect(criticalSpeedMps(20, 0.7, 0)).toBeCloseTo(14, 12);
    expect(criticalSpeedMps(20, 0.7, 0, 3)).toBeCloseTo(14 / 3, 12);
    expect(criticalSpeedMps(20, 0.7, 0.8)).toBe(0);
  });

  it('finds the stretch at which a slowing train meets it, and only that', () => {
    const chainage = Array.from({ length: 401 }, (_, i) => i * 5);
    const speed = chainage.map((s) => 25 - s / 100);
    const [stretch, ...rest] = resonantStretches(chainage, speed, 20, 0.7, 0.1);
    expect(rest).toEqual([]);
    const critical = criticalSpeedMps(20, 0.7, 0.1);
    expect(stretch!.avoidLowMps).toBeCloseTo(0.9 * critical, 9);
    expect(25 - stretch!.fromM / 100).toBeCloseTo(1.1 * critical, 0);
    expect(25 - stretch!.toM / 100).toBeCloseTo(0.9 * critical, 0);
  });

  it('leaves out what is over before the roll can build up', () => {
    expect(resonantStretches([0, 10, 20], [14, 14, 14], 20, 0.7, 0.1)).toEqual([]);
  });
});
