/** A clothoid from a straight to a circular curve; lengths m, angle radians. */
export interface Clothoid {
  /** Parameter A = sqrt(R L), m. */
  readonly parameterM: number;
  /** Angle turned, tau = L / (2 R). */
  readonly angleRad: number;
  /** Coordinates of its end, along and across the straight, m. */
  readonly xM: number;
  readonly yM: number;
  /** Shift of the circular curve from the straight, m. */
  readonly shiftM: number;
  /** Abscissa of the circle's centre, m. */
  readonly centreXM: number;
}

/**
 * Clothoid of length L to radius R: x = integral of cos(u^2/(2 R L)), y of sin, by their power series in tau (converges
 * for every tau; full double precision up to tau of some radians).
 * Source: A^2 = R L, tau = L/(2R), Fresnel series; worked example A 80, R 100 printed in surveying manuals (read).
 */
export function clothoid(lengthM: number, radiusM: number): Clothoid {
  const tau = lengthM / (2 * radiusM);
  let x = 0;
  let y = 0;
  // term_n = tau^n / n!, integrated over s: L tau^n / (n! (2 n + 1)); even n feed x, odd n feed y, with alternating
  // signs.
  let power = 1;
  for (let n = 0; n < 60; n++) {
    const term = (power * lengthM) / (2 * n + 1);
    const sign = n % 4 < 2 ? 1 : -1;
    if (n % 2 === 0) x += sign * term;
    else y += sign * term;
    power *= tau / (n + 1);
    if (power < 1e-20) break;
  }
  return {
    parameterM: Math.sqrt(lengthM * radiusM),
    angleRad: tau,
    xM: x,
    yM: y,
    shiftM: y - radiusM * (1 - Math.cos(tau)),
    centreXM: x - radiusM * Math.sin(tau),
  };
}
