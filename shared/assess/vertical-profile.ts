import type { Passage } from '../model/passage.ts';
import { timeAlongS } from './running-time.ts';

/**
 * Wander of satellite heights: standard deviation, m, and correlation time, s (from memory; half as much again as
 * across, open sky).
 */
const WANDER_SD_M = 5;
const WANDER_TIME_S = 100;

/**
 * Vertical curvature of a passage, second derivative of height by chainage, 1/m, with its standard deviation: a
 * parabola by
 * least squares through the elevations. The deviation adds the residuals' share and that of the slow wander of
 * satellite
 * heights, which bends a short passage without showing in the residuals.
 * Null below 8 elevations or 60 m, where a parabola says nothing.
 */
export function verticalCurvature(passage: Passage): { curvaturePerM: number; sdPerM: number } | null {
  const s: number[] = [];
  const z: number[] = [];
  passage.elevationM.forEach((height, i) => {
    if (height === null || !Number.isFinite(height)) return;
    s.push(passage.chainageM[i]!);
    z.push(height);
  });
  const n = s.length;
  if (n < 8) return null;
  const length = s[n - 1]! - s[0]!;
  if (length < 60) return null;
  const middle = (s[0]! + s[n - 1]!) / 2;
  // Chainage scaled to [-1, 1] keeps the normal equations well conditioned.
  let s0 = 0;
  let s1 = 0;
  let s2 = 0;
  let s3 = 0;
  let s4 = 0;
  let t0 = 0;
  let t1 = 0;
  let t2 = 0;
  for (let i = 0; i < n; i++) {
    const u = (2 * (s[i]! - middle)) / length;
    const uu = u * u;
    s0 += 1;
    s1 += u;
    s2 += uu;
    s3 += uu * u;
    s4 += uu * uu;
    t0 += z[i]!;
    t1 += z[i]! * u;
    t2 += z[i]! * uu;
  }
  const det = s0 * (s2 * s4 - s3 * s3) - s1 * (s1 * s4 - s2 * s3) + s2 * (s1 * s3 - s2 * s2);
  if (!(Math.abs(det) > 1e-9)) return null;
  const c = (s0 * (s2 * t2 - s3 * t1) - s1 * (s1 * t2 - s2 * t1) + t0 * (s1 * s3 - s2 * s2)) / det;
  const b = (s0 * (t1 * s4 - s3 * t2) - t0 * (s1 * s4 - s2 * s3) + s2 * (s1 * t2 - t1 * s2)) / det;
  const a = (t0 - b * s1 - c * s2) / s0;
  let residual = 0;
  for (let i = 0; i < n; i++) {
    const u = (2 * (s[i]! - middle)) / length;
    residual += (z[i]! - a - b * u - c * u * u) ** 2;
  }
  const variance = residual / (n - 3);
  const coefficientVariance = (variance * (s0 * s2 - s1 * s1)) / det;
  const toCurvature = 8 / (length * length);
  // Over a passage the wander is a random walk; the parabola's coefficient of a Brownian path with end-to-end
  // deviation D
  // has deviation 0.5175 D (integral of the squared primitive of the second Legendre polynomial).
  const duration = timeAlongS(passage.chainageM, passage.speedMps);
  const wander = 0.5175 * WANDER_SD_M * Math.sqrt((2 * Math.min(duration, WANDER_TIME_S)) / WANDER_TIME_S);
  return {
    curvaturePerM: c * toCurvature,
    sdPerM: Math.sqrt(Math.max(coefficientVariance, 0) + wander * wander) * toCurvature,
  };
}
