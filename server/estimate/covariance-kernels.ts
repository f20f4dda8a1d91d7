/**
 * Covariance kernels of the motion filter: symmetric 8 x 8 matrices packed by lower triangle
 * (element (i, j), i >= j, at i (i + 1) / 2 + j), written out in full because they run several times for every fix.
 *
 * State order: 0 X, 1 Y (m), 2 heading theta (rad), 3 speed v (m/s), 4 acceleration a (m/s^2), 5 curvature kappa (1/m),
 * 6 its change c = d kappa / ds (1/m^2), 7 slow cross-track Doppler error (m/s).
 */

/** Number of states. */
export const STATES = 8;
/** Elements of a packed symmetric matrix. */
export const PACKED = 36;
/** Coefficients of the transition matrix that are neither 0 nor 1, see predictCovariance. */
export const COEFFICIENTS = 19;
/** Places of the coefficients: X by theta, v, a, kappa, c; Y by the same; theta by v, a, kappa, c; v by a; kappa by c; decays of a, c, Doppler error. */
export const COEFFICIENT = {
  X: 0,
  Y: 5,
  THETA: 10,
  V_BY_A: 14,
  KAPPA_BY_C: 15,
  DECAY_A: 16,
  DECAY_C: 17,
  DECAY_DOPPLER: 18,
} as const;

/**
 * P := F P F' in place. F is the identity but for COEFFICIENT, which stand in f from `at`.
 */
