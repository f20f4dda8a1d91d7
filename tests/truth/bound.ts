import type { ReceiverErrors } from '../../data/synthetic/receiver.ts';
import type { SimulatedRun, TrueCurve } from '../../data/synthetic/simulate.ts';
import { evaluateGroup, groupCurves, type CurveGroup, type ModelValues } from './local-model.ts';
import { emptyInformation, invertInformation, Whitener, type AxisError, type Information } from './whitening.ts';

/** Cramer-Rao standard deviations for one end of a curve, m. */
export interface EndBound {
  readonly middleSdM: number;
  /** Infinite for an abrupt end: there the length is on the border of what is possible. */
  readonly lengthSdM: number;
  /** Of the tangent point on the straight's side and on the arc's side. */
  readonly outerSdM: number;
  readonly innerSdM: number;
}

/** What no unbiased estimator can do better than on this curve with these fixes. */
export interface CurveBound {
  readonly curve: TrueCurve;
  readonly curvatureSdPerM: number;
  readonly radiusSdM: number;
  readonly speedSdMps: number;
  readonly lateralSdMps2: number;
  readonly entry: EndBound;
  readonly exit: EndBound;
}

/** Speed is taken as one unknown mean over the arc and this long on either side, s. */
const SPEED_MARGIN_S = 2;
const COURSE_FLOOR_MPS = 1.2;

export function positionError(errors: ReceiverErrors, resolutionM: number): AxisError {
  const rounding = resolutionM ** 2 / 12;
  const wander = { sigma: errors.sigmaWanderM, tauS: errors.wanderTimeS };
  if (errors.whiteTimeS > 0) {
    return {
      sigmaWhite: Math.sqrt(Math.max(rounding, 1e-6)),
      slow: [wander, { sigma: errors.sigmaWhiteM, tauS: errors.whiteTimeS }],
    };
  }
  return { sigmaWhite: Math.sqrt(errors.sigmaWhiteM ** 2 + rounding), slow: [wander] };
}

export function dopplerError(errors: ReceiverErrors): AxisError {
  return {
    sigmaWhite: errors.sigmaDopplerWhiteMps,
    slow: [{ sigma: errors.sigmaDopplerSlowMps, tauS: errors.dopplerTimeS }],
  };
}

/** The fixes of one group's window, good ones only. */
export interface WindowFixes {
  readonly count: number;
  readonly timeS: Float64Array;
  readonly chainageM: Float64Array;
  readonly speedMps: Float64Array;
}

export function windowFixes(sim: SimulatedRun, group: CurveGroup): WindowFixes {
  const { truth, run } = sim;
  const keep: number[] = [];
  for (let i = 0; i < run.fixes.count; i += 1) {
    const s = truth.chainageM[i]!;
    if (s >= group.fromM && s <= group.toM && truth.spoiled[i] === 0) keep.push(i);
  }
  return {
    count: keep.length,
    timeS: Float64Array.from(keep, (i) => run.fixes.timeS[i]!),
    chainageM: Float64Array.from(keep, (i) => truth.chainageM[i]!),
    speedMps: Float64Array.from(keep, (i) => truth.speedMps[i]!),
  };
}

/** Readings of a window, for residuals: null when only the information is wanted. */
export interface Readings {
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  /** Heading, NaN where there is none. */
  readonly headingRad: Float64Array | null;
}

/**
 * Information of the fixes of a window about the parameters of its group: lateral positions, and, when the log has
 * Doppler velocity, along-track positions (chainage is then known from elsewhere) and v (course - heading).
 */
export function groupInformation(
  model: ModelValues,
  fixes: WindowFixes,
  size: number,
  errors: { readonly position: AxisError; readonly doppler: AxisError | null },
  readings: Readings | null,
): Information {
  const out = emptyInformation(size);
  const position = new Whitener(errors.position, size);
  const doppler = errors.doppler ? new Whitener(errors.doppler, size) : null;
  const row = new Float64Array(size);
  for (let i = 0; i < fixes.count; i += 1) {
    const theta = model.headingRad[i]!;
    const t = fixes.timeS[i]!;
    const tangent = [Math.cos(theta), Math.sin(theta)] as const;
    const directions = doppler ? [[-tangent[1], tangent[0]] as const, tangent] : [[-tangent[1], tangent[0]] as const];
    for (const [hx, hy] of directions) {
      for (let p = 0; p < size; p += 1) row[p] = hx * model.dx[i * size + p]! + hy * model.dy[i * size + p]!;
      const residual = readings ? hx * (readings.xM[i]! - model.xM[i]!) + hy * (readings.yM[i]! - model.yM[i]!) : 0;
      position.add(t, hx, hy, row, residual, out);
    }
    const v = fixes.speedMps[i]!;
    if (!doppler || v < COURSE_FLOOR_MPS) continue;
    for (let p = 0; p < size; p += 1) row[p] = v * model.dHeading[i * size + p]!;
    const seen = readings?.headingRad?.[i] ?? theta;
    if (Number.isNaN(seen)) continue;
    doppler.add(t, -tangent[1], tangent[0], row, v * (seen - theta), out);
  }
  return out;
}

