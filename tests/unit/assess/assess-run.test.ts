import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { applyTrial, assessRun } from '../../../shared/assess/index.ts';
import { complyingKmh, verdictOf } from '../../../shared/assess/verdict.ts';
import { AssessedCurve as AssessedCurveSchema, CURVE_COLUMNS, CurveRow } from '../../../shared/schema/curve-row.ts';
import type { AssessedCurve, CriterionResult } from '../../../shared/schema/curve-row.ts';
import type { CriterionId, LimitSet } from '../../../shared/schema/limit-set.ts';
import type { Setup } from '../../../shared/schema/setup.ts';
import type { Example } from './example.ts';
import { estimate, limitSet, passage, run, setup, vehicle } from './example.ts';

function assessOne(example: Example, over: Partial<Setup> = {}): AssessedCurve {
  return assessRun(run([passage(example)]), setup(over)).curves[0]!;
}

function criterion(curve: AssessedCurve, id: CriterionId): CriterionResult {
  return curve.criteria.find((c) => c.criterion === id)!;
}

/** A set with one limit, the same at every speed. */
function only(id: CriterionId, normal: number, over: Partial<LimitSet> = {}): LimitSet {
  const base = limitSet('operator-blank');
  return {
    ...base,
    limits: [
      {
        criterion: id,
        bands: [{ normal, exceptional: null }],
        source: { document: 'operator', clause: '', year: null, status: 'operator' },
      },
    ],
    ...over,
  };
}

describe('a known rail curve', () => {
  // Check value rail.defic.120_700_110 (g 9.81 there, 9.80665 here: 242.79 mm): 120 km/h, R 700 m, cant 110 mm.
  const curve = assessOne({});

  it('has the published equilibrium cant, deficiency and accelerations', () => {
    expect(curve.row.equilibrium_cant_mm).toBeCloseTo(242.8, 1);
    expect(curve.row.cant_deficiency_mm).toBeCloseTo(132.8, 1);
    expect(curve.row.lateral_track_ms2).toBeCloseTo(0.864, 3);
    expect(curve.row.lateral_body_ms2).toBeCloseTo(1.3 * 0.864, 2);
    expect(curve.row.cant_source).toBe('assumed');
  });

  it('has the published rates in its transitions', () => {
    // 110 mm over 80 m at 120 km/h is 45.833333 mm/s (check value rail.rates.120_80).
    expect(curve.row.cant_rate_mm_s).toBeCloseTo(45.8, 1);
    expect(criterion(curve, 'cant_gradient').value).toBeCloseTo(1.375, 9);
    expect(curve.row.deficiency_rate_mm_s).toBeCloseTo((132.79 * 33.3333) / 80, 1);
  });

  it('exactly known, is over 130 mm by cant deficiency and complies at 115 km/h', () => {
    expect(curve.row.verdict).toBe('over');
    expect(curve.row.governing_criterion).toBe('cant_deficiency');
    expect(curve.row.limit).toBe(130);
    expect(curve.row.utilisation).toBeCloseTo(132.79 / 130, 3);
    // V = sqrt(R (D + I) / 11.80): sqrt(700 * 240 / 11.8023) = 119.31 km/h.
    expect(curve.row.complying_speed_kmh).toBe(115);
    expect(criterion(curve, 'cant_deficiency').complyingCantMm).toBeCloseTo(112.79, 1);
  });

  it('writes out formula, numbers with units, result, limit and source', () => {
    const lines = criterion(curve, 'cant_deficiency').working;
    expect(lines[0]).toBe('Cant deficiency: I = b v² / (g R) - D');
    expect(lines[1]).toBe('= 1500 mm × (33.33 m/s)² / (9.80665 m/s² × 700.0 m) - 110 mm');
    expect(lines[2]).toBe('= 132.8 mm');
    expect(lines.join('\n')).toContain('Limit (normal): 130 mm. Source: EN 13803-1:2010');
    expect(lines.join('\n')).toContain('from memory');
    expect(lines.join('\n')).toContain('Utilisation 1.021: over.');
  });

  it('has a row of exactly the contracted columns, valid by its schema', () => {
    expect(Object.keys(curve.row)).toEqual([...CURVE_COLUMNS]);
    expect(CurveRow.parse(curve.row)).toEqual(curve.row);
  });

  it('names three cures and what stands against each', () => {
    expect(curve.cures?.map((c) => c.kind)).toEqual(['speed', 'cant', 'transition']);
    const [speed, cant, transition] = curve.cures!;
    expect(speed).toMatchObject({ value: 115, feasible: true });
    // 118 mm cures the deficiency rate of 55.3 mm/s too; at 50 mm/s the 80 m transition takes up to 120 mm.
    expect(cant).toMatchObject({ value: 113, feasible: true });
    expect(transition).toMatchObject({ feasible: false });
    expect(transition!.against).toContain('cant deficiency');
  });

  it('gives the same figures without working lines', () => {
    const bare = assessRun(run([passage({})]), setup(), { working: false }).curves[0]!;
    expect(bare.row).toEqual(curve.row);
    expect(bare.criteria).toEqual(curve.criteria.map((c) => ({ ...c, working: [] })));
    expect(bare.criteria.every((c) => c.working.length === 0)).toBe(true);
  });
});

