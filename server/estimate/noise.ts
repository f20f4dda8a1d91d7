/** Autocorrelation of a Gauss-Markov error between instants dt apart. */
function autocorrelation(dtS: number, timeS: number): number {
  return Math.exp(-dtS / timeS);
}

/**
 * Variance that white errors would need in order to say as little over a long stretch as white plus Gauss-Markov errors do:
 * sigma_w^2 + sigma_s^2 (1 + rho) / (1 - rho). Valid for stretches much longer than the correlation time.
 */
export function effectiveVariance(white: number, slow: number, intervalS: number, timeS: number): number {
  const rho = autocorrelation(intervalS, timeS);
  return white * white + (slow * slow * (1 + rho)) / (1 - rho);
}

/** Sd of a Gauss-Markov error whose diffusion (m^2/s) within its correlation time is given: D = 2 sigma^2 / tau. */
export function wanderSd(diffusion: number, timeS: number): number {
  return Math.sqrt((diffusion * timeS) / 2);
}

/**
 * Variance of the curvature of an isolated arc of length L observed by n equally spaced positions (bound of Cramer and Rao):
 * white part 720 s^2 (n - 1)^3 / (L^4 (n - 2) n (n + 1)(n + 2)), wandering part 12 (D / v) / L^3.
 */
export function positionCurvatureVariance(
  whiteM: number,
  diffusion: number,
  lengthM: number,
  speedMps: number,
  intervalS: number,
): { readonly white: number; readonly wander: number } {
  const n = Math.max(3, 1 + lengthM / (speedMps * intervalS));
  const white = (720 * whiteM ** 2 * (n - 1) ** 3) / (lengthM ** 4 * (n - 2) * n * (n + 1) * (n + 2));
  return { white, wander: (12 * (diffusion / speedMps)) / lengthM ** 3 };
}

/** Variance of the curvature of an arc from n courses of effective variance sigma^2 (m/s)^2: 12 sigma^2 / (v^2 n L^2). */
export function courseCurvatureVariance(
  effectiveVarianceMps2: number,
  lengthM: number,
  speedMps: number,
  intervalS: number,
): number {
  const n = Math.max(2, 1 + lengthM / (speedMps * intervalS));
  return (12 * effectiveVarianceMps2) / (speedMps ** 2 * n * lengthM ** 2);
}