export function predictCovariance(p: Float64Array, f: Float64Array, at: number): void {
  let before: number;
  const xTheta = f[at + 0]!;
  const xV = f[at + 1]!;
  const xA = f[at + 2]!;
  const xKappa = f[at + 3]!;
  const xChange = f[at + 4]!;
  const yTheta = f[at + 5]!;
  const yV = f[at + 6]!;
  const yA = f[at + 7]!;
  const yKappa = f[at + 8]!;
  const yChange = f[at + 9]!;
  const thetaV = f[at + 10]!;
  const thetaA = f[at + 11]!;
  const thetaKappa = f[at + 12]!;
  const thetaChange = f[at + 13]!;
  const vA = f[at + 14]!;
  const kappaChange = f[at + 15]!;
  const decayA = f[at + 16]!;
  const decayChange = f[at + 17]!;
  const decayDoppler = f[at + 18]!;
  // X
  before = xTheta * p[3]! + xV * p[6]! + xA * p[10]! + xKappa * p[15]! + xChange * p[21]!;
  p[1]! += xTheta * p[4]! + xV * p[7]! + xA * p[11]! + xKappa * p[16]! + xChange * p[22]!;
  p[3]! += xTheta * p[5]! + xV * p[8]! + xA * p[12]! + xKappa * p[17]! + xChange * p[23]!;
  p[6]! += xTheta * p[8]! + xV * p[9]! + xA * p[13]! + xKappa * p[18]! + xChange * p[24]!;
  p[10]! += xTheta * p[12]! + xV * p[13]! + xA * p[14]! + xKappa * p[19]! + xChange * p[25]!;
  p[15]! += xTheta * p[17]! + xV * p[18]! + xA * p[19]! + xKappa * p[20]! + xChange * p[26]!;
  p[21]! += xTheta * p[23]! + xV * p[24]! + xA * p[25]! + xKappa * p[26]! + xChange * p[27]!;
  p[28]! += xTheta * p[30]! + xV * p[31]! + xA * p[32]! + xKappa * p[33]! + xChange * p[34]!;
  p[0]! += before + xTheta * p[3]! + xV * p[6]! + xA * p[10]! + xKappa * p[15]! + xChange * p[21]!;
  // Y
  before = yTheta * p[4]! + yV * p[7]! + yA * p[11]! + yKappa * p[16]! + yChange * p[22]!;
  p[1]! += yTheta * p[3]! + yV * p[6]! + yA * p[10]! + yKappa * p[15]! + yChange * p[21]!;
  p[4]! += yTheta * p[5]! + yV * p[8]! + yA * p[12]! + yKappa * p[17]! + yChange * p[23]!;
  p[7]! += yTheta * p[8]! + yV * p[9]! + yA * p[13]! + yKappa * p[18]! + yChange * p[24]!;
  p[11]! += yTheta * p[12]! + yV * p[13]! + yA * p[14]! + yKappa * p[19]! + yChange * p[25]!;
  p[16]! += yTheta * p[17]! + yV * p[18]! + yA * p[19]! + yKappa * p[20]! + yChange * p[26]!;
  p[22]! += yTheta * p[23]! + yV * p[24]! + yA * p[25]! + yKappa * p[26]! + yChange * p[27]!;
  p[29]! += yTheta * p[30]! + yV * p[31]! + yA * p[32]! + yKappa * p[33]! + yChange * p[34]!;
  p[2]! += before + yTheta * p[4]! + yV * p[7]! + yA * p[11]! + yKappa * p[16]! + yChange * p[22]!;
  // theta
  before = thetaV * p[8]! + thetaA * p[12]! + thetaKappa * p[17]! + thetaChange * p[23]!;
  p[3]! += thetaV * p[6]! + thetaA * p[10]! + thetaKappa * p[15]! + thetaChange * p[21]!;
  p[4]! += thetaV * p[7]! + thetaA * p[11]! + thetaKappa * p[16]! + thetaChange * p[22]!;
  p[8]! += thetaV * p[9]! + thetaA * p[13]! + thetaKappa * p[18]! + thetaChange * p[24]!;
  p[12]! += thetaV * p[13]! + thetaA * p[14]! + thetaKappa * p[19]! + thetaChange * p[25]!;
  p[17]! += thetaV * p[18]! + thetaA * p[19]! + thetaKappa * p[20]! + thetaChange * p[26]!;
  p[23]! += thetaV * p[24]! + thetaA * p[25]! + thetaKappa * p[26]! + thetaChange * p[27]!;
  p[30]! += thetaV * p[31]! + thetaA * p[32]! + thetaKappa * p[33]! + thetaChange * p[34]!;
  p[5]! += before + thetaV * p[8]! + thetaA * p[12]! + thetaKappa * p[17]! + thetaChange * p[23]!;
  // v
  before = vA * p[13]!;
  p[6]! += vA * p[10]!;
  p[7]! += vA * p[11]!;
  p[8]! += vA * p[12]!;
  p[13]! += vA * p[14]!;
  p[18]! += vA * p[19]!;
  p[24]! += vA * p[25]!;
  p[31]! += vA * p[32]!;
  p[9]! += before + vA * p[13]!;
  // kappa
  before = kappaChange * p[26]!;
  p[15]! += kappaChange * p[21]!;
  p[16]! += kappaChange * p[22]!;
  p[17]! += kappaChange * p[23]!;
  p[18]! += kappaChange * p[24]!;
  p[19]! += kappaChange * p[25]!;
  p[26]! += kappaChange * p[27]!;
  p[33]! += kappaChange * p[34]!;
  p[20]! += before + kappaChange * p[26]!;
  // a
  p[10]! *= decayA;
  p[11]! *= decayA;
  p[12]! *= decayA;
  p[13]! *= decayA;
  p[14]! *= decayA * decayA;
  p[19]! *= decayA;
  p[25]! *= decayA;
  p[32]! *= decayA;
  // change of curvature
  p[21]! *= decayChange;
  p[22]! *= decayChange;
  p[23]! *= decayChange;
  p[24]! *= decayChange;
  p[25]! *= decayChange;
  p[26]! *= decayChange;
  p[27]! *= decayChange * decayChange;
  p[34]! *= decayChange;
  // slow Doppler error
  p[28]! *= decayDoppler;
  p[29]! *= decayDoppler;
  p[30]! *= decayDoppler;
  p[31]! *= decayDoppler;
  p[32]! *= decayDoppler;
  p[33]! *= decayDoppler;
  p[34]! *= decayDoppler;
  p[35]! *= decayDoppler * decayDoppler;
}