describe('verdicts', () => {
  it.each([
    [10, 20, 20, 'within'],
    [10, 20.1, 20, 'undecided'],
    [20, 30, 20, 'undecided'],
    [20.1, 30, 20, 'over'],
  ] as const)('interval %d to %d against a limit of %d is %s', (low, high, limit, verdict) => {
    expect(verdictOf(low, high, limit, 'most')).toBe(verdict);
  });

  it('a value without a lower end is never over', () => {
    expect(verdictOf(null, 500, 20, 'most')).toBe('undecided');
    expect(verdictOf(null, 19, 20, 'most')).toBe('within');
  });

  it('for a least length the sense is turned round', () => {
    expect(verdictOf(30, 40, 30, 'least')).toBe('within');
    expect(verdictOf(20, 40, 30, 'least')).toBe('undecided');
    expect(verdictOf(20, 29, 30, 'least')).toBe('over');
  });

  it('uncertain by 2 % the curve is undecided, by 0.1 % it is over', () => {
    expect(assessOne({ relativeSd: 0.02 }).row.verdict).toBe('undecided');
    expect(assessOne({ relativeSd: 0.001 }).row.verdict).toBe('over');
  });

  it('the interval of deficiency is z times the relative error of v² kappa: the speed scale enters once', () => {
    const { row } = assessOne({ relativeSd: 0.02, speedSdMps: 0.5 });
    expect(row.cant_deficiency_high_mm! - row.cant_deficiency_mm!).toBeCloseTo(1.96 * 0.02 * 242.79, 1);
    expect(row.cant_deficiency_mm! - row.cant_deficiency_low_mm!).toBeCloseTo(1.96 * 0.02 * 242.79, 1);
  });

  it('a lower confidence narrows the interval', () => {
    const wide = assessOne({ relativeSd: 0.02 }, { confidence: 0.95 }).row;
    const narrow = assessOne({ relativeSd: 0.02 }, { confidence: 0.68 }).row;
    const width = (r: typeof wide): number => r.cant_deficiency_high_mm! - r.cant_deficiency_low_mm!;
    expect(width(narrow) / width(wide)).toBeCloseTo(0.99446 / 1.95996, 2);
  });

  it('a criterion that the set lacks is not assessed and says so', () => {
    const c = criterion(assessOne({}), 'lateral_body');
    expect(c.verdict).toBe('not assessed');
    expect(c.reason).toContain('no limit for it');
    expect(c.value).toBeCloseTo(1.123, 2);
  });

  it('a blank set assesses nothing and a finding says so', () => {
    const { curves, findings } = assessRun(run([passage({})]), setup({ limits: limitSet('operator-blank') }));
    expect(curves[0]!.row.verdict).toBe('not assessed');
    expect(findings.map((f) => f.code)).toContain('assess/no-limits');
  });

  it('a set of the other mode is told', () => {
    const { findings } = assessRun(run([passage({})]), setup({ limits: limitSet('road-design') }));
    expect(findings.map((f) => f.code)).toContain('assess/limits-of-other-mode');
  });

  it('a vehicle that stood on the whole curve has no deficiency, and a stop on a curve does not count as excess', () => {
    expect(criterion(assessOne({ speedMps: 0.3 }), 'cant_deficiency')).toMatchObject({
      verdict: 'not assessed',
      reason: expect.stringContaining('stood') as string,
    });
    const stop = assessOne({ speedMps: (s) => (s > 1200 && s < 1250 ? 0 : 25) });
    expect(criterion(stop, 'cant_excess').value).toBeLessThan(0);
  });
});

