import { describe, expect, it } from 'vitest';
import type { ProfileInput } from '../../../shared/assess/index.ts';
import {
  adviseLine,
  applyTrial,
  assessProfile,
  assessRun,
  resonanceFindings,
  runMotionDose,
} from '../../../shared/assess/index.ts';
import type { RunPassages } from '../../../shared/model/passage.ts';
import { passage, run, setup, vehicle } from './example.ts';

/** Profile of a line of known curves at one speed. */
function profileOf(
  passages: RunPassages,
  speedMps: number,
  lengthM: number,
  spacingM = 5,
): ProfileInput & { timeS: Float64Array } {
  const count = Math.floor(lengthM / spacingM) + 1;
  const chainageM = Float64Array.from({ length: count }, (_, i) => i * spacingM);
  const fitted = new Float64Array(count);
  for (const { curve } of passages.passages) {
    const k = curve.curvaturePerM.value;
    for (let i = 0; i < count; i++) {
      const s = chainageM[i]!;
      if (s < curve.startM || s > curve.endM) continue;
      if (s < curve.arcStartM) fitted[i] = (k * (s - curve.startM)) / (curve.arcStartM - curve.startM);
      else if (s > curve.arcEndM) fitted[i] = (k * (curve.endM - s)) / (curve.endM - curve.arcEndM);
      else fitted[i] = k;
    }
  }
  return {
    count,
    spacingM,
    chainageM,
    timeS: chainageM.map((s) => s / speedMps),
    speedMps: new Float64Array(count).fill(speedMps),
    speedSdMps: new Float64Array(count).fill(0.1),
    accelerationMps2: new Float64Array(count),
    curvaturePerM: fitted,
    curvatureSdPerM: new Float64Array(count).fill(2e-5),
    speedCurvatureCorrelation: new Float64Array(count),
    fittedCurvaturePerM: fitted,
  };
}

const V = 120 / 3.6;
// A sharp curve, a gentle one, and a sharp one close behind.
const line = run([
  passage({ number: 1, startM: 1500, radiusM: 600 }),
  passage({ number: 2, startM: 3000, radiusM: 2000, hand: 'right' }),
  passage({ number: 3, startM: 4500, radiusM: 500, hand: 'right' }),
]);
const profile = profileOf(line, V, 6500);

describe('assessment along a run', () => {
  const out = assessProfile(profile, line, setup());
  const at = (s: number): number => Math.round(s / 5);

  it('agrees on the arc with the curve table, signed by the hand', () => {
    const { curves } = assessRun(line, setup());
    expect(out.cantMm[at(1700)]).toBeCloseTo(110, 3);
    expect(out.cantDeficiencyMm[at(1700)]).toBeCloseTo(curves[0]!.row.cant_deficiency_mm!, 0);
    expect(out.lateralTrackMps2[at(1700)]).toBeCloseTo(curves[0]!.row.lateral_track_ms2!, 3);
    expect(out.lateralTrackMps2[at(4700)]).toBeCloseTo(-curves[2]!.row.lateral_track_ms2!, 3);
    expect(out.lateralBodyMps2[at(4700)]).toBeCloseTo(-curves[2]!.row.lateral_body_ms2!, 3);
  });

  it('its highest utilisation over a curve is that of the table', () => {
    const { curves } = assessRun(line, setup());
    for (const { row } of curves) {
      const most = Math.max(...out.utilisation.slice(at(row.start_m), at(row.end_m) + 1));
      const listed = Math.max(
        ...assessRun(line, setup()).curves[row.curve - 1]!.criteria.map((c) => c.utilisation ?? 0),
      );
      expect(most).toBeCloseTo(listed, 3);
    }
  });

  it('cant runs off with curvature and is none on a straight; nothing pushes there', () => {
    expect(out.cantMm[at(1540)]).toBeCloseTo(55, 1);
    expect(out.cantMm[at(500)]).toBe(0);
    expect(out.lateralTrackMps2[at(500)]).toBe(0);
    expect(out.limitSpeedKmh[at(500)]).toBeNaN();
  });

  it('jerk in a transition is that of the table, none on the arc', () => {
    const { curves } = assessRun(line, setup());
    expect(out.jerkMps3[at(1540)]!).toBeCloseTo(curves[0]!.row.jerk_ms3!, 1);
    expect(out.jerkMps3[at(1700)]!).toBeCloseTo(0, 6);
  });

  it('the standard deviation combines speed and curvature, and a correlation counts', () => {
    const kappa = 1 / 600;
    const plain = Math.hypot(2 * V * kappa * 0.1, V * V * 2e-5);
    expect(out.lateralTrackSdMps2[at(1700)]).toBeCloseTo(plain, 5);
    const opposed = { ...profile, speedCurvatureCorrelation: new Float64Array(profile.count).fill(-1) };
    const cancelled = assessProfile(opposed, line, setup()).lateralTrackSdMps2[at(1700)]!;
    expect(cancelled).toBeCloseTo(Math.abs(2 * V * kappa * 0.1 - V * V * 2e-5), 5);
    // On a right-hand curve the same correlation of the signed curvature adds up.
    expect(assessProfile(opposed, line, setup()).lateralTrackSdMps2[at(4700)]!).toBeGreaterThan(cancelled);
  });

  it('unknown cant is not a number, and the figures hold for none', () => {
    const unknown = assessProfile(profile, line, setup({ cantRule: { kind: 'unknown' } }));
    expect(unknown.cantMm[at(1700)]).toBeNaN();
    expect(unknown.cantDeficiencyMm[at(1700)]).toBeCloseTo((1500 * V * V) / (9.80665 * 600), 1);
  });

  it('on a road there is superelevation in percent and no cant deficiency', () => {
    const road = assessProfile(profile, line, setup({ mode: 'road' }));
    expect(road.cantMm[at(1700)]).toBeCloseTo(2, 4);
    expect(road.cantDeficiencyMm[at(1700)]).toBeNaN();
    expect(road.utilisation[at(1700)]!).toBeGreaterThan(1);
  });
});

