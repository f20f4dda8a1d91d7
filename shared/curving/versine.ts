/**
 * Versine (mid-ordinate) of a chord on a circular curve, exact: R - sqrt(R^2 - c^2/4), in the unit of the radius.
 * Written as (c^2/4) / (R + sqrt(...)) so that large radii lose no digits. NaN when the chord is longer than the
 * diameter.
 * Source: geometry; c^2/(8R) is the customary approximation.
 */
export function versineM(chordM: number, radiusM: number): number {
  const quarter = (chordM * chordM) / 4;
  return quarter / (radiusM + Math.sqrt(radiusM * radiusM - quarter));
}

/** Radius from a versine, exact: R = c^2/(8 h) + h/2. Source: inverse of versineM. */
export function radiusFromVersineM(chordM: number, versineHeightM: number): number {
  return (chordM * chordM) / (8 * versineHeightM) + versineHeightM / 2;
}