describe('unknown cant', () => {
  const unknown = { cantRule: { kind: 'unknown' } } as const;

  it('is within when even zero cant complies', () => {
    const { row } = assessOne({ speedMps: 80 / 3.6 }, unknown);
    expect(row.verdict).toBe('within');
    expect(row.cant_mm).toBeNull();
    expect(row.cant_source).toBe('unknown');
    expect(row.notes).toContain('upper bounds');
  });

  it('is undecided when zero cant would not comply, and says what cant would be needed', () => {
    const curve = assessOne({}, unknown);
    const c = criterion(curve, 'cant_deficiency');
    expect(c.verdict).toBe('undecided');
    expect(c.value).toBeCloseTo(242.79, 1);
    expect(c.low).toBeNull();
    // 242.8 - 130 = 112.8, rounded up.
    expect(c.reason).toContain('a cant of at least 113 mm');
    expect(curve.row.cant_deficiency_low_mm).toBeNull();
    expect(c.working.join(' ')).toContain('for zero cant: an upper bound');
  });

  it('leaves criteria of cant itself not assessed', () => {
    const curve = assessOne({}, unknown);
    for (const id of ['cant', 'cant_excess', 'cant_rate', 'cant_gradient'] as const) {
      expect(criterion(curve, id), id).toMatchObject({
        verdict: 'not assessed',
        reason: expect.stringContaining('cant is not known') as string,
      });
    }
  });

  it('is never over, however fast', () => {
    expect(assessOne({ speedMps: 60 }, unknown).row.verdict).toBe('undecided');
  });

  it('is cautioned', () => {
    const { cautions } = assessRun(run([passage({})]), setup(unknown));
    expect(cautions.some((c) => c.includes('upper bounds'))).toBe(true);
  });
});

describe('cautions', () => {
  it('defer to the operator, the regulator and competent people, and clear nothing', () => {
    const text = assessRun(run([passage({})]), setup()).cautions.join('\n');
    expect(text).toContain("operator's and the regulator's own limits");
    expect(text).toContain('competent, authorised');
    expect(text).toContain('does not replace track-geometry measurement');
    expect(text).toContain('derailment, overturning');
    expect(text).toContain('recalled, not read');
  });

  it('speak of side friction on roads', () => {
    expect(assessRun(run([passage({})]), setup({ mode: 'road' })).cautions.join('\n')).toContain('wet, ice');
  });
});

