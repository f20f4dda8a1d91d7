import { describe, expect, it } from 'vitest';
import { bodyAccelerationMps2, quasiStaticRollRad } from '../../shared/curving/body-acceleration.ts';
import { comfortCurveTransitionPct, comfortDiscreteEventPct } from '../../shared/curving/comfort-index.ts';
import { lateralMotionDose, motionSicknessWeight, steadyMotionDose } from '../../shared/curving/motion-sickness.ts';
import { radToDeg } from '../../shared/units.ts';
import type { PublishedRow } from './rows.ts';
import { testRows } from './rows.ts';

const EN = 'EN 12299:2009, coefficients';

const curveTransition: PublishedRow[] = (
  [
    [1.0, 0.5, 2.0, 28.685375, 8.280387],
    [0.65, 0.3, 1.0, 13.843, 2.9545],
    [1.2, 0.8, 3.0, 41.972163, 13.324111],
    [0.2, 0.1, 0.5, 0.038012, 0.038878],
    [0.5, 0.4, 0.0, 11.446, 2.457],
  ] as const
).flatMap(([a, j, r, standing, seated]) => {
  const name = `P_CT of ${String(a)} m/s², ${String(j)} m/s³, ${String(r)} °/s`;
  const common = { within: 6e-7, source: EN, status: 'worked from a recalled formula' } as const;
  return [
    { name: `${name}, standing`, ours: comfortCurveTransitionPct(a, j, r, 'standing'), theirs: standing, ...common },
    { name: `${name}, seated`, ours: comfortCurveTransitionPct(a, j, r, 'seated'), theirs: seated, ...common },
  ];
});

const discreteEvent: PublishedRow[] = (
  [
    [1.5, 1.0, 14.94, 4.04],
    [2.0, 0.8, 17.848, 5.66],
    [0.8, 0.6, 0, 0],
    [1.0, 1.2, 12.032, 2.42],
  ] as const
).flatMap(([pp, mean, standing, seated]) => {
  const name = `P_DE of ${String(pp)} m/s² peak to peak, ${String(mean)} m/s² mean`;
  const common = { within: 1e-9, source: EN, status: 'worked from a recalled formula' } as const;
  return [
    { name: `${name}, standing`, ours: comfortDiscreteEventPct(pp, mean, 'standing'), theirs: standing, ...common },
    { name: `${name}, seated`, ours: comfortDiscreteEventPct(pp, mean, 'seated'), theirs: seated, ...common },
  ];
});

/** Slope of the index over its input far above the clamp, so that a coefficient shows alone. */
const slope = (f: (x: number) => number): number => f(2) - f(1);
const heritage: PublishedRow[] = (
  [
    ['A standing', slope((x) => comfortCurveTransitionPct(x, 0, 0, 'standing')), 2.8],
    ['B standing', slope((x) => comfortCurveTransitionPct(0.5, x, 0, 'standing')), 2.03],
    ['A seated', slope((x) => comfortCurveTransitionPct(x, 0, 0, 'seated')), 0.88],
    ['B seated', slope((x) => comfortCurveTransitionPct(0.5, x, 0, 'seated')), 0.95],
    ['p standing', slope((x) => comfortDiscreteEventPct(x, 1.1, 'standing')), 1.63],
    ['m standing', slope((x) => comfortDiscreteEventPct(1, x, 'standing')), 2.65],
    ['p seated', slope((x) => comfortDiscreteEventPct(x, 1.6, 'seated')), 0.83],
    ['m seated', slope((x) => comfortDiscreteEventPct(2, x, 'seated')), 1.28],
  ] as const
).map(([name, ours, perCentG]) => ({
  name: `coefficient ${name} in percent per %g`,
  ours: ours * 0.0981,
  theirs: perCentG,
  within: 0.005,
  source: 'British Rail heritage form',
  status: 'from memory',
}));

// ISO 8041-1:2017 annex B at true band centres (read in transcription): n, Wf.
const weights: PublishedRow[] = (
  [
    [-17, 0.02407],
    [-13, 0.1575],
    [-10, 0.6951],
    [-9, 0.9],
    [-8, 1.004],
    [-7, 0.9928],
    [-6, 0.8501],
    [-5, 0.6149],
    [-3, 0.2225],
    [0, 0.02352],
  ] as const
).map(([band, printed]) => ({
  name: `Wf in band ${String(band)}`,
  ours: motionSicknessWeight(10 ** (band / 10)),
  theirs: printed,
  within: 0.0011 * printed,
  source: 'ISO 8041-1:2017, annex B, transcribed',
  status: 'read',
}));

const dose: PublishedRow[] = (
  [
    [0.5, 3600, 30],
    [0.25, 7200, 21.213203],
    [0.1, 1800, 4.242641],
    [1.0, 120, 10.954451],
  ] as const
).map(([rms, seconds, msdv]) => ({
  name: `MSDV of ${String(rms)} m/s² over ${String(seconds)} s`,
  ours: steadyMotionDose(rms, seconds),
  theirs: msdv,
  within: 5e-7,
  source: 'ISO 2631-1:1997, clause 9',
  status: 'worked from a recalled formula',
}));

const roll: PublishedRow[] = (
  [
    [0.4, 1.0, 1.4, 2.340284],
    [0.2, 1.0, 1.2, 1.170142],
    [0.4, 0.65, 0.91, 1.519656],
    [0.25, 0.85, 1.0625, 1.242675],
  ] as const
).flatMap(([s, a, felt, degrees]) => {
  const common = {
    source: 'a_b = (1 + s) a_q, φ = s asin(a_q / g), g 9.81',
    status: 'worked from a recalled formula',
  } as const;
  return [
    {
      name: `felt acceleration at s ${String(s)}, a_q ${String(a)}`,
      ours: bodyAccelerationMps2(a, s),
      theirs: felt,
      within: 1e-9,
      ...common,
    },
    {
      name: `body roll at s ${String(s)}, a_q ${String(a)}, degrees`,
      ours: radToDeg(quasiStaticRollRad(a, s, 9.81)),
      theirs: degrees,
      within: 6e-7,
      ...common,
    },
  ];
});

testRows([...curveTransition, ...discreteEvent, ...heritage, ...weights, ...dose, ...roll]);

describe('comfort index', () => {
  it('takes roll velocity in degrees per second: the printed form 100 (3.64 w)^E with rad/s gives the same', () => {
    // EN 12299:2009 prints 100 (D w)^E, D = 3.64 standing and 0.916 seated (from memory).
    for (const [posture, d, e] of [
      ['standing', 3.64, 2.283],
      ['seated', 0.916, 1.626],
    ] as const) {
      const printed = 100 * (d * ((2 * Math.PI) / 180)) ** e;
      expect(comfortCurveTransitionPct(0, 0, 2, posture) / printed).toBeCloseTo(1, 2);
    }
  });

  it('never exceeds 100 percent', () => {
    expect(comfortCurveTransitionPct(9, 9, 9, 'standing')).toBe(100);
  });
});

describe('motion dose in the time domain', () => {
  it('gives a steady sine of 1 m/s² at 0.2 Hz over 30 minutes the dose of its weight', () => {
    // Check value: Wf(0.2) = 0.992010, MSDV 29.760288 (computed); the start of the filter is felt in the fourth digit.
    const n = 18001;
    const time = Array.from({ length: n }, (_, i) => i * 0.1);
    const dose0 = lateralMotionDose(
      time,
      time.map((t) => Math.sin(2 * Math.PI * 0.2 * t)),
    );
    expect(Math.abs(dose0 / 29.760288 - 1)).toBeLessThan(0.01);
  });
});
