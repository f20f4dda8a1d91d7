import { STANDARD_GRAVITY_MPS2 } from '../units.ts';

/** Body roll as a damped oscillator with one degree of freedom. */
export interface RollBody {
  /** Undamped natural frequency, Hz. */
  readonly frequencyHz: number;
  readonly dampingRatio: number;
  /** Roll over cant-deficiency angle, s: static roll is s a_q / g. */
  readonly rollCoefficient: number;
}

/** State of the oscillator: roll angle relative to the track plane (positive outwards), rad, and its rate, rad/s. */
export interface RollState {
  angleRad: number;
  rateRadS: number;
}

/** Coefficients of one exact step of length T; computed once for a run of equal steps. */
interface RollStep {
  readonly durationS: number;
  readonly e11: number;
  readonly e12: number;
  readonly e21: number;
  readonly e22: number;
}

/** Matrix exponential of the free oscillator over T; the limit form near critical damping avoids 0/0. */
function freeMotion(omega: number, zeta: number, durationS: number): RollStep {
  const decay = Math.exp(-zeta * omega * durationS);
  const square = omega * omega * (1 - zeta * zeta);
  const root = Math.sqrt(Math.abs(square));
  const turn = root * durationS;
  let c: number;
  let s: number;
  if (turn < 1e-4) {
    c = 1 - (Math.sign(square) * turn * turn) / 2;
    s = durationS * (1 - (Math.sign(square) * turn * turn) / 6);
  } else if (square > 0) {
    c = Math.cos(turn);
    s = Math.sin(turn) / root;
  } else {
    c = Math.cosh(turn);
    s = Math.sinh(turn) / root;
  }
  return {
    durationS,
    e11: decay * (c + zeta * omega * s),
    e12: decay * s,
    e21: -decay * omega * omega * s,
    e22: decay * (c - zeta * omega * s),
  };
}

/**
 * Roll of the body along a run of track-plane acceleration that is linear between nodes:
 * phi'' + 2 zeta w phi' + w^2 phi = w^2 (s/g) a(t), integrated exactly (first-order hold), so there is no step-size
 * error
 * whatever the spacing of the nodes.
 *
 * timeS: nodes, s, strictly increasing; accelerationMps2: a_q at the nodes, m/s^2; both of length n.
 * Writes angleRad[0..n-1] and rateRadS[0..n-1] (outputs of length n); starts from `start`, or quasi-static when absent.
 * NaN spreads to all later nodes. Errors: RangeError when lengths differ.
 * Source: textbook solution of the linear oscillator for a linear force; closed forms in the tests.
 */
export function rollResponse(
  body: RollBody,
  timeS: ArrayLike<number>,
  accelerationMps2: ArrayLike<number>,
  angleRad: Float64Array,
  rateRadS: Float64Array,
  start?: RollState,
): void {
  const n = timeS.length;
  if (accelerationMps2.length !== n || angleRad.length < n || rateRadS.length < n) {
    throw new RangeError(`Roll needs columns of ${String(n)} nodes`);
  }
  if (n === 0) return;
  const omega = 2 * Math.PI * body.frequencyHz;
  const zeta = body.dampingRatio;
  const gain = body.rollCoefficient / STANDARD_GRAVITY_MPS2;
  const lag = (2 * zeta) / omega;
  const firstSlope = n > 1 ? (accelerationMps2[1]! - accelerationMps2[0]!) / (timeS[1]! - timeS[0]!) : 0;
  let phi = start?.angleRad ?? gain * (accelerationMps2[0]! - lag * firstSlope);
  let rate = start?.rateRadS ?? gain * firstSlope;
  angleRad[0] = phi;
  rateRadS[0] = rate;
  let step = freeMotion(omega, zeta, 0);
  for (let i = 1; i < n; i++) {
    const duration = timeS[i]! - timeS[i - 1]!;
    // Equal steps reuse their exponentials; 1e-9 s is far below any clock in the data.
    if (Math.abs(duration - step.durationS) > 1e-9) step = freeMotion(omega, zeta, duration);
    const a0 = accelerationMps2[i - 1]!;
    const a1 = accelerationMps2[i]!;
    const slope = gain * ((a1 - a0) / duration);
    const particular0 = gain * a0 - lag * slope;
    const d0 = phi - particular0;
    const d1 = rate - slope;
    phi = gain * a1 - lag * slope + step.e11 * d0 + step.e12 * d1;
    rate = slope + step.e21 * d0 + step.e22 * d1;
    angleRad[i] = phi;
    rateRadS[i] = rate;
  }
}

/**
 * Overshoot of the step response: exp(-pi zeta / sqrt(1 - zeta^2)), a share of the step; 0 from critical damping on.
 * Common practice, no source.
 */
export function stepOvershoot(dampingRatio: number): number {
  return dampingRatio >= 1 ? 0 : Math.exp((-Math.PI * dampingRatio) / Math.sqrt(1 - dampingRatio * dampingRatio));
}

/**
 * Steady amplitude under harmonic driving over the static one: 1 / sqrt((1 - r^2)^2 + (2 zeta r)^2), r = f / f0.
 * Common practice, no source.
 */
export function harmonicAmplification(frequencyRatio: number, dampingRatio: number): number {
  const square = frequencyRatio * frequencyRatio;
  return 1 / Math.hypot(1 - square, 2 * dampingRatio * frequencyRatio);
}

/**
 * Frequency ratio of the driven peak: sqrt(1 - 2 zeta^2), 0 (no peak) from zeta = 0.707 on. Common practice, no
 * source.
 */
export function driveRatioOfPeak(dampingRatio: number): number {
  return Math.sqrt(Math.max(1 - 2 * dampingRatio * dampingRatio, 0));
}