describe('ends of a curve', () => {
  it('without a transition the abrupt change is judged by its own limit, not by a rate', () => {
    const curve = assessOne({ entryM: 0, exitM: 0, speedMps: 60 / 3.6, radiusM: 300 });
    // b v²/(g R): 1500 * 16.667² / (9.80665 * 300) = 141.6 mm (11.8 V²/R; check value).
    expect(criterion(curve, 'abrupt_deficiency_change').value).toBeCloseTo(141.6, 1);
    expect(criterion(curve, 'abrupt_deficiency_change').verdict).toBe('over');
    expect(criterion(curve, 'deficiency_rate').verdict).toBe('not assessed');
    // A transition that runs 141.6 mm off at 55 mm/s and 16.667 m/s.
    expect(criterion(curve, 'abrupt_deficiency_change').neededTransitionM).toBeCloseTo((141.63 * 16.667) / 55, 1);
    expect(criterion(curve, 'cant_rate').reason).toContain('no transition');
  });

  it('a set without an abrupt-change limit judges the rate over the virtual length', () => {
    const curve = assessOne(
      { entryM: 0, exitM: 0, speedMps: 10, radiusM: 300 },
      { limits: only('deficiency_rate', 55), cantRule: { kind: 'constant', value: 0 } },
    );
    const c = criterion(curve, 'deficiency_rate');
    // Bogie centres 17.5 m apart: dI = 50.99 mm, times 10 / 17.5.
    expect(c.value).toBeCloseTo(((1500 * 100) / (9.80665 * 300)) * (10 / 17.5), 6);
    expect(c.working.join(' ')).toContain('virtual length of 17.5 m');
  });

  it('an end whose length the recording cannot tell is a missing input where the answer hangs on it', () => {
    const end = { kind: 'undetermined' as const, lengthM: { value: 20, sd: 15, low: 0, high: 60 } };
    const at = (speedMps: number): AssessedCurve =>
      assessOne(
        { entryM: 20, exitM: 20, entry: end, exit: end, speedMps, radiusM: 300 },
        { cantRule: { kind: 'constant', value: 0 } },
      );
    const abrupt = criterion(at(60 / 3.6), 'abrupt_deficiency_change');
    expect(abrupt).toMatchObject({ verdict: 'not assessed', low: 0, limit: 130, utilisation: null });
    expect(abrupt.reason).toContain('does not tell the length of the entry transition (at most 60 m)');
    const rate = criterion(at(25 / 3.6), 'deficiency_rate');
    expect(rate.low!).toBeLessThan(rate.value! / 1.5);
    expect(rate.high!).toBeGreaterThan(rate.value!);
    // 24.6 mm at 25 km/h: even over the bogie distance of 17.5 m the rate is 9.8 mm/s; at 60 km/h even 60 m are too
    // short.
    expect(rate.verdict).toBe('within');
    expect(criterion(at(80 / 3.6), 'deficiency_rate').verdict).toBe('over');
    expect(at(40 / 3.6).row.verdict).toBe('within');
  });

  it('a reverse curve adds the neighbour only where there is no ramp between', () => {
    const ramp = assessOne({ entry: { fromCurvaturePerM: -1 / 500, joins: 2 } });
    expect(criterion(ramp, 'deficiency_rate').value).toBeCloseTo(criterion(assessOne({}), 'deficiency_rate').value!, 9);
    const abrupt = assessOne({ entryM: 0, speedMps: 15, entry: { fromCurvaturePerM: -1 / 500, joins: 2 } });
    expect(criterion(abrupt, 'abrupt_deficiency_change').value).toBeCloseTo(
      ((1500 * 225) / 9.80665) * (1 / 700 + 1 / 500),
      6,
    );
  });

  it('a compound curve runs only the difference off', () => {
    const curve = assessOne({
      entry: { fromCurvaturePerM: 1 / 1400, joins: 2 },
      exit: { fromCurvaturePerM: 1 / 1400, joins: 2 },
    });
    // Neighbour unknown to the run: its cant is taken as this curve's, so only curvature changes.
    const dI = (1500 * (120 / 3.6) ** 2) / 9.80665 / 1400;
    expect(criterion(curve, 'deficiency_rate').value).toBeCloseTo((dI * (120 / 3.6)) / 80, 6);
  });
});

