import type { Profile } from '../model/motion.ts';
import type { RunPassages } from '../model/passage.ts';
import type { CriterionId } from '../schema/limit-set.ts';
import type { Setup } from '../schema/setup.ts';
import { mpsToKmh, radToDeg, STANDARD_GRAVITY_MPS2 } from '../units.ts';
import { bodyAccelerationMps2 } from '../curving/body-acceleration.ts';
import { ballBankRad } from '../curving/ball-bank.ts';
import { sideFriction } from '../curving/side-friction.ts';
import { limitFor } from '../limits/lookup.ts';
import { assessCurve } from './assess-curve.ts';
import { curveCases } from './cases.ts';
import type { CurveCase } from './lateral-frame.ts';
import { effectiveTransitionM } from '../curving/abrupt-change.ts';
import { cantBaseMm } from './curve-facts.ts';
import { stationFrom } from './stations.ts';

/** The columns of a Profile that an assessment reads; any array type, NaN = unknown. */
export type ProfileInput = Pick<Profile, 'count' | 'spacingM'> &
  Record<
    | 'chainageM'
    | 'speedMps'
    | 'speedSdMps'
    | 'accelerationMps2'
    | 'curvaturePerM'
    | 'curvatureSdPerM'
    | 'speedCurvatureCorrelation'
    | 'fittedCurvaturePerM',
    ArrayLike<number>
  >;

/** Assessment along the run; columns of the profile's count; NaN = unknown or not applicable. */
export interface ProfileAssessment {
  readonly count: number;
  /** Cant in favour of the curve, mm (road: superelevation, percent); 0 on straights; NaN where unknown. */
  readonly cantMm: Float32Array;
  /**
   * Track-plane lateral acceleration by the fitted alignment; positive pushes to the right, as curvature to the left
   * does.
   */
  readonly lateralTrackMps2: Float32Array;
  readonly lateralTrackSdMps2: Float32Array;
  readonly lateralBodyMps2: Float32Array;
  /** Lateral jerk in the track plane, signed like the acceleration. */
  readonly jerkMps3: Float32Array;
  /** Positive deficiency, negative excess; magnitude against the fitted curvature. NaN on roads. */
  readonly cantDeficiencyMm: Float32Array;
  readonly equilibriumCantMm: Float32Array;
  /** Largest value over limit of all criteria that apply here; NaN where none does. */
  readonly utilisation: Float32Array;
  /** Speed complying with all criteria of the curve here at the chosen confidence, km/h; NaN off curves. */
  readonly limitSpeedKmh: Float32Array;
}

/** Criteria evaluated station by station; all others hold for a curve or its ends as a whole. */
const POINTWISE = new Set<CriterionId>([
  'cant_deficiency',
  'lateral_track',
  'lateral_body',
  'side_friction',
  'ball_bank',
  'speed',
]);
/** Criteria that belong to the ends of a curve rather than to its arc. */
const OF_ENDS = new Set<CriterionId>([
  'deficiency_rate',
  'abrupt_deficiency_change',
  'jerk',
  'cant_rate',
  'cant_gradient',
  'roll_rate',
  'pct_seated',
  'pct_standing',
  'entry_deceleration',
]);

/**
 * Assessment along a run at the stations of its profile: the columns that bands, map and the profile export show.
 * Figures come from
 * the fitted alignment and the smoothed speed, as the verdicts do; standard deviations from the smoother.
 */
