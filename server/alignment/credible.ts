import type { Curve } from '../../shared/model/alignment.ts';
import type { NormalPoints } from './points.ts';
import { pointFrom } from './points.ts';

/** No wheeled passenger vehicle is pushed sideways harder than this, m/s^2: a fit that says so has followed an error. */
const GREATEST_LATERAL_MPS2 = 14;
/**
 * A curve that stands out by its turn alone, its curvature not told from straight, is the smear of a leap of position when it
 * would push harder than this, m/s^2: near what tyres give on a dry road (common practice, no source).
 */
const GREATEST_BY_TURN_MPS2 = 7;
const TOLD_BY_CURVATURE_SIGMA = 3.5;
/** No vehicle turns about less than this, m. */
const LEAST_RADIUS_M = 3.5;
/** A turn of more than this is an error of the heading across a stop or a gap, rad. */
const GREATEST_TURN_RAD = 5.6;
/** Slower than this a receiver's errors move faster than the vehicle, m/s. */
const CREEPING_MPS = 1;

/**
 * Why a fitted curve cannot be one, or null when it can: seen by fewer than two fixes, turned about or pushed harder than any
 * vehicle, a whole turn, or passed at a creep.
 */
export function whyNotCredible(curve: Curve, points: NormalPoints): string | null {
  const kappa = Math.abs(curve.curvaturePerM.value);
  if (curve.speedMps.value < CREEPING_MPS) return 'passed at a creep';
  if (1 / kappa < LEAST_RADIUS_M) return 'sharper than any vehicle turns';
  if (curve.speedMps.value ** 2 * kappa > GREATEST_LATERAL_MPS2)
    return 'sharper than any vehicle could pass at its speed';
  const told = kappa >= TOLD_BY_CURVATURE_SIGMA * curve.curvaturePerM.sd;
  if (!told && curve.speedMps.value ** 2 * kappa > GREATEST_BY_TURN_MPS2) return 'at a leap of the positions';
  if (curve.deflectionRad.value > GREATEST_TURN_RAD) return 'a whole turn on the spot';
  return fixesWithin(points, curve.startM, curve.endM) < 2 ? 'without a fix in it' : null;
}

/** Fixes with a position or a course in a range of chainage. */
function fixesWithin(points: NormalPoints, fromM: number, toM: number): number {
  let count = 0;
  for (let i = pointFrom(points, fromM); i < points.count && points.chainageM[i]! <= toM; i++) {
    if (points.positionShare[i]! > 0 || points.courseShare[i]! > 0) count++;
  }
  return count;
}