describe('advice for the line', () => {
  const advice = adviseLine(profile, line, setup());

  it('slows for the curves that are over and for no other', () => {
    expect(advice.order.map((c) => c.curve).sort()).toEqual([1, 3]);
    expect(advice.permittedMps[Math.round(3200 / 5)]).toBe(Infinity);
    expect(advice.uncured).toEqual([]);
  });

  it('driven it is within every limit, and nowhere faster than recorded', () => {
    const slowed = {
      ...line,
      passages: line.passages.map((p) => ({
        ...p,
        speedMps: p.chainageM.map((s) => advice.drivenMps[Math.round(s / 5)]!),
      })),
    };
    for (const { row } of assessRun(slowed, setup()).curves) expect(row.verdict).toBe('within');
    advice.drivenMps.forEach((v) => expect(v).toBeLessThanOrEqual(V + 1e-12));
  });

  it('keeps to the braking and acceleration of the vehicle', () => {
    const { brakingMps2, accelerationMps2 } = vehicle('coach-conventional');
    for (let i = 1; i < advice.drivenMps.length; i++) {
      const change = advice.drivenMps[i]! ** 2 - advice.drivenMps[i - 1]! ** 2;
      expect(change).toBeLessThanOrEqual(2 * accelerationMps2 * 5 + 1e-9);
      expect(change).toBeGreaterThanOrEqual(-2 * brakingMps2 * 5 - 1e-9);
    }
  });

  it('the time lost is that of the slower run, and no more than the curves one by one', () => {
    let slower = 0;
    for (let i = 1; i < profile.count; i++) slower += 10 / (advice.drivenMps[i - 1]! + advice.drivenMps[i]!);
    expect(advice.lostS).toBeCloseTo(slower - 6500 / V, 6);
    expect(advice.lostS).toBeLessThanOrEqual(advice.order.reduce((sum, c) => sum + c.lostS, 0) + 1e-9);
    expect(advice.lostS).toBeGreaterThan(0);
  });

  it('orders the curves by comfort bought per second', () => {
    const gains = advice.order.map((c) => c.gainPerS);
    expect(gains).toEqual(gains.toSorted((a, b) => b - a));
    for (const c of advice.order) {
      expect(c.utilisationAfter!).toBeLessThanOrEqual(1);
      expect(c.gainPerS).toBeCloseTo((c.utilisation! - c.utilisationAfter!) / c.lostS, 9);
    }
  });

  it('a line that complies loses nothing', () => {
    const calm = run([passage({ number: 1, startM: 1500, radiusM: 3000 })]);
    const none = adviseLine(profileOf(calm, V, 3000), calm, setup());
    expect(none.order).toEqual([]);
    expect(none.lostS).toBe(0);
  });

  it('lists a curve that slowing does not cure, and slows for what it does cure there', () => {
    // 200 mm of cant is over its own limit whatever the speed; on the gentle curve nothing else is over.
    const overCanted = setup({ cantRule: { kind: 'constant', value: 200 } });
    const gentle = run([passage({ number: 1, startM: 1500, radiusM: 3000, entryM: 200, exitM: 200 })]);
    const none = adviseLine(profileOf(gentle, V, 3000), gentle, overCanted);
    expect([none.uncured, none.order]).toEqual([[1], []]);
    const sharp = run([passage({ number: 1, startM: 1500, radiusM: 450 })]);
    const some = adviseLine(profileOf(sharp, V, 3000), sharp, overCanted);
    expect(some.uncured).toEqual([1]);
    expect(some.order.map((c) => c.curve)).toEqual([1]);
  });
});