/** L := F' L F in place, the adjoint of predictCovariance. */
export function predictAdjoint(l: Float64Array, f: Float64Array, at: number): void {
  let before: number;
  const xTheta = f[at + 0]!;
  const xV = f[at + 1]!;
  const xA = f[at + 2]!;
  const xKappa = f[at + 3]!;
  const xChange = f[at + 4]!;
  const yTheta = f[at + 5]!;
  const yV = f[at + 6]!;
  const yA = f[at + 7]!;
  const yKappa = f[at + 8]!;
  const yChange = f[at + 9]!;
  const thetaV = f[at + 10]!;
  const thetaA = f[at + 11]!;
  const thetaKappa = f[at + 12]!;
  const thetaChange = f[at + 13]!;
  const vA = f[at + 14]!;
  const kappaChange = f[at + 15]!;
  const decayA = f[at + 16]!;
  const decayChange = f[at + 17]!;
  const decayDoppler = f[at + 18]!;
  // a
  l[10]! *= decayA;
  l[11]! *= decayA;
  l[12]! *= decayA;
  l[13]! *= decayA;
  l[14]! *= decayA * decayA;
  l[19]! *= decayA;
  l[25]! *= decayA;
  l[32]! *= decayA;
  before = xA * l[10]! + yA * l[11]! + thetaA * l[12]! + vA * l[13]!;
  l[10]! += xA * l[0]! + yA * l[1]! + thetaA * l[3]! + vA * l[6]!;
  l[11]! += xA * l[1]! + yA * l[2]! + thetaA * l[4]! + vA * l[7]!;
  l[12]! += xA * l[3]! + yA * l[4]! + thetaA * l[5]! + vA * l[8]!;
  l[13]! += xA * l[6]! + yA * l[7]! + thetaA * l[8]! + vA * l[9]!;
  l[19]! += xA * l[15]! + yA * l[16]! + thetaA * l[17]! + vA * l[18]!;
  l[25]! += xA * l[21]! + yA * l[22]! + thetaA * l[23]! + vA * l[24]!;
  l[32]! += xA * l[28]! + yA * l[29]! + thetaA * l[30]! + vA * l[31]!;
  l[14]! += before + xA * l[10]! + yA * l[11]! + thetaA * l[12]! + vA * l[13]!;
  // change of curvature
  l[21]! *= decayChange;
  l[22]! *= decayChange;
  l[23]! *= decayChange;
  l[24]! *= decayChange;
  l[25]! *= decayChange;
  l[26]! *= decayChange;
  l[27]! *= decayChange * decayChange;
  l[34]! *= decayChange;
  before = xChange * l[21]! + yChange * l[22]! + thetaChange * l[23]! + kappaChange * l[26]!;
  l[21]! += xChange * l[0]! + yChange * l[1]! + thetaChange * l[3]! + kappaChange * l[15]!;
  l[22]! += xChange * l[1]! + yChange * l[2]! + thetaChange * l[4]! + kappaChange * l[16]!;
  l[23]! += xChange * l[3]! + yChange * l[4]! + thetaChange * l[5]! + kappaChange * l[17]!;
  l[24]! += xChange * l[6]! + yChange * l[7]! + thetaChange * l[8]! + kappaChange * l[18]!;
  l[25]! += xChange * l[10]! + yChange * l[11]! + thetaChange * l[12]! + kappaChange * l[19]!;
  l[26]! += xChange * l[15]! + yChange * l[16]! + thetaChange * l[17]! + kappaChange * l[20]!;
  l[34]! += xChange * l[28]! + yChange * l[29]! + thetaChange * l[30]! + kappaChange * l[33]!;
  l[27]! += before + xChange * l[21]! + yChange * l[22]! + thetaChange * l[23]! + kappaChange * l[26]!;
  // kappa
  before = xKappa * l[15]! + yKappa * l[16]! + thetaKappa * l[17]!;
  l[15]! += xKappa * l[0]! + yKappa * l[1]! + thetaKappa * l[3]!;
  l[16]! += xKappa * l[1]! + yKappa * l[2]! + thetaKappa * l[4]!;
  l[17]! += xKappa * l[3]! + yKappa * l[4]! + thetaKappa * l[5]!;
  l[18]! += xKappa * l[6]! + yKappa * l[7]! + thetaKappa * l[8]!;
  l[19]! += xKappa * l[10]! + yKappa * l[11]! + thetaKappa * l[12]!;
  l[26]! += xKappa * l[21]! + yKappa * l[22]! + thetaKappa * l[23]!;
  l[33]! += xKappa * l[28]! + yKappa * l[29]! + thetaKappa * l[30]!;
  l[20]! += before + xKappa * l[15]! + yKappa * l[16]! + thetaKappa * l[17]!;
  // v
  before = xV * l[6]! + yV * l[7]! + thetaV * l[8]!;
  l[6]! += xV * l[0]! + yV * l[1]! + thetaV * l[3]!;
  l[7]! += xV * l[1]! + yV * l[2]! + thetaV * l[4]!;
  l[8]! += xV * l[3]! + yV * l[4]! + thetaV * l[5]!;
  l[13]! += xV * l[10]! + yV * l[11]! + thetaV * l[12]!;
  l[18]! += xV * l[15]! + yV * l[16]! + thetaV * l[17]!;
  l[24]! += xV * l[21]! + yV * l[22]! + thetaV * l[23]!;
  l[31]! += xV * l[28]! + yV * l[29]! + thetaV * l[30]!;
  l[9]! += before + xV * l[6]! + yV * l[7]! + thetaV * l[8]!;
  // theta
  before = xTheta * l[3]! + yTheta * l[4]!;
  l[3]! += xTheta * l[0]! + yTheta * l[1]!;
  l[4]! += xTheta * l[1]! + yTheta * l[2]!;
  l[8]! += xTheta * l[6]! + yTheta * l[7]!;
  l[12]! += xTheta * l[10]! + yTheta * l[11]!;
  l[17]! += xTheta * l[15]! + yTheta * l[16]!;
  l[23]! += xTheta * l[21]! + yTheta * l[22]!;
  l[30]! += xTheta * l[28]! + yTheta * l[29]!;
  l[5]! += before + xTheta * l[3]! + yTheta * l[4]!;
  // slow Doppler error
  l[28]! *= decayDoppler;
  l[29]! *= decayDoppler;
  l[30]! *= decayDoppler;
  l[31]! *= decayDoppler;
  l[32]! *= decayDoppler;
  l[33]! *= decayDoppler;
  l[34]! *= decayDoppler;
  l[35]! *= decayDoppler * decayDoppler;
}