describe('complying speed', () => {
  it('meets the limit when driven: the trial at that speed is within, a step faster is not', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 200, max: 2500, noNaN: true }),
        fc.double({ min: 0, max: 150, noNaN: true }),
        fc.constantFrom<[CriterionId, number]>(
          ['cant_deficiency', 130],
          ['lateral_track', 0.65],
          ['lateral_body', 1],
          ['deficiency_rate', 55],
          ['jerk', 0.4],
        ),
        (radiusM, cantMm, [id, limit]) => {
          const with1 = setup({
            limits: only(id, limit, { speedStepKmh: 1 }),
            cantRule: { kind: 'constant', value: cantMm },
          });
          const line = run([passage({ radiusM, speedMps: 60 })]);
          const { row } = assessRun(line, with1, { working: false }).curves[0]!;
          const speedKmh = row.complying_speed_kmh;
          fc.pre(speedKmh !== null && speedKmh > 20);
          const at = (kmh: number): string => {
            const trial = applyTrial(line, with1, [{ curve: 1, speedKmh: kmh }]);
            return assessRun(trial.passages, trial.setup, { working: false }).curves[0]!.row.verdict;
          };
          expect(at(speedKmh)).toBe('within');
          expect(at(speedKmh + 1.001)).toBe('over');
        },
      ),
      { numRuns: 60 },
    );
  });

  it('sure at the chosen confidence is never above the best estimate, and lower the less is known', () => {
    const c = (relativeSd: number): CriterionResult =>
      criterion(
        assessOne({ relativeSd }, { limits: only('cant_deficiency', 130, { speedStepKmh: 1 }) }),
        'cant_deficiency',
      );
    expect(c(0).complyingSpeedSureKmh).toBe(c(0).complyingSpeedKmh);
    expect(c(0.03).complyingSpeedSureKmh!).toBeLessThan(c(0.03).complyingSpeedKmh!);
    expect(c(0.06).complyingSpeedSureKmh!).toBeLessThan(c(0.03).complyingSpeedSureKmh!);
  });

  it('rises with radius and cant and falls with a stricter limit', () => {
    const speed = (radiusM: number, cantMm: number, limit: number): number =>
      criterion(
        assessOne(
          { radiusM },
          {
            limits: only('cant_deficiency', limit, { speedStepKmh: 1 }),
            cantRule: { kind: 'constant', value: cantMm },
          },
        ),
        'cant_deficiency',
      ).complyingSpeedKmh!;
    fc.assert(
      fc.property(
        fc.integer({ min: 150, max: 3000 }),
        fc.integer({ min: 0, max: 140 }),
        fc.integer({ min: 50, max: 150 }),
        (R, D, I) => {
          expect(speed(R + 50, D, I)).toBeGreaterThanOrEqual(speed(R, D, I));
          expect(speed(R, D + 20, I)).toBeGreaterThanOrEqual(speed(R, D, I));
          expect(speed(R, D, I + 20)).toBeGreaterThanOrEqual(speed(R, D, I));
        },
      ),
      { numRuns: 40 },
    );
  });

  it('stays inside the speed band that its limit holds for', () => {
    const banded = setup({
      limits: {
        ...only('cant_deficiency', 1),
        limits: [
          {
            criterion: 'cant_deficiency',
            bands: [
              { maxSpeedKmh: 100, normal: 150, exceptional: null },
              { normal: 60, exceptional: null },
            ],
            source: { document: 'operator', clause: '', year: null, status: 'operator' },
          },
        ],
      },
    });
    // 150 mm would allow 140 km/h, but only up to 100; 60 mm above allows 90, which lies below its band.
    const kmh = (limit: number): number => (limit === 150 ? 140 : 90) / 3.6;
    expect(complyingKmh(banded, 'cant_deficiency', 500, kmh)).toBe(100);
    expect(complyingKmh(banded, 'cant_deficiency', 500, (limit) => (limit === 150 ? 140 : 120) / 3.6)).toBeCloseTo(
      120,
      9,
    );
    expect(complyingKmh(banded, 'jerk', 500, kmh)).toBeNull();
  });

  it('costs the running time of the slow stretch with braking and accelerating', () => {
    const { row } = assessOne(
      {},
      { vehicle: { ...vehicle('coach-conventional'), brakingMps2: 0.5, accelerationMps2: 0.25 } },
    );
    const v = 120 / 3.6;
    const u = 115 / 3.6;
    const cost = 460 * (1 / u - 1 / v) + (v - u) ** 2 / (2 * 0.5 * v) + (v - u) ** 2 / (2 * 0.25 * v);
    expect(row.time_cost_s).toBeCloseTo(cost, 1);
  });

  it('a curve within its limits costs nothing', () => {
    expect(assessOne({ speedMps: 25 }).row.time_cost_s).toBe(0);
  });
});