/** Without along-track readings a shift of the window along itself is the chainage's own: known to 1 mm. */
export function holdChainage(information: Information): void {
  information.matrix[0]! += 1e6;
}

/** Variance of the mean speed over the passage of an arc, from Doppler speeds and along-track positions. */
function speedVariance(sim: SimulatedRun, curve: TrueCurve, position: AxisError, doppler: AxisError | null): number {
  const { truth, run } = sim;
  const fromS = truth.travel.timeAt(curve.arcStartM) - SPEED_MARGIN_S;
  const toS = truth.travel.timeAt(curve.arcEndM) + SPEED_MARGIN_S;
  const out = emptyInformation(2);
  const along = new Whitener(position, 2);
  const speed = doppler ? new Whitener(doppler, 2) : null;
  for (let i = 0; i < run.fixes.count; i += 1) {
    const t = run.fixes.timeS[i]!;
    if (t < fromS || t > toS || truth.spoiled[i] !== 0) continue;
    along.add(t, 1, 0, [1, t - fromS], 0, out);
    speed?.add(t, 1, 0, [0, 1], 0, out);
  }
  return invertInformation(out.matrix, 2)?.[3] ?? Number.POSITIVE_INFINITY;
}

/**
 * Cramer-Rao bounds of every curve of a simulated run, with the run's own fixes and its true error model.
 *
 * Pose, all levels, middles and squared lengths of the group are unknown. The bound of curvature holds for given
 * chainage, to which the error of the speed that measures the chainage is added: kappa goes as 1/scale, speed as
 * scale, so v^2 kappa as scale: the speed enters each of them once.
 */
export function curveBounds(sim: SimulatedRun): CurveBound[] {
  const { truth, run } = sim;
  const position = positionError(truth.errors, run.resolution.positionM);
  const doppler = run.fixes.courseRad ? dopplerError(truth.errors) : null;
  return groupCurves(truth.curves, truth.line.lengthM).flatMap((group) => {
    const fixes = windowFixes(sim, group);
    const size = group.parameters.length;
    const model = evaluateGroup(group, group.parameters, fixes.chainageM);
    const information = groupInformation(model, fixes, size, { position, doppler }, null);
    if (!doppler) holdChainage(information);
    const covariance = invertInformation(information.matrix, size);
    return group.curves.map((curve, i): CurveBound => {
      const own = group.curveParameters[i]!;
      const get = (a: number, b: number) => covariance?.[a * size + b] ?? Number.POSITIVE_INFINITY;
      const kappa = Math.abs(curve.curvaturePerM);
      const relative = Math.sqrt(get(own.level, own.level)) / kappa;
      const speedSdMps = Math.sqrt(speedVariance(sim, curve, position, doppler));
      const scale = speedSdMps / curve.arcSpeedMps;
      const total = Math.hypot(relative, scale);
      const end = (at: { middle: number; squaredLength: number }, lengthM: number, outward: 1 | -1): EndBound => {
        const variance = get(at.middle, at.middle);
        if (lengthM === 0) {
          const sd = Math.sqrt(variance);
          return { middleSdM: sd, lengthSdM: Number.POSITIVE_INFINITY, outerSdM: sd, innerSdM: sd };
        }
        // dL = du / (2 L); tangent points are middle -+ L / 2.
        const lengthVariance = get(at.squaredLength, at.squaredLength) / (4 * lengthM ** 2);
        const cross = (outward * get(at.middle, at.squaredLength)) / (2 * lengthM);
        return {
          middleSdM: Math.sqrt(variance),
          lengthSdM: Math.sqrt(lengthVariance),
          outerSdM: Math.sqrt(Math.max(0, variance + lengthVariance / 4 + cross)),
          innerSdM: Math.sqrt(Math.max(0, variance + lengthVariance / 4 - cross)),
        };
      };
      return {
        curve,
        curvatureSdPerM: total * kappa,
        radiusSdM: total / kappa,
        speedSdMps,
        lateralSdMps2: total * curve.arcSpeedMps ** 2 * kappa,
        entry: end(own.entry, curve.entry.lengthM, -1),
        exit: end(own.exit, curve.exit.lengthM, 1),
      };
    });
  });
}
