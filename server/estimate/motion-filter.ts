import {
  COEFFICIENT,
  COEFFICIENTS,
  PACKED,
  STATES,
  column,
  predictCovariance,
  subtractOuter,
} from './covariance-kernels.ts';
import type { Observations } from './observations.ts';
import { LEAST_SPEED_FOR_COURSE_MPS, USE, lowSpeedVariance, slowCourseVariance } from './observations.ts';
import type { Parameters } from './parameters.ts';
import { ACCELERATION_TIME_S, walkAt } from './parameters.ts';
import { writeStart } from './start.ts';

/** Trajectory about which the motion is linearised; columns of the run's length. */
export interface Reference {
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  readonly headingRad: Float64Array;
  readonly speedMps: Float64Array;
  readonly accelerationMps2: Float64Array;
  readonly curvaturePerM: Float64Array;
}

/** The states that the coefficients of an observation stand for, by kind: position along and across the track, speed, course. */
export const SEEN: readonly (readonly [number, number, number])[] = [
  [0, 1, 7],
  [0, 1, 7],
  [3, 4, 7],
  [2, 5, 7],
];

/** Layout of what the smoother needs of one fix: predicted state, predicted covariance, transition, four observations. */
export const RECORD = {
  STATE: 0,
  COVARIANCE: STATES,
  TRANSITION: STATES + PACKED,
  OBSERVATIONS: STATES + PACKED + COEFFICIENTS,
  /** Of one observation: gain (8), innovation over its variance, 1 / variance (0 = absent), three coefficients. */
  OBSERVATION_SIZE: STATES + 5,
  /** 1 where the filter started afresh at the fix. */
  STARTS: STATES + PACKED + COEFFICIENTS + 4 * (STATES + 5),
  SIZE: STATES + PACKED + COEFFICIENTS + 4 * (STATES + 5) + 1,
} as const;

/** Longest step of the linearisation, s; a gap is crossed in several. */
const LONGEST_STEP_S = 2;
/** Sd with which a standing vehicle's speed is zero, m/s. */
const STANDING_SD_MPS = 0.03;
/** Where the filter strays this far from the reference, it is linearised about itself. */
const FAR_HEADING_RAD = 0.5;
const FAR_M = 60;
/** Smallest process variances of heading and curvature in a step, so that nothing is singular at standstill. */
const LEAST_HEADING_VARIANCE = 1e-14;
const LEAST_CURVATURE_VARIANCE = 1e-16;
/** Positions beyond the gate in a row after which they are believed. */
const MISSED_WITH_COURSE = 3;
const MISSED_WITHOUT_COURSE = 2;
/**
 * Beyond this squared standardised innovation the deviance grows by TAIL ln(e^2 / S) only: the density's tail falls like a
 * power, fast enough to be a density, so that outliers neither pass for noise nor become free.
 */
const TAIL_FROM = 9;
const TAIL = 4;
/** Doppler readings are rarely outliers; a manoeuvre that the model thinks unlikely must not look like one. */
const DOPPLER_GATE = 100;
/** Gaps longer than this end the continuity of the filter where the heading's sd after them exceeds the angle below. */
const LEAST_GAP_S = 4;
const LOST_HEADING_RAD = 0.35;
/** Beyond these no vehicle on rails or road moves: a radius of 3 m, 15 m/s^2. */
const GREATEST_CURVATURE_PER_M = 0.33;
const GREATEST_ACCELERATION_MPS2 = 15;
/** What a loss of the vehicle costs a set of parameters in the search. */
const RESTART_DEVIANCE = 100;
const TWO_PI = 2 * Math.PI;

/** Angle brought into (-pi, pi]. */
export function wrapAngle(angle: number): number {
  return angle - TWO_PI * Math.round(angle / TWO_PI);
}

/**
 * Extended filter of the motion (methods of Kalman; curvature a random walk in distance; scalar observations).
 *
 * The wandering position error is carried inside X, Y as a diffusion: within its correlation time nothing else of it is
 * identifiable, and the state stays small. The slow Doppler errors are states of their own, so that a high rate does not pass
 * for more information than it holds. `gate` is the square of the standardised innovation above which the innovation's
 * variance is enlarged instead of the observation believed.
 */
