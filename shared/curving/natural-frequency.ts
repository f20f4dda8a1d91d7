import { STANDARD_GRAVITY_MPS2 } from '../units.ts';

/**
 * Undamped natural frequency from stiffness and mass (or rotational stiffness and inertia): sqrt(k/m)/(2 pi), Hz.
 * Common practice, no source.
 */
export function naturalFrequencyHz(stiffness: number, mass: number): number {
  return Math.sqrt(stiffness / mass) / (2 * Math.PI);
}

/** Natural frequency from the static deflection under own weight: sqrt(g/d)/(2 pi), Hz. Common practice, no source. */
export function naturalFrequencyFromDeflectionHz(deflectionM: number): number {
  return Math.sqrt(STANDARD_GRAVITY_MPS2 / deflectionM) / (2 * Math.PI);
}

/** Stiffness of springs side by side: their sum. Common practice, no source. */
export function springsInParallel(stiffnesses: readonly number[]): number {
  return stiffnesses.reduce((sum, k) => sum + k, 0);
}

/** Stiffness of springs end to end: reciprocal of the sum of reciprocals. Common practice, no source. */
export function springsInSeries(stiffnesses: readonly number[]): number {
  return 1 / stiffnesses.reduce((sum, k) => sum + 1 / k, 0);
}