export function assessProfile(profile: ProfileInput, passages: RunPassages, setup: Setup): ProfileAssessment {
  const { count, chainageM, speedMps } = profile;
  const baseMm = cantBaseMm(setup);
  const out = {
    count,
    cantMm: new Float32Array(count),
    lateralTrackMps2: new Float32Array(count),
    lateralTrackSdMps2: new Float32Array(count),
    lateralBodyMps2: new Float32Array(count).fill(NaN),
    jerkMps3: new Float32Array(count).fill(NaN),
    cantDeficiencyMm: new Float32Array(count).fill(NaN),
    equilibriumCantMm: new Float32Array(count).fill(NaN),
    utilisation: new Float32Array(count).fill(NaN),
    limitSpeedKmh: new Float32Array(count).fill(NaN),
  };
  const { cases } = curveCases(passages, setup);
  const ratio = new Float64Array(count);
  for (const curveCase of cases) layCant(curveCase, chainageM, ratio, out.cantMm, setup.mode, baseMm);

  const s = setup.vehicle.rollCoefficient;
  const share = s === null ? NaN : bodyAccelerationMps2(1, s, setup.vehicle.tiltCompensation);
  for (let i = 0; i < count; i++) {
    const v = speedMps[i]!;
    const kappa = profile.fittedCurvaturePerM[i]!;
    const horizontal = v * v * Math.abs(kappa);
    const sin = ratio[i]!;
    const plane = horizontal * Math.sqrt(1 - sin * sin) - STANDARD_GRAVITY_MPS2 * sin;
    const side = kappa < 0 ? -1 : 1;
    out.lateralTrackMps2[i] = side * plane;
    out.lateralBodyMps2[i] = side * plane * share;
    const sv = profile.speedSdMps[i]!;
    const sk = profile.curvatureSdPerM[i]!;
    const measured = Math.abs(profile.curvaturePerM[i]!);
    const bySpeed = 2 * v * measured * sv;
    const byCurvature = v * v * sk;
    // Errors of speed and curvature are correlated; the correlation is of the signed curvature.
    const rho = profile.speedCurvatureCorrelation[i]! * (profile.curvaturePerM[i]! < 0 ? -1 : 1);
    out.lateralTrackSdMps2[i] = Math.sqrt(
      Math.max(bySpeed * bySpeed + byCurvature * byCurvature + 2 * rho * bySpeed * byCurvature, 0),
    );
    if (setup.mode === 'rail') {
      const balance = (baseMm * horizontal) / STANDARD_GRAVITY_MPS2;
      out.equilibriumCantMm[i] = balance;
      out.cantDeficiencyMm[i] = balance - baseMm * sin;
    }
  }
  layJerk(out.lateralTrackMps2, chainageM, speedMps, setup, out.jerkMps3);
  layUtilisation(profile, passages, cases, setup, ratio, out);
  return out;
}

/**
 * Cant along a curve: full on the arc, in proportion to curvature on its ends; NaN where unknown (ratio then stays
 * zero).
 */
function layCant(
  curveCase: CurveCase,
  chainageM: ArrayLike<number>,
  ratio: Float64Array,
  cantOut: Float32Array,
  mode: Setup['mode'],
  baseMm: number,
): void {
  const { curve } = curveCase.facts.passage;
  const { cantRatio, beyondRatio } = curveCase;
  for (let i = stationFrom(chainageM, curve.startM); i < chainageM.length && chainageM[i]! <= curve.endM; i++) {
    const at = chainageM[i]!;
    let sin = cantRatio;
    if (at < curve.arcStartM)
      sin += ((beyondRatio[0] - cantRatio) * (curve.arcStartM - at)) / (curve.arcStartM - curve.startM);
    else if (at > curve.arcEndM)
      sin += ((beyondRatio[1] - cantRatio) * (at - curve.arcEndM)) / (curve.endM - curve.arcEndM);
    ratio[i] = sin;
    cantOut[i] = curveCase.isBound ? NaN : mode === 'rail' ? baseMm * sin : 100 * Math.tan(Math.asin(sin));
  }
}

/** Jerk as the slope of the lateral acceleration over the vehicle's virtual length about each station, times speed. */
function layJerk(
  lateral: Float32Array,
  chainageM: ArrayLike<number>,
  speedMps: ArrayLike<number>,
  setup: Setup,
  out: Float32Array,
): void {
  const n = lateral.length;
  if (n < 2) return;
  const spacing = (chainageM[n - 1]! - chainageM[0]!) / (n - 1);
  const window = effectiveTransitionM(spacing, setup.vehicle.wheelbaseM ?? 0);
  const half = Math.max(1, Math.round(window / spacing / 2));
  for (let i = 0; i < n; i++) {
    const a = Math.max(i - half, 0);
    const b = Math.min(i + half, n - 1);
    out[i] = ((lateral[b]! - lateral[a]!) / (chainageM[b]! - chainageM[a]!)) * speedMps[i]!;
  }
}