export class MotionFilter {
  readonly state = new Float64Array(STATES);
  readonly covariance = new Float64Array(PACKED);
  /** Successive fixes whose position lay beyond the gate: part of the filter's state. */
  readonly missed = new Int32Array(1);
  /** Sum over observations of ln S + rho(e^2 / S), rho quadratic up to the gate and logarithmic beyond. */
  deviance = 0;
  readonly #transition = new Float64Array(COEFFICIENTS);
  readonly #whole = new Float64Array(COEFFICIENTS);
  readonly #seen = new Float64Array(STATES);
  readonly #observations: Observations;
  readonly #parameters: Parameters;
  readonly #reference: Reference | null;
  readonly #gate: number;
  readonly #walk = { walk: 0, lengthM: 1 };
  #stepS = NaN;
  #decayA = 1;
  #gainA = 0;
  #decayDoppler = 1;
  #cos = 1;
  #sin = 0;

  constructor(observations: Observations, parameters: Parameters, reference: Reference | null, gate: number) {
    this.#observations = observations;
    this.#parameters = parameters;
    this.#reference = reference;
    this.#gate = gate;
  }

  /**
   * Advances over the fixes [from, to). State and covariance must be those after fix from - 1 (unless `from` restarts).
   * Where `record` is given, RECORD.SIZE numbers are written for each fix, starting with fix `from` at 0.
   */
  advance(from: number, to: number, record: Float64Array | null): void {
    const { use, timeS } = this.#observations;
    const { state, covariance } = this;
    for (let i = from; i < to; i++) {
      const at = (i - from) * RECORD.SIZE;
      if ((use[i]! & USE.RESTART) === 0 && (this.#lost() || this.#losesHeading(timeS[i]! - timeS[i - 1]!))) {
        use[i]! |= USE.RESTART;
      }
      const starts = (use[i]! & USE.RESTART) !== 0;
      if (starts) {
        writeStart(this.#observations, this.#parameters, i, state, covariance);
        this.#cos = Math.cos(state[2]!);
        this.#sin = Math.sin(state[2]!);
        this.#whole.fill(0);
        this.missed.fill(0);
      } else {
        this.#predict(i, timeS[i]! - timeS[i - 1]!);
        const missed = this.missed[0]!;
        const onset = Math.max(from, i - missed);
        if (missed >= MISSED_WITHOUT_COURSE && (use[i]! & USE.COURSE) === 0 && !startedNear(use, onset)) {
          // Positions alone: the vehicle turned or braked as the model thought unlikely, and the filter has lost it. Start afresh
          // where that began; in this block, because what lies before it is settled.
          this.deviance += RESTART_DEVIANCE;
          use[onset]! |= USE.RESTART;
          i = onset - 1;
          continue;
        }
        if (missed >= MISSED_WITH_COURSE && (use[i]! & USE.POSITION) !== 0) this.#freePosition(i);
      }
      if (record !== null) {
        record.set(state, at + RECORD.STATE);
        record.set(covariance, at + RECORD.COVARIANCE);
        record.set(this.#whole, at + RECORD.TRANSITION);
        record[at + RECORD.STARTS] = starts ? 1 : 0;
        for (let k = 0; k < 4; k++) record[at + RECORD.OBSERVATIONS + k * RECORD.OBSERVATION_SIZE + STATES + 1] = 0;
      }
      this.#observe(i, record, at + RECORD.OBSERVATIONS);
    }
  }

  /** No vehicle moves as the state says: the filter has locked on to something else and must start afresh. */
  #lost(): boolean {
    const v = this.state[3]!;
    const kappa = this.state[5]!;
    const lost = Math.abs(kappa) > GREATEST_CURVATURE_PER_M || Math.abs(v * v * kappa) > GREATEST_ACCELERATION_MPS2;
    if (lost || Math.abs(this.state[4]!) > GREATEST_ACCELERATION_MPS2) {
      this.deviance += RESTART_DEVIANCE;
      return true;
    }
    return false;
  }

  /** Would the heading be so uncertain after the gap that its linearisation means nothing? Either side then stands alone. */
  #losesHeading(gapS: number): boolean {
    if (gapS <= LEAST_GAP_S) return false;
    const v = this.state[3]! + this.state[4]! * ACCELERATION_TIME_S * 0.5;
    // A standing vehicle may pull away within the gap.
    const d = Math.max(v, 0.25 * this.#parameters.typicalSpeedMps) * gapS;
    const p = this.covariance;
    const variance = p[5]! + 2 * d * p[17]! + d * d * p[20]! + (this.#parameters.curvatureWalk * d * d * d) / 3;
    return variance > LOST_HEADING_RAD ** 2;
  }

  #predict(i: number, gapS: number): void {
    const { state } = this;
    const steps = gapS > LONGEST_STEP_S ? Math.ceil(gapS / LONGEST_STEP_S) : 1;
    const h = gapS / steps;
    if (h !== this.#stepS) {
      this.#stepS = h;
      this.#decayA = Math.exp(-h / ACCELERATION_TIME_S);
      this.#gainA = ACCELERATION_TIME_S * (1 - this.#decayA);
      this.#decayDoppler = Math.exp(-h / this.#parameters.dopplerTimeS);
    }
    // Point of linearisation: the reference where there is one and the filter is near it, else the filter itself.
    let theta = state[2]!;
    let v = state[3]!;
    let a = state[4]!;
    let kappa = state[5]!;
    let dTheta = 0;
    let dV = 0;
    let dA = 0;
    let dKappa = 0;
    let c = state[6]!;
    const reference = this.#reference;
    if (reference !== null) {
      const thetaReference = reference.headingRad[i - 1]!;
      // Another branch of the angle is the same heading; far from the reference the linear map means nothing.
      theta -= TWO_PI * Math.round((theta - thetaReference) / TWO_PI);
      state[2] = theta;
      if (
        Math.abs(theta - thetaReference) < FAR_HEADING_RAD &&
        Math.abs(state[0]! - reference.xM[i - 1]!) + Math.abs(state[1]! - reference.yM[i - 1]!) < FAR_M
      ) {
        dTheta = theta - thetaReference;
        dV = v - reference.speedMps[i - 1]!;
        dA = a - reference.accelerationMps2[i - 1]!;
        dKappa = kappa - reference.curvaturePerM[i - 1]!;
        theta = thetaReference;
        v -= dV;
        a -= dA;
        kappa -= dKappa;
      }
    }
    const f = this.#transition;
    const whole = this.#whole;
    const decayA = this.#decayA;
    const gainA = this.#gainA;
    const decayDoppler = this.#decayDoppler;
    walkAt(this.#parameters, v, this.#walk);
    const changeLengthM = this.#walk.lengthM;
    // Stationary variance of c whose integral spreads like the curvature walk.
    const variance = (this.#walk.walk * this.#observations.walkFactor[i]!) / (2 * changeLengthM);
    const jerk = this.#parameters.jerkNoise * this.#observations.jerkFactor[i]!;
    const half = 0.5 * h * h;
    // Between two fixes of one stop nothing moves, whatever the speed's remaining error.
    const standing = (this.#observations.use[i]! & this.#observations.use[i - 1]! & USE.STANDING) !== 0;
    f[COEFFICIENT.V_BY_A] = gainA;
    f[COEFFICIENT.DECAY_A] = decayA;
    f[COEFFICIENT.DECAY_DOPPLER] = decayDoppler;
    for (let step = 0; step < steps; step++) {
      const d = standing ? 0 : Math.max(0, v * h + 0.5 * a * h * h);
      const x = d / changeLengthM;
      const decayC = Math.exp(-x);
      // First and second integral over d of a decaying c.
      const kappaByC = x < 1e-3 ? d : changeLengthM * (1 - decayC);
      const thetaByC = x < 1e-3 ? 0.5 * d * d : changeLengthM * (d - kappaByC);
      const turn = kappa * d + c * thetaByC;
      const middle = theta + 0.5 * kappa * d + (c * thetaByC) / 3;
      const cos = Math.cos(middle);
      const sin = Math.sin(middle);
      const mean = kappa + 0.5 * c * kappaByC;
      const xd = cos - 0.5 * turn * sin;
      const yd = sin + 0.5 * turn * cos;
      f[0] = -d * sin;
      f[1] = xd * h;
      f[2] = xd * half;
      f[3] = -0.5 * d * d * sin;
      f[4] = (-d * thetaByC * sin) / 3;
      f[5] = d * cos;
      f[6] = yd * h;
      f[7] = yd * half;
      f[8] = 0.5 * d * d * cos;
      f[9] = (d * thetaByC * cos) / 3;
      f[10] = mean * h;
      f[11] = mean * half;
      f[12] = d;
      f[13] = thetaByC;
      f[COEFFICIENT.KAPPA_BY_C] = kappaByC;
      f[COEFFICIENT.DECAY_C] = decayC;
      // State: the nonlinear step of the linearisation point plus the linear step of the difference from it.
      state[0]! += d * cos + f[0] * dTheta + f[1] * dV + f[2] * dA + f[3] * dKappa;
      state[1]! += d * sin + f[5] * dTheta + f[6] * dV + f[7] * dA + f[8] * dKappa;
      theta += turn;
      v = Math.max(0, v + gainA * a);
      a *= decayA;
      kappa += kappaByC * c;
      c *= decayC;
      dTheta += f[10] * dV + f[11] * dA + d * dKappa;
      dV += gainA * dA;
      dA *= decayA;
      predictCovariance(this.covariance, f, 0);
      this.#addProcessNoise(d, h, cos, sin, variance, changeLengthM, x, decayC, jerk);
      if (step === 0) whole.set(f);
      else compose(whole, f);
      this.#cos = cos;
      this.#sin = sin;
    }
    state[2] = theta + dTheta;
    state[3] = Math.max(0, v + dV);
    state[4] = a + dA;
    state[5] = kappa + dKappa;
    state[6] = c;
    state[7]! *= whole[COEFFICIENT.DECAY_DOPPLER]!;
  }

  /**
   * Adds the covariance of one step's noise. Curvature: c is a Gauss-Markov process of the given variance in distance,
   * x = d over its correlation length, integrated once to kappa and twice to theta (Singer's model, IEEE Trans. AES-6, 1970,
   * p. 473, with distance for time). Along the track: jerk over h. Besides the diffusion of the position error and the Doppler error.
   */
  #addProcessNoise(
    d: number,
    h: number,
    cos: number,
    sin: number,
    variance: number,
    l: number,
    x: number,
    e: number,
    jerk: number,
  ): void {
    const p = this.covariance;
    const { diffusion, courseSlowMps } = this.#parameters;
    let cc: number;
    let kappaC: number;
    let kappaKappa: number;
    let thetaC: number;
    let thetaKappa: number;
    let thetaTheta: number;
    if (x < 0.02) {
      const s = (2 * variance * d) / l;
      cc = s;
      kappaC = (s * d) / 2;
      kappaKappa = (s * d * d) / 3;
      thetaC = (s * d * d) / 6;
      thetaKappa = (s * d * d * d) / 8;
      thetaTheta = (s * d * d * d * d) / 20;
    } else {
      const e2 = e * e;
      const v1 = variance * l;
      const v2 = v1 * l;
      cc = variance * (1 - e2);
      kappaC = v1 * (1 - e) * (1 - e);
      kappaKappa = v2 * (4 * e - 3 - e2 + 2 * x);
      thetaC = v2 * (1 - e2 - 2 * x * e);
      thetaKappa = v2 * l * (e2 + 1 - 2 * e + 2 * x * e - 2 * x + x * x);
      thetaTheta = v2 * l * l * (1 - e2 + 2 * x + (2 * x * x * x) / 3 - 2 * x * x - 4 * x * e);
    }
    // The lateral displacement is a third of the step times the heading's, near enough: it stays far under the position error.
    const third = d / 3;
    const lateral = third * third * thetaTheta;
    const lateralTheta = third * thetaTheta;
    const lateralKappa = third * thetaKappa;
    const lateralC = third * thetaC;
    const j = jerk * h;
    const h2 = h * h;
    const along = (j * h2 * h2) / 20;
    const alongV = (j * h2 * h) / 8;
    const alongA = (j * h2) / 6;
    const wander = diffusion * h;
    p[0]! += lateral * sin * sin + along * cos * cos + wander;
    p[1]! += (along - lateral) * sin * cos;
    p[2]! += lateral * cos * cos + along * sin * sin + wander;
    p[3]! -= lateralTheta * sin;
    p[4]! += lateralTheta * cos;
    p[5]! += thetaTheta + LEAST_HEADING_VARIANCE;
    p[6]! += alongV * cos;
    p[7]! += alongV * sin;
    p[9]! += (j * h2) / 3;
    p[10]! += alongA * cos;
    p[11]! += alongA * sin;
    p[13]! += (j * h) / 2;
    p[14]! += j;
    p[15]! -= lateralKappa * sin;
    p[16]! += lateralKappa * cos;
    p[17]! += thetaKappa;
    p[20]! += kappaKappa + LEAST_CURVATURE_VARIANCE;
    p[21]! -= lateralC * sin;
    p[22]! += lateralC * cos;
    p[23]! += thetaC;
    p[26]! += kappaC;
    p[27]! += cc;
    const fresh = 1 - this.#decayDoppler * this.#decayDoppler;
    p[35]! += fresh * courseSlowMps * courseSlowMps;
  }

  /** The position error has leapt (multipath, another mode of the receiver) while Doppler holds the rest: the position is set free. */
  #freePosition(i: number): void {
    const dx = this.#observations.xM[i]! - this.state[0]!;
    const dy = this.#observations.yM[i]! - this.state[1]!;
    this.covariance[0]! += dx * dx + dy * dy;
    this.covariance[2]! += dx * dx + dy * dy;
    this.missed[0] = 0;
  }

  #observe(i: number, record: Float64Array | null, at: number): void {
    const o = this.#observations;
    const use = o.use[i]!;
    const { state, covariance: p } = this;
    const { whiteM, stampSdS, speedMps, courseWhiteMps } = this.#parameters;
    const gate = this.#gate;
    const g = this.#seen;
    const size = RECORD.OBSERVATION_SIZE;
    if ((use & USE.POSITION) !== 0) {
      const cos = this.#cos;
      const sin = this.#sin;
      const white = (whiteM * whiteM + o.positionRoundingM2) * o.positionFactor[i]!;
      const stamp = stampSdS * state[3]!;
      column2(p, cos, sin, g);
      let variance = cos * g[0]! + sin * g[1]! + white + stamp * stamp;
      let innovation = cos * (o.xM[i]! - state[0]!) + sin * (o.yM[i]! - state[1]!);
      let gated = innovation * innovation > gate * variance;
      this.#take(innovation, variance, record, at, cos, sin, 0, gate);
      column2(p, -sin, cos, g);
      variance = -sin * g[0]! + cos * g[1]! + white;
      innovation = -sin * (o.xM[i]! - state[0]!) + cos * (o.yM[i]! - state[1]!);
      gated ||= innovation * innovation > gate * variance;
      this.#take(innovation, variance, record, at + size, -sin, cos, 0, gate);
      this.missed[0] = gated ? this.missed[0]! + 1 : 0;
    }
    if ((use & USE.STANDING) !== 0) {
      column(p, 0, 3, g);
      this.#take(-state[3]!, g[3]! + STANDING_SD_MPS ** 2, record, at + 2 * size, 1, 0, 0, DOPPLER_GATE);
    } else if ((use & USE.SPEED) !== 0) {
      const speed = o.speedMps![i]!;
      const noise = (speedMps * speedMps + o.speedRounding) * o.dopplerFactor[i]! + lowSpeedVariance(speed);
      column(p, 0, 3, g);
      this.#take(speed - state[3]!, g[3]! + noise, record, at + 2 * size, 1, 0, 0, DOPPLER_GATE);
    }
    if ((use & USE.COURSE) !== 0) {
      const reference = this.#reference;
      const measured = (use & USE.SPEED) !== 0 ? o.speedMps![i]! : state[3]!;
      const v = Math.max(LEAST_SPEED_FOR_COURSE_MPS, reference === null ? measured : reference.speedMps[i]!);
      const slow = 1 / v;
      const white = courseWhiteMps * courseWhiteMps * o.dopplerFactor[i]! + slowCourseVariance(v);
      const noise = white * slow * slow + o.courseRoundingRad2;
      columnCourse(p, slow, g);
      const variance = g[2]! + slow * g[7]! + noise;
      const innovation = wrapAngle(o.northRad[i]! - o.courseRad![i]! - state[2]! - slow * state[7]!);
      this.#take(innovation, variance, record, at + 3 * size, 1, 0, slow, DOPPLER_GATE);
    }
    if (state[3]! < 0) state[3] = 0;
  }

  /** Takes in one scalar observation whose P H' stands in #seen. */
  #take(
    innovation: number,
    variance: number,
    record: Float64Array | null,
    at: number,
    first: number,
    second: number,
    third: number,
    gate: number,
  ): void {
    const g = this.#seen;
    const { state } = this;
    const square = innovation * innovation;
    const ratio = square / variance;
    const s = ratio > gate ? square / gate : variance;
    this.deviance += Math.log(variance) + (ratio > TAIL_FROM ? TAIL_FROM + TAIL * Math.log(ratio / TAIL_FROM) : ratio);
    const inverse = 1 / s;
    const scaled = innovation * inverse;
    for (let m = 0; m < STATES; m++) state[m]! += g[m]! * scaled;
    subtractOuter(this.covariance, g, inverse);
    if (record !== null) {
      for (let m = 0; m < STATES; m++) record[at + m] = g[m]! * inverse;
      record[at + STATES] = scaled;
      record[at + STATES + 1] = inverse;
      record[at + STATES + 2] = first;
      record[at + STATES + 3] = second;
      record[at + STATES + 4] = third;
    }
  }
}

/** Did the filter start afresh at the fix or just before it? It is not to be chopped into single fixes. */
function startedNear(use: Uint8Array, i: number): boolean {
  for (let k = i; k >= Math.max(0, i - 2); k--) if ((use[k]! & USE.RESTART) !== 0) return true;
  return false;
}

/** whole := next whole, both in the sparse form of predictCovariance (the form is closed under composition). */
function compose(whole: Float64Array, next: Float64Array): void {
  const thetaV = whole[10]!;
  const thetaA = whole[11]!;
  const thetaKappa = whole[12]!;
  const thetaC = whole[13]!;
  const vA = whole[14]!;
  const kappaC = whole[15]!;
  const decayA = whole[16]!;
  const decayC = whole[17]!;
  for (let row = 0; row < 10; row += 5) {
    const byTheta = next[row]!;
    const byV = next[row + 1]!;
    const byKappa = next[row + 3]!;
    whole[row]! += byTheta;
    whole[row + 1]! += byTheta * thetaV + byV;
    whole[row + 2]! += byTheta * thetaA + byV * vA + next[row + 2]! * decayA;
    whole[row + 3]! += byTheta * thetaKappa + byKappa;
    whole[row + 4]! += byTheta * thetaC + byKappa * kappaC + next[row + 4]! * decayC;
  }
  whole[10] = thetaV + next[10]!;
  whole[11] = thetaA + next[10]! * vA + next[11]! * decayA;
  whole[12] = thetaKappa + next[12]!;
  whole[13] = thetaC + next[12]! * kappaC + next[13]! * decayC;
  whole[14] = vA + next[14]! * decayA;
  whole[15] = kappaC + next[15]! * decayC;
  whole[16] = decayA * next[16]!;
  whole[17] = decayC * next[17]!;
  whole[18]! *= next[18]!;
}

/** out := P H' for H = cos on X, sin on Y. */
function column2(p: Float64Array, cos: number, sin: number, out: Float64Array): void {
  out[0] = cos * p[0]! + sin * p[1]!;
  out[1] = cos * p[1]! + sin * p[2]!;
  out[2] = cos * p[3]! + sin * p[4]!;
  out[3] = cos * p[6]! + sin * p[7]!;
  out[4] = cos * p[10]! + sin * p[11]!;
  out[5] = cos * p[15]! + sin * p[16]!;
  out[6] = cos * p[21]! + sin * p[22]!;
  out[7] = cos * p[28]! + sin * p[29]!;
}

/** out := P H' for H = 1 on theta, `slow` on the slow cross-track Doppler error. */
function columnCourse(p: Float64Array, slow: number, out: Float64Array): void {
  out[0] = p[3]! + slow * p[28]!;
  out[1] = p[4]! + slow * p[29]!;
  out[2] = p[5]! + slow * p[30]!;
  out[3] = p[8]! + slow * p[31]!;
  out[4] = p[12]! + slow * p[32]!;
  out[5] = p[17]! + slow * p[33]!;
  out[6] = p[23]! + slow * p[34]!;
  out[7] = p[30]! + slow * p[35]!;
}
