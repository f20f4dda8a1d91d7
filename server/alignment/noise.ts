import type { LogQuality, NoiseModel } from '../../shared/model/motion.ts';

/** Noise of normal points as the whitening filters need it: variances per axis. */
export interface PointNoise {
  /** White variance of the position of one fix, m^2; multiplied by the point's share. */
  readonly positionWhite: number;
  /** Stationary variance of the wander, m^2, and its correlation time, s. */
  readonly wander: number;
  readonly wanderTimeS: number;
  /** White variance of v * course of one fix, (m/s)^2; multiplied by the point's share. */
  readonly courseWhite: number;
  /** White variance that averaging the correlated Doppler error over a bin adds or takes away, (m/s)^2. */
  readonly courseWhiteOfBin: number;
  /** Stationary variance of the correlated Doppler error of a point, (m/s)^2, and its correlation time, s. */
  readonly courseSlow: number;
  readonly dopplerTimeS: number;
}

/** Parameters that are estimated: logarithms of sigma white m, diffusion m^2/s, Doppler white and slow m/s, Doppler time s. */
export type NoiseParameters = readonly [
  white: number,
  diffusion: number,
  dopplerWhite: number,
  dopplerSlow: number,
  dopplerTime: number,
];

/** Within its correlation time only the diffusion of the wander shows, so the time is held. */
const WANDER_TIME_S = 120;

export function parametersOf({ noise }: LogQuality): NoiseParameters {
  const diffusion = (2 * noise.sigmaWanderM ** 2) / Math.max(1, noise.wanderTimeS);
  return [
    Math.log(Math.max(0.02, noise.sigmaWhiteM)),
    Math.log(Math.max(1e-4, diffusion)),
    Math.log(Math.max(0.01, noise.sigmaDopplerWhiteMps || 0.05)),
    Math.log(Math.max(0.01, noise.sigmaDopplerSlowMps || 0.04)),
    Math.log(Math.min(5, Math.max(0.2, noise.dopplerTimeS || 1))),
  ];
}

/**
 * Noise of points averaged over `binS` from the noise of single fixes.
 *
 * A Gauss-Markov error of variance s^2 and time tau averaged over T has, at a lag of k bins, the covariance
 * s^2 (tau/T)^2 (1 - e^{-T/tau})^2 e^{-(k-1)T/tau}: that of a Gauss-Markov error of variance
 * s^2 (tau/T)^2 (1 - r)^2 / r, r = e^{-T/tau}; the rest of the averaged variance 2 (tau/T)(1 - (tau/T)(1 - r)) s^2 is white.
 */
export function pointNoise(p: NoiseParameters, binS: number): PointNoise {
  const wanderTimeS = WANDER_TIME_S;
  const slow = Math.exp(2 * p[3]);
  const tau = Math.exp(p[4]);
  let courseSlow = slow;
  let ofBin = 0;
  if (binS > 0) {
    const x = tau / binS;
    const r = Math.exp(-1 / x);
    courseSlow = (slow * x * x * (1 - r) ** 2) / r;
    ofBin = 2 * x * (1 - x * (1 - r)) * slow - courseSlow;
  }
  return {
    positionWhite: Math.exp(2 * p[0]),
    wander: (Math.exp(p[1]) * wanderTimeS) / 2,
    wanderTimeS,
    courseWhite: Math.exp(2 * p[2]),
    courseWhiteOfBin: ofBin,
    courseSlow,
    dopplerTimeS: tau,
  };
}

/** The noise model shown to the user, after the parametric fits have refined it. */
export function refinedModel(before: NoiseModel, p: NoiseParameters, hasCourse: boolean): NoiseModel {
  return {
    ...before,
    sigmaWhiteM: Math.exp(p[0]),
    sigmaWanderM: Math.sqrt((Math.exp(p[1]) * WANDER_TIME_S) / 2),
    wanderTimeS: WANDER_TIME_S,
    ...(hasCourse
      ? { sigmaDopplerWhiteMps: Math.exp(p[2]), sigmaDopplerSlowMps: Math.exp(p[3]), dopplerTimeS: Math.exp(p[4]) }
      : {}),
  };
}