function layUtilisation(
  profile: ProfileInput,
  passages: RunPassages,
  cases: readonly CurveCase[],
  setup: Setup,
  ratio: Float64Array,
  out: ProfileAssessment,
): void {
  const { chainageM } = profile;
  const raise = (fromM: number, toM: number, utilisation: number): void => {
    let i = stationFrom(chainageM, fromM);
    // A range between two stations still marks the nearer one.
    const end = Math.max(stationFrom(chainageM, toM + 1e-6), Math.min(i + 1, chainageM.length));
    for (; i < end; i++) {
      const now = out.utilisation[i]!;
      if (!(now >= utilisation)) out.utilisation[i] = utilisation;
    }
  };
  for (let i = 0; i < out.count; i++) pointwise(profile, i, setup, ratio[i]!, out);
  for (const curveCase of cases) {
    const { curve } = curveCase.facts.passage;
    const { row, criteria } = assessCurve(passages.run, curveCase, setup, false);
    for (const { criterion, utilisation } of criteria) {
      if (utilisation === null) continue;
      if (OF_ENDS.has(criterion)) {
        raise(curve.startM, curve.arcStartM, utilisation);
        raise(curve.arcEndM, curve.endM, utilisation);
      } else {
        // Pointwise figures too: the curve's own peak may fall between stations, and map and table must agree.
        raise(curve.arcStartM, curve.arcEndM, utilisation);
      }
    }
    if (row.complying_speed_kmh !== null) {
      for (let i = stationFrom(chainageM, curve.startM); i < out.count && chainageM[i]! <= curve.endM; i++) {
        out.limitSpeedKmh[i] = row.complying_speed_kmh;
      }
    }
  }
}

/** Utilisation of the criteria that hold at a point. */
function pointwise(profile: ProfileInput, i: number, setup: Setup, sin: number, out: ProfileAssessment): void {
  const v = profile.speedMps[i]!;
  const kappa = Math.abs(profile.fittedCurvaturePerM[i]!);
  if (Number.isNaN(v) || Number.isNaN(kappa)) return;
  const radiusM = kappa > 0 ? 1 / kappa : Infinity;
  let most = NaN;
  for (const criterion of POINTWISE) {
    const applied = limitFor(setup.limits, criterion, setup.tier, mpsToKmh(v), radiusM);
    if (applied === null) continue;
    const figure = figureAt(criterion, v, kappa, sin, i, setup, out);
    const utilisation = figure / applied.value;
    if (!(most >= utilisation) && !Number.isNaN(utilisation)) most = Math.max(utilisation, 0);
  }
  out.utilisation[i] = most;
}

function figureAt(
  criterion: CriterionId,
  v: number,
  kappa: number,
  sin: number,
  i: number,
  setup: Setup,
  out: ProfileAssessment,
): number {
  const superelevation = Math.tan(Math.asin(sin));
  switch (criterion) {
    case 'cant_deficiency':
      return out.cantDeficiencyMm[i]!;
    case 'lateral_track':
      return Math.abs(out.lateralTrackMps2[i]!);
    case 'lateral_body':
      return Math.abs(out.lateralBodyMps2[i]!);
    case 'side_friction':
      return setup.mode === 'road' ? Math.abs(sideFriction(v, kappa, superelevation)) : NaN;
    case 'ball_bank':
      return setup.mode === 'road'
        ? radToDeg(Math.abs(ballBankRad(v, kappa, superelevation, setup.vehicle.rollCoefficient ?? NaN)))
        : NaN;
    case 'speed':
      return mpsToKmh(v);
    default:
      return NaN;
  }
}