describe('symmetries', () => {
  const strip = (curve: AssessedCurve): unknown => ({ ...curve.row, hand: 'left', notes: '' });

  it('a left and a right curve give the same row', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 150, max: 3000, noNaN: true }),
        fc.double({ min: 8, max: 50, noNaN: true }),
        (radiusM, speedMps) => {
          const left = assessOne({ radiusM, speedMps, relativeSd: 0.02 });
          const right = assessOne({ radiusM, speedMps, relativeSd: 0.02, hand: 'right' });
          expect(strip(right)).toEqual(strip(left));
        },
      ),
      { numRuns: 30 },
    );
  });

  it('driven the other way round a curve has the same rates, entry and exit exchanged', () => {
    const there = assessOne({ entryM: 60, exitM: 120 });
    const back = assessOne({ entryM: 120, exitM: 60 });
    for (const id of ['deficiency_rate', 'cant_rate', 'cant_gradient', 'jerk', 'roll_rate', 'lateral_track'] as const) {
      expect(criterion(back, id).value, id).toBeCloseTo(criterion(there, id).value!, 9);
    }
    expect(criterion(there, 'jerk').working[0]).toContain('entry');
    expect(criterion(back, 'jerk').working[0]).toContain('exit');
  });

  it('twice the speed quadruples cant and deficiency together', () => {
    const slow = assessOne({ speedMps: 15 }).row;
    const fast = assessOne({ speedMps: 30 }).row;
    expect(fast.equilibrium_cant_mm! / slow.equilibrium_cant_mm!).toBeCloseTo(4, 2);
    expect(fast.cant_deficiency_mm! + 110).toBeCloseTo(4 * (slow.cant_deficiency_mm! + 110), 0);
  });
});

describe('road', () => {
  it('a bus on a street corner is judged by what its passengers feel', () => {
    const curve = assessOne({ radiusM: 40, entryM: 15, exitM: 15, arcM: 40, speedMps: 8 }, { mode: 'road' });
    const x = 64 / (9.80665 * 40);
    const f = (x - 0.02) / (1 + 0.02 * x);
    expect(curve.row.side_friction).toBeCloseTo(f, 3);
    expect(curve.row.ball_bank_deg).toBeCloseTo((1.3 * Math.atan(f) * 180) / Math.PI, 1);
    // Feltover floor: (1 + s)(v²/R cos - g sin).
    expect(curve.row.lateral_body_ms2).toBeCloseTo(
      1.3 * (1.6 * Math.cos(Math.atan(0.02)) - 9.80665 * Math.sin(Math.atan(0.02))),
      3,
    );
    expect(curve.row.verdict).toBe('over');
    expect(curve.row.cant_mm).toBeNull();
    expect(curve.row.superelevation_pct).toBe(2);
    expect(curve.row.cant_deficiency_mm).toBeNull();
  });

  it('an advisory speed comes in steps of 5 mph when the set says so', () => {
    const mph = 1.609344;
    const limits = { ...limitSet('road-design'), speedStepKmh: 5 * mph };
    const { row } = assessOne({ radiusM: 60, speedMps: 15 }, { mode: 'road', limits, vehicle: vehicle('car') });
    expect((row.complying_speed_kmh! / mph) % 5).toBeCloseTo(0, 3);
    expect(row.complying_speed_kmh!).toBeLessThan(54);
  });

  it('the limit of side friction is the one for the speed driven', () => {
    const limits = limitSet('road-design');
    const at = (kmh: number): number | null =>
      criterion(
        assessOne({ radiusM: 400, speedMps: kmh / 3.6 }, { mode: 'road', limits, vehicle: vehicle('car') }),
        'side_friction',
      ).limit;
    expect(at(50)).toBe(0.19);
    expect(at(51)).toBe(0.17);
    expect(at(100)).toBe(0.12);
  });

  it('warns of rollover far below the static stability factor and never clears it', () => {
    const hard = assessOne({ radiusM: 30, speedMps: 11, entryM: 10, exitM: 10, arcM: 30 }, { mode: 'road' });
    expect(hard.row.notes).toContain('no clearance');
    const soft = assessOne({ radiusM: 300, speedMps: 11 }, { mode: 'road' });
    expect(soft.row.notes).not.toContain('rollover');
  });

  it('braking into the curve is judged where the set has a limit for it', () => {
    const c = criterion(
      assessOne({ radiusM: 60, speedMps: 8, accelerationMps2: -1.4 }, { mode: 'road' }),
      'entry_deceleration',
    );
    expect(c).toMatchObject({ verdict: 'over', value: 1.4 });
  });
});

