import { sideFriction } from './side-friction.ts';

/**
 * Reading of a ball-bank indicator, radians: alpha = (1 + s) atan(f), the angle of the side force plus the body's roll
 * outwards, f the side friction demand, s the roll coefficient (roll over the angle of the side force). 0 at balance.
 * Source: MUTCD 2C (thresholds read and from memory); the form tan(alpha - r) = f with r the roll, common practice.
 */
export function ballBankRad(
  speedMps: number,
  curvaturePerM: number,
  superelevation: number,
  rollCoefficient: number,
): number {
  return (1 + rollCoefficient) * Math.atan(sideFriction(speedMps, curvaturePerM, superelevation));
}

/** Side friction demand at which the indicator reads `angleRad`. Source: inverse of ballBankRad. */
export function sideFrictionForBallBank(angleRad: number, rollCoefficient: number): number {
  return Math.tan(angleRad / (1 + rollCoefficient));
}
