/*
 * Signs and frames, for all formulas of this folder.
 *
 *   Seen from behind, a curve to the LEFT (curvature kappa > 0), cant D raising the right, outer rail:
 *
 *            inside of the curve                         outside of the curve
 *                  (left)                                      (right)
 *
 *                                 body ______
 *                                     /     /      a_h = v^2 kappa : acceleration of the vehicle,
 *              <---- a_h ----        /  *  /       horizontal, towards the inside
 *                                   /_____/        felt by a passenger as a push to the outside
 *                                       ___====    right rail
 *                            ____----           |
 *              left rail ====  ) theta          | D
 *                        ------------------------
 *                         <--------- b -------->   sin(theta) = D / b
 *
 *   a_q = v^2 |kappa| cos(theta) - g sin(theta)    in the track plane, > 0 pushes passengers outwards
 *   I   = b v^2 |kappa| / g - D                    cant deficiency; < 0 is cant excess
 *
 * - Curvature and hand: positive curvature turns left. Formulas of one curve take the magnitude |kappa|.
 * - Cant: positive raises the outer rail of the curve it lies on (in favour of the passengers); negative cant is
 *   adverse. D and b (distance of the wheel contact circles, not the gauge) in mm.
 * - Roll of the body relative to the track plane: positive outwards.
 * - Speed m/s, length m, angles radians, acceleration m/s^2, unless the name says otherwise.
 * - g is STANDARD_GRAVITY_MPS2 unless a caller passes another (check values printed with 9.81).
 */

/**
 * Cant angle: sin(theta) = D / b.
 * cantMm and baseMm in mm; result in radians with the sign of the cant. NaN when |D| > b.
 * Source: definition; common practice, no source.
 */
export function cantAngleRad(cantMm: number, baseMm: number): number {
  return Math.asin(cantMm / baseMm);
}