/** lambda := F' lambda in place. */
export function predictAdjointVector(l: Float64Array, f: Float64Array, at: number): void {
  const xTheta = f[at + 0]!;
  const xV = f[at + 1]!;
  const xA = f[at + 2]!;
  const xKappa = f[at + 3]!;
  const xChange = f[at + 4]!;
  const yTheta = f[at + 5]!;
  const yV = f[at + 6]!;
  const yA = f[at + 7]!;
  const yKappa = f[at + 8]!;
  const yChange = f[at + 9]!;
  const thetaV = f[at + 10]!;
  const thetaA = f[at + 11]!;
  const thetaKappa = f[at + 12]!;
  const thetaChange = f[at + 13]!;
  const vA = f[at + 14]!;
  const kappaChange = f[at + 15]!;
  const decayA = f[at + 16]!;
  const decayChange = f[at + 17]!;
  const decayDoppler = f[at + 18]!;
  l[4] = decayA * l[4]! + xA * l[0]! + yA * l[1]! + thetaA * l[2]! + vA * l[3]!;
  l[6] = decayChange * l[6]! + xChange * l[0]! + yChange * l[1]! + thetaChange * l[2]! + kappaChange * l[5]!;
  l[5] = l[5]! + xKappa * l[0]! + yKappa * l[1]! + thetaKappa * l[2]!;
  l[3] = l[3]! + xV * l[0]! + yV * l[1]! + thetaV * l[2]!;
  l[2] = l[2]! + xTheta * l[0]! + yTheta * l[1]!;
  l[7] = decayDoppler * l[7]!;
}