describe('trials', () => {
  it('change only the curve named, and leave what was recorded alone', () => {
    const before = JSON.stringify(line);
    const { passages, setup: tried } = applyTrial(line, setup(), [
      { curve: 1, speedKmh: 90, cant: 140, entryTransitionM: 120, exitTransitionM: 0 },
    ]);
    const [first, second] = assessRun(passages, tried).curves;
    expect(first!.row).toMatchObject({
      speed_max_kmh: 90,
      cant_mm: 140,
      cant_source: 'assumed',
      entry_transition_m: 120,
      exit_transition_m: 0,
    });
    expect(second!.row).toEqual(assessRun(line, setup()).curves[1]!.row);
    expect(JSON.stringify(line)).toBe(before);
  });

  it('a longer transition is laid about the same middle and lowers the jerk in proportion', () => {
    const { passages } = applyTrial(line, setup(), [{ curve: 1, entryTransitionM: 160, exitTransitionM: 160 }]);
    const { curve, chainageM } = passages.passages[0]!;
    expect((curve.startM + curve.arcStartM) / 2).toBe(1540);
    expect(chainageM[0]).toBe(1460);
    const jerk = (p: RunPassages): number => assessRun(p, setup()).curves[0]!.row.jerk_ms3!;
    expect(jerk(passages)).toBeCloseTo(jerk(line) / 2, 2);
  });

  it('tell the running time: a slower curve costs, a faster one saves', () => {
    const change = (speedKmh: number): number => applyTrial(line, setup(), [{ curve: 1, speedKmh }]).timeChangeS;
    expect(change(90)).toBeGreaterThan(460 / 25 - 460 / V);
    expect(change(120)).toBeCloseTo(0, 9);
    expect(change(140)).toBeCloseTo(460 / (140 / 3.6) - 460 / V, 6);
  });

  it('a trial of cant takes the place of the register', () => {
    const register = { id: 'r', name: 'r', offsetM: 0, stretch: 1, entries: [{ curve: 1, cantMm: 50 }] };
    const { passages, setup: tried } = applyTrial(line, setup({ register }), [{ curve: 1, cant: 130 }]);
    expect(assessRun(passages, tried).curves[0]!.row.cant_mm).toBe(130);
  });
});

describe('resonance along a run', () => {
  it('names stretches where irregularities meet the roll frequency, and the speeds to avoid', () => {
    // 0.6 Hz, damping 0.2: peak at 0.6 sqrt(1 - 0.08) Hz; at 33.33 m/s that is a spacing of 57.9 m.
    const found = resonanceFindings(profile, line, setup({ irregularitiesM: [58, 20] }));
    expect(found).toHaveLength(1);
    expect(found[0]!.message).toContain('every 58.0 m');
    expect(found[0]!.message).toContain('speeds to avoid');
  });

  it('finds a row of reverse curves passed near the roll frequency', () => {
    const row = run(
      [0, 1, 2, 3].map((i) =>
        passage({
          number: i + 1,
          startM: 500 + 30 * i,
          radiusM: 150,
          entryM: 10,
          exitM: 10,
          arcM: 10,
          hand: i % 2 === 0 ? 'left' : 'right',
          speedMps: 33,
        }),
      ),
    );
    const [found] = resonanceFindings(profile, row, setup());
    expect(found!.code).toBe('assess/resonance-reverse-curves');
    expect(found!.message).toContain('1, 2, 3, 4');
  });

  it('says nothing without natural frequency or damping', () => {
    expect(
      resonanceFindings(
        profile,
        line,
        setup({ irregularitiesM: [58], vehicle: { ...vehicle('tram'), rollFrequencyHz: null } }),
      ),
    ).toEqual([]);
  });
});

describe('motion dose of a run', () => {
  it('grows with the square root of repetitions and in proportion to the acceleration', () => {
    const n = 6001;
    const t = Array.from({ length: n }, (_, i) => i * 0.2);
    const a = t.map((x) => Math.sin(2 * Math.PI * 0.2 * x));
    const whole = runMotionDose(t, a);
    expect(
      runMotionDose(
        t,
        a.map((x) => 2 * x),
      ),
    ).toBeCloseTo(2 * whole, 9);
    expect(runMotionDose(t.slice(0, 3001), a) / whole).toBeCloseTo(Math.SQRT1_2, 2);
  });

  it('is 0 for steady pushing: the weighting has no answer at zero frequency', () => {
    const t = Array.from({ length: 5000 }, (_, i) => i);
    const steady = t.map(() => 1);
    const later = runMotionDose(t, steady);
    expect(later).toBeLessThan(2);
    expect(runMotionDose([0, 1, 1, 2], [0, 0, 5, 0])).toBe(0);
  });
});
