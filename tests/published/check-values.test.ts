import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { bodyAccelerationMps2, quasiStaticRollRad } from '../../shared/curving/body-acceleration.ts';
import {
  cantDeficiencyMm,
  deficiencyToAccelerationMps2,
  speedForDeficiencyMps,
} from '../../shared/curving/cant-deficiency.ts';
import { cantGradientMmPerM } from '../../shared/curving/cant-gradient.ts';
import { arcElements } from '../../shared/curving/circular-arc.ts';
import { clothoid } from '../../shared/curving/clothoid.ts';
import { comfortCurveTransitionPct, comfortDiscreteEventPct } from '../../shared/curving/comfort-index.ts';
import {
  arcDegreeFromRadius,
  chordDegreeFromRadius,
  radiusFromArcDegreeM,
  radiusFromChordDegreeM,
} from '../../shared/curving/degree-of-curve.ts';
import { equilibriumCantMm } from '../../shared/curving/equilibrium-cant.ts';
import { motionSicknessWeight, steadyMotionDose } from '../../shared/curving/motion-sickness.ts';
import { naturalFrequencyHz } from '../../shared/curving/natural-frequency.ts';
import { jerkFromDeficiencyRateMps3, rateOfChange } from '../../shared/curving/rate-of-change.ts';
import { driveRatioOfPeak, harmonicAmplification, stepOvershoot } from '../../shared/curving/roll-oscillator.ts';
import { designRadius } from '../../shared/curving/side-friction.ts';
import { usSpiralLengthFt } from '../../shared/curving/spiral-length.ts';
import { staticStabilityFactor } from '../../shared/curving/static-stability.ts';
import { trackPlaneAccelerationMps2 } from '../../shared/curving/track-plane-acceleration.ts';
import { usCurvingSpeedMph } from '../../shared/curving/us-curving-speed.ts';
import { versineM } from '../../shared/curving/versine.ts';
import { verticalAccelerationMps2, verticalRadiusM } from '../../shared/curving/vertical-curve.ts';
import { convert, kmhToMps, METRES_PER_FOOT as FT, radToDeg } from '../../shared/units.ts';
import { hasCheckValues, SHARED, SKIP_REASON } from '../support/shared.ts';

interface Row {
  id: string;
  inputs: Record<string, number>;
  expected: number | Record<string, number>;
  tolerance: number | Record<string, number>;
  source: string;
  status: string;
}

/** The catalogue's figures by our kernels; the rows were worked with g = 9.81 unless they name another. */
const G = 9.81;
type Compute = (inputs: Record<string, number>) => number | Record<string, number>;

