/** Lengths that published rules ask of a transition, each in its own units, and the longest. */
export interface SpiralRule {
  readonly comfort: number;
  readonly twist: number;
  readonly governs: number;
}

/**
 * North American passenger practice, feet: 1.63 Eu V for comfort (1.22 Eu V where realigning is constrained),
 * 62 Ea for twist. Eu and Ea in inches, V in mph.
 * Source: AREMA Manual, chapter 5 (from memory); the factor follows from 0.1 g at 3 in and 0.03 g/s (read: TCRP 155).
 */
export function usSpiralLengthFt(
  elevationIn: number,
  unbalanceIn: number,
  speedMph: number,
  constrained = false,
): SpiralRule {
  const comfort = (constrained ? 1.22 : 1.63) * unbalanceIn * speedMph;
  const twist = 62 * elevationIn;
  return { comfort, twist, governs: Math.max(comfort, twist) };
}

/**
 * Indian practice, m: 0.008 Ca V and 0.008 Cd V for the rates (35 mm/s), 0.72 Ca for twist; Ca, Cd in mm, V in km/h.
 * Source: Indian Railways practice (from memory; 1/(3.6 * 35) = 0.00794).
 */
export function indianTransitionLengthM(cantMm: number, deficiencyMm: number, speedKmh: number): SpiralRule {
  const comfort = 0.008 * Math.max(cantMm, deficiencyMm) * speedKmh;
  const twist = 0.72 * cantMm;
  return { comfort, twist, governs: Math.max(comfort, twist) };
}
