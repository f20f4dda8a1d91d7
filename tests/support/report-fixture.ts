import type { ReportContext } from '../../server/report/index.ts';
import type { ProfileTable } from '../../server/report/index.ts';
import type { AssessedCurve, CurveRow } from '../../shared/schema/curve-row.ts';

/** A row with every column filled; tests override what they look at. */
function fixtureRow(changes: Partial<CurveRow> = {}): CurveRow {
  return {
    run: 'r1',
    curve: 1,
    hand: 'left',
    shape: 'simple',
    start_m: 1000.04,
    end_m: 1400.06,
    lat_start: 10.0,
    lon_start: 20.0,
    lat_mid: 10.001,
    lon_mid: 20.001,
    lat_end: 10.003,
    lon_end: 20.001,
    radius_m: 412.345,
    radius_low_m: 405.1,
    radius_high_m: 419.9,
    deflection_deg: 41.234,
    arc_m: 280,
    entry_transition_m: 60,
    exit_transition_m: 60,
    speed_kmh: 93.456,
    speed_max_kmh: 94.1,
    speed_low_kmh: 93.1,
    speed_high_kmh: 93.8,
    cant_mm: 80,
    superelevation_pct: null,
    cant_source: 'registered',
    equilibrium_cant_mm: 250.01,
    cant_deficiency_mm: 170.01,
    cant_deficiency_low_mm: 165.2,
    cant_deficiency_high_mm: 175.4,
    cant_excess_mm: 0,
    deficiency_rate_mm_s: 73.2,
    cant_rate_mm_s: 34.4,
    lateral_track_ms2: 1.1115,
    lateral_track_low_ms2: 1.08,
    lateral_track_high_ms2: 1.147,
    lateral_body_ms2: 1.4,
    jerk_ms3: 0.48,
    side_friction: null,
    ball_bank_deg: null,
    pct_seated: 8.3,
    pct_standing: 28.7,
    verdict: 'over',
    governing_criterion: 'cant_deficiency',
    value: 170.01,
    limit: 130,
    utilisation: 1.3078,
    complying_speed_kmh: 85,
    complying_cant_mm: 120.01,
    time_cost_s: 1.53,
    notes: '',
    ...changes,
  };
}

export function fixtureCurve(changes: Partial<CurveRow> = {}): AssessedCurve {
  const row = fixtureRow(changes);
  return {
    row,
    criteria: [
      {
        criterion: 'cant_deficiency',
        verdict: row.verdict,
        value: 170.01,
        low: 165.2,
        high: 175.4,
        unit: 'mm',
        limit: 130,
        utilisation: 1.3078,
        complyingSpeedKmh: 85,
        complyingSpeedSureKmh: 84,
        complyingCantMm: 120.01,
        neededTransitionM: null,
        working: ['I = b v²/(g R) − D', '= 1500 × 25.96² / (9.80665 × 412.3) − 80 = 170 mm'],
        source: 'invented for this test',
        reason: '',
      },
    ],
  };
}

export function fixtureContext(curves: AssessedCurve[]): ReportContext {
  return {
    title: 'Fixture line',
    software: 'Bendbook test',
    cautions: ['Derived from GPS: not a track-geometry measurement.', 'The limits of the operator govern.'],
    setup: {
      mode: 'rail',
      limits: {
        formatVersion: 1,
        id: 'fixture',
        name: 'Fixture set',
        mode: 'rail',
        appliesTo: 'this test',
        speedStepKmh: 5,
        limits: [
          {
            criterion: 'cant_deficiency',
            bands: [{ normal: 130, exceptional: 150 }],
            source: { document: 'operator', clause: '', year: null, status: 'operator' },
          },
        ],
        cautions: [],
      },
      vehicle: {
        formatVersion: 1,
        id: 'v',
        name: 'Fixture coach',
        mode: 'rail',
        gaugeMm: 1435,
        cantBaseMm: 1500,
        massKg: null,
        centreOfGravityHeightM: null,
        trackWidthM: null,
        wheelbaseM: null,
        rollCoefficient: 0.3,
        rollFrequencyHz: 0.7,
        dampingRatio: 0.2,
        tiltCompensation: 0,
        passengers: 'seated',
        accelerationMps2: 0.5,
        brakingMps2: 0.5,
        source: { document: 'operator', clause: '', year: null, status: 'operator' },
      },
      register: null,
      cantRule: { kind: 'unknown' },
      tier: 'normal',
      confidence: 0.95,
    },
    runs: [
      {
        id: 'r1',
        name: 'Morning run',
        startUtcS: 1_750_000_000,
        durationS: 600,
        lengthM: 3000,
        fixCount: 600,
        topSpeedKmh: 94,
        recording: { name: 'morning.gpx', sha256: 'ab'.repeat(32), bytes: 1234 },
        curves,
        findings: [],
        path: () => [],
      },
    ],
  };
}

/** A profile of `count` places: straight, a bend to the left between 1000 and 1400 m, straight. */
export function fixtureProfile(count = 601): ProfileTable {
  const s = Array.from({ length: count }, (_, i) => (3000 * i) / (count - 1));
  let [heading, x, y] = [0.3, 0, 0];
  const lat: number[] = [];
  const lon: number[] = [];
  const kappa = s.map((m) => (m < 1000 || m > 1400 ? 0 : 1 / 412));
  s.forEach((m, i) => {
    const step = i === 0 ? 0 : m - s[i - 1]!;
    heading += kappa[i]! * step;
    x += Math.cos(heading) * step;
    y += Math.sin(heading) * step;
    lat.push(10 + y / 110600);
    lon.push(20 + x / 109600);
  });
  return {
    s_m: s,
    t_s: s.map((m) => m / 25),
    lat,
    lon,
    speed_ms: s.map(() => 25.96),
    curvature_1_m: kappa.map((k, i) => k + 2e-5 * Math.sin(i)),
    curvature_sd_1_m: s.map(() => 2e-5),
    curvature_fit_1_m: kappa,
    cant_deficiency_mm: kappa.map((k) => (k === 0 ? 0 : 170)),
    lateral_track_ms2: kappa.map((k) => (k === 0 ? 0 : 1.11)),
    lateral_track_sd_ms2: s.map(() => 0.02),
    utilisation: kappa.map((k) => (k === 0 ? 0.1 : 1.31)),
  };
}