describe('vehicle', () => {
  it('without a roll coefficient what needs it is not assessed, the rest is', () => {
    const curve = assessOne({}, { vehicle: { ...vehicle('coach-conventional'), rollCoefficient: null } });
    expect(criterion(curve, 'lateral_body').reason).toContain('roll coefficient');
    expect(criterion(curve, 'pct_standing').reason).toContain('roll coefficient');
    expect(curve.row.pct_standing).toBeNull();
    expect(curve.dynamics).toBeUndefined();
    expect(curve.row.verdict).toBe('over');
  });

  it('the cant base follows the gauge unless given', () => {
    const metre = assessOne({}, { vehicle: { ...vehicle('coach-conventional'), gaugeMm: 1000, cantBaseMm: null } });
    expect(metre.row.equilibrium_cant_mm! / assessOne({}).row.equilibrium_cant_mm!).toBeCloseTo(1055 / 1500, 3);
  });

  it('tilting takes its share from the body but not from the track plane', () => {
    const plain = assessOne({});
    const tilting = assessOne({}, { vehicle: { ...vehicle('coach-conventional'), tiltCompensation: 0.6 } });
    expect(tilting.row.lateral_body_ms2! / plain.row.lateral_body_ms2!).toBeCloseTo(0.4, 2);
    expect(tilting.row.lateral_track_ms2).toBe(plain.row.lateral_track_ms2);
  });

  it('a long gentle transition gives no overshoot, a short one does', () => {
    const gentle = assessOne({ entryM: 200, exitM: 200, arcM: 600 }).dynamics!;
    const short = assessOne({ entryM: 20, exitM: 20, arcM: 600 }).dynamics!;
    expect(gentle.dynamicFactor).toBeLessThan(1.08);
    expect(short.dynamicFactor).toBeGreaterThan(1.3);
  });

  it('comfort of the entry is near the index of its quasi-static figures when the transition is long', () => {
    const curve = assessOne({ entryM: 200, exitM: 200, arcM: 600 });
    const { value } = criterion(curve, 'pct_standing');
    const a = 1.3 * 0.864;
    const j = (1.3 * 0.868 * (120 / 3.6)) / 200;
    const r = ((110 - 0.3 * 132.79) / 1500) * (120 / 3.6 / 200) * (180 / Math.PI);
    // EN 12299:2009, coefficients from memory.
    const index = 28.54 * a + 20.69 * j - 11.1 + 0.185 * r ** 2.283;
    expect(value! / index).toBeGreaterThan(0.98);
    expect(value! / index).toBeLessThan(1.06);
  });

  it('an entry shorter than two seconds has a discrete-event figure instead of the curve index', () => {
    const curve = assessOne({ entryM: 40, exitM: 40 });
    expect(curve.row.pct_standing).toBeNull();
    expect(criterion(curve, 'pct_standing').reason).toContain('P_DE');
  });

  it('a limit on the comfort index gives a speed that meets it', () => {
    const limits = only('pct_standing', 20, { speedStepKmh: 1 });
    const line = run([passage({ entryM: 120, exitM: 120, arcM: 500 })]);
    const { row } = assessRun(line, setup({ limits })).curves[0]!;
    expect(row.verdict).toBe('over');
    const trial = applyTrial(line, setup({ limits }), [{ curve: 1, speedKmh: row.complying_speed_kmh! }]);
    const after = criterion(assessRun(trial.passages, trial.setup).curves[0]!, 'pct_standing');
    expect(after.value!).toBeLessThanOrEqual(20);
    expect(after.value!).toBeGreaterThan(17);
  });
});