const BY_PATTERN: readonly [RegExp, Compute][] = [
  [/^rail\.k\./, (i) => equilibriumCantMm(1 / 3.6, 1, i.base_mm!, i.g ?? 9.80665)],
  [/^rail\.mm_per_ms2$/, (i) => 1 / deficiencyToAccelerationMps2(1, i.base_mm!, G)],
  [
    /^rail\.defic\./,
    (i) => {
      const v = kmhToMps(i.V_kmh!);
      const k = 1 / i.R_m!;
      const I = cantDeficiencyMm(v, k, i.D_mm!, i.base_mm!, i.g);
      return {
        D_eq_mm: equilibriumCantMm(v, k, i.base_mm!, i.g),
        D_eq_11_8_mm: equilibriumCantMm(v, k, 1500, 1500 / (11.8 * 12.96)),
        I_mm: I,
        a_q: deficiencyToAccelerationMps2(I, i.base_mm!, i.g),
        a_exact: trackPlaneAccelerationMps2(v, k, i.D_mm!, i.base_mm!, i.g),
        a_horizontal: trackPlaneAccelerationMps2(v, k, 0, i.base_mm!, i.g),
      };
    },
  ],
  [/^us\.21357\./, (i) => usCurvingSpeedMph(i.D_deg!, i.Ea_in!, i.Eu_in!)],
  [/^arema\.module/, (i) => usCurvingSpeedMph(i.D!, i.Ea!, i.Eu!)],
  [
    /^arema\.spiral/,
    (i) => {
      const normal = usSpiralLengthFt(i.Ea!, i.Eu!, i.V_mph!);
      const constrained = usSpiralLengthFt(i.Ea!, i.Eu!, i.V_mph!, true);
      return { comfort: normal.comfort, restricted: constrained.comfort, twist: normal.twist, governs: normal.governs };
    },
  ],
  [/^deg\.arc\.1$/, (i) => radiusFromArcDegreeM(i.D!) / FT],
  [/^deg\.chord\.1$/, (i) => radiusFromChordDegreeM(i.D!) / FT],
  [
    /^deg\.both\./,
    (i) => ({
      arc_ft: radiusFromArcDegreeM(i.D!) / FT,
      chord_ft: radiusFromChordDegreeM(i.D!) / FT,
      arc_m: radiusFromArcDegreeM(i.D!),
      chord_m: radiusFromChordDegreeM(i.D!),
    }),
  ],
  [/^deg\.fromR\./, (i) => ({ arc: arcDegreeFromRadius(i.R_m!), chord: chordDegreeFromRadius(i.R_m!) })],
  [
    /^versine\.\d/,
    (i) =>
      'c_m' in i
        ? { exact_mm: 1000 * versineM(i.c_m, i.R_m!) }
        : { chord_def_in: versineM(62 * FT, radiusFromChordDegreeM(i.D!)) / 0.0254 },
  ],
  [
    /^rail\.rates\./,
    (i) => {
      const v = kmhToMps(i.V_kmh!);
      const rate = rateOfChange(i.I_mm!, v, i.L_m!);
      return {
        dDdt: rateOfChange(i.D_mm!, v, i.L_m!),
        dIdt: rate,
        dDds: cantGradientMmPerM(i.D_mm!, i.L_m!),
        jerk: jerkFromDeficiencyRateMps3(rate, 1500, G),
      };
    },
  ],
  [/^rail\.rv\./, (i) => verticalRadiusM(1 / 3.6, i.a_v!)],
  [/^rail\.av$/, (i) => verticalAccelerationMps2(kmhToMps(i.V_kmh!), 1 / i.Rv_m!)],
  [/^rail\.aq\./, (i) => deficiencyToAccelerationMps2(i.I_mm!, i.base_mm!, G)],
  [/^de\.vmax/, (i) => 3.6 * speedForDeficiencyMps(i.uf!, 1 / i.r!, i.u!, 1500, 1500 / (11.8 * 12.96))],
  [
    /^pct\.\d/,
    (i) => ({
      standing: comfortCurveTransitionPct(i.y!, i.jerk!, i.w_deg_s!, 'standing'),
      seated: comfortCurveTransitionPct(i.y!, i.jerk!, i.w_deg_s!, 'seated'),
    }),
  ],
  [
    /^pde\./,
    (i) => ({
      standing: comfortDiscreteEventPct(i.ypp!, i.ymean!, 'standing'),
      seated: comfortDiscreteEventPct(i.ypp!, i.ymean!, 'seated'),
    }),
  ],
  [/^iso\.Wf\.-?\d/, (i) => motionSicknessWeight(i.f_hz!)],
  [/^msdv\.\d/, (i) => ({ MSDV: steadyMotionDose(i.aw!, i.T_s!) })],
  [/^road\.rmin\.m/, (i) => designRadius(i.V_kmh!, i.e!, i.f!, 'metric')],
  [/^road\.rmin\.us/, (i) => designRadius(i.V_mph!, i.e!, i.f!, 'us')],
  [/^road\.era/, (i) => designRadius(i.V_kmh!, i.e!, i.f!, 'metric')],
  [/^ssf\./, (i) => staticStabilityFactor(i.T!, i.h!)],
  [
    /^sdof\.0/,
    (i) => {
      const z = i.zeta!;
      const r = driveRatioOfPeak(z);
      return {
        overshoot: stepOvershoot(z),
        Qpeak: harmonicAmplification(r, z),
        r,
        Q_at_resonance: harmonicAmplification(1, z),
      };
    },
  ],
  [/^sdof\.fn$/, (i) => naturalFrequencyHz(i.K!, i.I!)],
  [
    /^roll\./,
    (i) => ({ a_pass: bodyAccelerationMps2(i.a_q!, i.s!), phi_deg: radToDeg(quasiStaticRollRad(i.a_q!, i.s!, G)) }),
  ],
  [/^joint\.(39|33)/, (i) => convert(i.mph!, 'mph', 'm/s') / (i.L_ft! * FT)],
  [
    /^clothoid\./,
    (i) => {
      const c = clothoid(i.L!, i.R!);
      return {
        A: c.parameterM,
        tau_rad: c.angleRad,
        tau_deg: radToDeg(c.angleRad),
        x: c.xM,
        y: c.yM,
        dR: c.shiftM,
        xM: c.centreXM,
      };
    },
  ],
  [
    /^arc\./,
    (i) => {
      const e = arcElements(i.R!, (i.delta_deg! * Math.PI) / 180);
      return { arc: e.arcM, T: e.tangentM, chord: e.chordM, M: e.versineM, E: e.externalM };
    },
  ],
  [/^track\.alat/, (i) => trackPlaneAccelerationMps2(i.v!, 1 / i.r!, 0, 1500)],
  [/^knots\.22/, (i) => ({ ms: convert(i.kn!, 'kn', 'm/s'), kmh: convert(i.kn!, 'kn', 'km/h') })],
  [/^mph$/, (i) => convert(i.mph!, 'mph', 'm/s')],
];

const rows: Row[] = hasCheckValues
  ? (JSON.parse(readFileSync(`${SHARED}check-values/check-values.json`, 'utf8')) as Row[])
  : [];
const covered = rows.flatMap((row) => {
  const compute = BY_PATTERN.find(([pattern]) => pattern.test(row.id))?.[1];
  return compute === undefined ? [] : [{ row, compute }];
});

describe.skipIf(!hasCheckValues)(
  `catalogue of check values${hasCheckValues ? '' : ` (skipped: ${SKIP_REASON})`}`,
  () => {
    it('covers at least 150 rows', () => {
      expect(covered.length).toBeGreaterThanOrEqual(150);
    });

    it.each(covered.map(({ row, compute }) => ({ ...row, compute })))(
      '$id ($source; $status)',
      ({ inputs, expected, tolerance, compute }) => {
        const ours = compute(inputs);
        const wanted = typeof expected === 'number' ? { value: expected } : expected;
        const got = typeof ours === 'number' ? { value: ours } : ours;
        for (const [key, value] of Object.entries(got)) {
          const within = typeof tolerance === 'number' ? tolerance : tolerance[key]!;
          expect(Math.abs(value - wanted[key]!), key).toBeLessThanOrEqual(Math.max(within, 1e-9 * Math.abs(value)));
        }
      },
    );
  },
);