/** P := P - weight g g' in place, g a vector of 8. */
export function subtractOuter(p: Float64Array, g: Float64Array, weight: number): void {
  const g0 = g[0]!;
  const g1 = g[1]!;
  const g2 = g[2]!;
  const g3 = g[3]!;
  const g4 = g[4]!;
  const g5 = g[5]!;
  const g6 = g[6]!;
  const g7 = g[7]!;
  let s: number;
  s = weight * g0;
  p[0]! -= s * g0;
  s = weight * g1;
  p[1]! -= s * g0;
  p[2]! -= s * g1;
  s = weight * g2;
  p[3]! -= s * g0;
  p[4]! -= s * g1;
  p[5]! -= s * g2;
  s = weight * g3;
  p[6]! -= s * g0;
  p[7]! -= s * g1;
  p[8]! -= s * g2;
  p[9]! -= s * g3;
  s = weight * g4;
  p[10]! -= s * g0;
  p[11]! -= s * g1;
  p[12]! -= s * g2;
  p[13]! -= s * g3;
  p[14]! -= s * g4;
  s = weight * g5;
  p[15]! -= s * g0;
  p[16]! -= s * g1;
  p[17]! -= s * g2;
  p[18]! -= s * g3;
  p[19]! -= s * g4;
  p[20]! -= s * g5;
  s = weight * g6;
  p[21]! -= s * g0;
  p[22]! -= s * g1;
  p[23]! -= s * g2;
  p[24]! -= s * g3;
  p[25]! -= s * g4;
  p[26]! -= s * g5;
  p[27]! -= s * g6;
  s = weight * g7;
  p[28]! -= s * g0;
  p[29]! -= s * g1;
  p[30]! -= s * g2;
  p[31]! -= s * g3;
  p[32]! -= s * g4;
  p[33]! -= s * g5;
  p[34]! -= s * g6;
  p[35]! -= s * g7;
}

/** out := M k, M packed symmetric, k a vector of 8 starting at `at`. */
export function timesVector(m: Float64Array, k: Float64Array, at: number, out: Float64Array): void {
  const k0 = k[at + 0]!;
  const k1 = k[at + 1]!;
  const k2 = k[at + 2]!;
  const k3 = k[at + 3]!;
  const k4 = k[at + 4]!;
  const k5 = k[at + 5]!;
  const k6 = k[at + 6]!;
  const k7 = k[at + 7]!;
  out[0] = m[0]! * k0 + m[1]! * k1 + m[3]! * k2 + m[6]! * k3 + m[10]! * k4 + m[15]! * k5 + m[21]! * k6 + m[28]! * k7;
  out[1] = m[1]! * k0 + m[2]! * k1 + m[4]! * k2 + m[7]! * k3 + m[11]! * k4 + m[16]! * k5 + m[22]! * k6 + m[29]! * k7;
  out[2] = m[3]! * k0 + m[4]! * k1 + m[5]! * k2 + m[8]! * k3 + m[12]! * k4 + m[17]! * k5 + m[23]! * k6 + m[30]! * k7;
  out[3] = m[6]! * k0 + m[7]! * k1 + m[8]! * k2 + m[9]! * k3 + m[13]! * k4 + m[18]! * k5 + m[24]! * k6 + m[31]! * k7;
  out[4] =
    m[10]! * k0 + m[11]! * k1 + m[12]! * k2 + m[13]! * k3 + m[14]! * k4 + m[19]! * k5 + m[25]! * k6 + m[32]! * k7;
  out[5] =
    m[15]! * k0 + m[16]! * k1 + m[17]! * k2 + m[18]! * k3 + m[19]! * k4 + m[20]! * k5 + m[26]! * k6 + m[33]! * k7;
  out[6] =
    m[21]! * k0 + m[22]! * k1 + m[23]! * k2 + m[24]! * k3 + m[25]! * k4 + m[26]! * k5 + m[27]! * k6 + m[34]! * k7;
  out[7] =
    m[28]! * k0 + m[29]! * k1 + m[30]! * k2 + m[31]! * k3 + m[32]! * k4 + m[33]! * k5 + m[34]! * k6 + m[35]! * k7;
}

/** out := column `c` of packed symmetric P starting at `at`. */
export function column(p: Float64Array, at: number, c: number, out: Float64Array): void {
  for (let i = 0; i < STATES; i++) out[i] = p[at + (i >= c ? (i * (i + 1)) / 2 + c : (c * (c + 1)) / 2 + i)]!;
}