describe('vertical acceleration', () => {
  const withHeights = (arcM: number, height: (s: number) => number, noise = 0): ReturnType<typeof passage> => {
    const p = passage({ arcM, speedMps: 40 });
    return { ...p, elevationM: p.chainageM.map((s, i) => height(s) + (i % 2 === 0 ? noise : -noise)) };
  };

  it('is v²/R_v on a crest of known radius, with an honest interval for wandering heights', () => {
    const crest = withHeights(800, (s) => 50 - (s - 1500) ** 2 / (2 * 6000));
    const { curves } = assessRun(run([crest]), setup());
    const c = criterion(curves[0]!, 'vertical');
    expect(c.value).toBeCloseTo(1600 / 6000, 4);
    expect(c.high! - c.value!).toBeGreaterThan(0.01);
  });

  it('is not assessed without heights, and says so', () => {
    expect(criterion(assessOne({}), 'vertical').reason).toContain('no elevation');
  });

  it.each([
    ['a curve too short against the wander of heights', withHeights(200, () => 50)],
    ['heights too noisy', withHeights(800, () => 50, 40)],
  ])('is not assessed with %s', (_, poor) => {
    const { curves } = assessRun(run([poor]), setup());
    expect(criterion(curves[0]!, 'vertical').reason).toContain('not good enough');
  });
});

describe('permitted speed of the line', () => {
  const permittedSpeeds = [
    { fromM: 0, toM: 1200, speedKmh: 140 },
    { fromM: 1200, toM: 9000, speedKmh: 110 },
  ];

  it('is the limit of speed, at the place where the run stands worst against it', () => {
    const c = criterion(assessOne({}, { permittedSpeeds }), 'speed');
    expect(c).toMatchObject({ verdict: 'over', limit: 110, complyingSpeedKmh: 110 });
    expect(c.source).toContain('permitted speed profile');
    expect(criterion(assessOne({ speedMps: 30 }, { permittedSpeeds }), 'speed').verdict).toBe('within');
  });

  it('leaves curves outside it to the limit set', () => {
    expect(criterion(assessOne({ startM: 20000 }, { permittedSpeeds }), 'speed').verdict).toBe('not assessed');
  });
});

describe('shortest element', () => {
  it('is over when the circular part is surely shorter than the limit', () => {
    const c = criterion(assessOne({ arcM: 12 }, { limits: only('element_length', 20) }), 'element_length');
    expect(c).toMatchObject({ verdict: 'over', value: 12 });
    expect(c.utilisation).toBeCloseTo(20 / 12, 9);
  });

  it('is undecided when its ends are not known well enough', () => {
    const end = { middleM: estimate(1040, 8) };
    expect(
      criterion(assessOne({ arcM: 25, entry: end }, { limits: only('element_length', 20) }), 'element_length').verdict,
    ).toBe('undecided');
  });
});

describe('whatever is recorded', () => {
  const number = fc.oneof(fc.double({ min: 0, max: 90, noNaN: true }), fc.constantFrom(NaN, 0));
  const length = fc.constantFrom(0, 1, 40, 300);

  it('the outcome is a row that JSON can carry, and no throw', () => {
    fc.assert(
      fc.property(
        fc.array(number, { minLength: 1, maxLength: 12 }),
        fc.double({ min: 5, max: 20_000, noNaN: true }),
        length,
        length,
        length,
        fc.constantFrom(0, 0.02, 0.8, 5, NaN),
        fc.constantFrom('rail', 'road'),
        fc.constantFrom<Setup['cantRule']>({ kind: 'unknown' }, { kind: 'constant', value: 5 }),
        (speeds, radiusM, entryM, exitM, arcM, relativeSd, mode, cantRule) => {
          const known = passage({ radiusM, entryM, exitM, arcM, relativeSd });
          const odd = { ...known, speedMps: known.chainageM.map((_, i) => speeds[i % speeds.length]!) };
          const { curves } = assessRun(run([odd]), setup({ mode, cantRule }));
          expect(AssessedCurveSchema.safeParse(JSON.parse(JSON.stringify(curves[0])))).toMatchObject({ success: true });
        },
      ),
      { numRuns: 300 },
    );
  });
});
