import { PACKED, STATES, predictAdjoint, predictAdjointVector, timesVector } from './covariance-kernels.ts';
import type { Reference } from './motion-filter.ts';
import { MotionFilter, RECORD, SEEN } from './motion-filter.ts';
import type { Observations } from './observations.ts';
import type { Parameters } from './parameters.ts';

/** Fixes between checkpoints: one block's records fit in a processor's second-level cache. */
const BLOCK = 128;
/** Numbers of a checkpoint: state, covariance, count of misses. */
const CHECKPOINT = STATES + PACKED + 1;

/** What is kept of each fix on the way back. Called from the last fix to the first. */
export interface FixSink {
  /**
   * @param i fix
   * @param state smoothed state (8)
   * @param record records of the block: predicted covariance, transition and observations of fix i start at `at` (see RECORD)
   * @param lambda adjoint vector and Lambda its covariance at the predicted state of fix i, so that the smoothed
   *   covariance is P - P Lambda P and the smoothed disturbance of the step into i is -Q lambda
   */
  (i: number, state: Float64Array, record: Float64Array, at: number, lambda: Float64Array, Lambda: Float64Array): void;
}

/**
 * Fixed-interval smoother in the adjoint form of Bryson and Frazier, which never inverts a covariance and so does not mind the
 * singular process noise of a standstill. Two sweeps forward (the second block by block, from checkpoints) and one back;
 * memory grows by PACKED + STATES numbers a block only.
 *
 * @returns false when a sweep was not finite (nothing more reaches the sink then)
 */
export function smooth(
  observations: Observations,
  parameters: Parameters,
  reference: Reference | null,
  gate: number,
  sink: FixSink,
  onBlock: (share: number) => void,
): boolean {
  const { count } = observations;
  const blocks = Math.ceil(count / BLOCK);
  const checkpoints = new Float64Array(blocks * CHECKPOINT);
  const filter = new MotionFilter(observations, parameters, reference, gate);
  const { state, covariance } = filter;
  for (let b = 0; b < blocks; b++) {
    checkpoints.set(state, b * CHECKPOINT);
    checkpoints.set(covariance, b * CHECKPOINT + STATES);
    checkpoints.set(filter.missed, b * CHECKPOINT + STATES + PACKED);
    filter.advance(b * BLOCK, Math.min(count, (b + 1) * BLOCK), null);
    if (!Number.isFinite(state[0]! + state[2]! + state[3]! + state[5]! + covariance[20]!)) {
      return false;
    }
    if ((b & 63) === 0) onBlock((0.4 * b) / blocks);
  }

  const record = new Float64Array(BLOCK * RECORD.SIZE);
  const lambda = new Float64Array(STATES);
  const Lambda = new Float64Array(PACKED);
  const u = new Float64Array(STATES);
  const smoothed = new Float64Array(STATES);
  for (let b = blocks - 1; b >= 0; b--) {
    const from = b * BLOCK;
    const to = Math.min(count, from + BLOCK);
    const at0 = b * CHECKPOINT;
    state.set(checkpoints.subarray(at0, at0 + STATES));
    covariance.set(checkpoints.subarray(at0 + STATES, at0 + STATES + PACKED));
    filter.missed.set(checkpoints.subarray(at0 + STATES + PACKED, at0 + CHECKPOINT));
    filter.advance(from, to, record);
    for (let i = to - 1; i >= from; i--) {
      const at = (i - from) * RECORD.SIZE;
      for (let kind = 3; kind >= 0; kind--) {
        const o = at + RECORD.OBSERVATIONS + kind * RECORD.OBSERVATION_SIZE;
        if (record[o + STATES + 1]! > 0) takeBack(record, o, SEEN[kind]!, lambda, Lambda, u);
      }
      timesPacked(record, at + RECORD.COVARIANCE, lambda, smoothed);
      for (let m = 0; m < STATES; m++) smoothed[m] = record[at + m]! - smoothed[m]!;
      if (!Number.isFinite(smoothed[0]! + smoothed[2]! + smoothed[5]!)) {
        return false;
      }
      sink(i, smoothed, record, at, lambda, Lambda);
      if (record[at + RECORD.STARTS] === 1) {
        lambda.fill(0);
        Lambda.fill(0);
      } else {
        predictAdjointVector(lambda, record, at + RECORD.TRANSITION);
        predictAdjoint(Lambda, record, at + RECORD.TRANSITION);
      }
    }
    if ((b & 63) === 0) onBlock(1 - (0.6 * b) / blocks);
  }
  return true;
}

/** lambda := (I - K H)' lambda - H' e/S and Lambda := (I - K H)' Lambda (I - K H) + H' H / S for one recorded observation. */
function takeBack(
  record: Float64Array,
  o: number,
  seen: readonly [number, number, number],
  lambda: Float64Array,
  Lambda: Float64Array,
  u: Float64Array,
): void {
  let dot = record[o + STATES]!;
  for (let m = 0; m < STATES; m++) dot += record[o + m]! * lambda[m]!;
  timesVector(Lambda, record, o, u);
  let s = record[o + STATES + 1]!;
  for (let m = 0; m < STATES; m++) s += record[o + m]! * u[m]!;
  for (let e = 0; e < 3; e++) {
    const h = record[o + STATES + 2 + e]!;
    if (h === 0) continue;
    lambda[seen[e]!]! -= h * dot;
    u[seen[e]!]! -= 0.5 * s * h;
  }
  for (let e = 0; e < 3; e++) {
    const h = record[o + STATES + 2 + e]!;
    if (h === 0) continue;
    const row = seen[e]!;
    const start = (row * (row + 1)) / 2;
    for (let n = 0; n < row; n++) Lambda[start + n]! -= h * u[n]!;
    Lambda[start + row]! -= 2 * h * u[row]!;
    for (let n = row + 1; n < STATES; n++) Lambda[(n * (n + 1)) / 2 + row]! -= h * u[n]!;
  }
}

/** out := P x with P packed at `at` of `p`. */
function timesPacked(p: Float64Array, at: number, x: Float64Array, out: Float64Array): void {
  out.fill(0);
  let k = at;
  for (let i = 0; i < STATES; i++) {
    const xi = x[i]!;
    let sum = 0;
    for (let j = 0; j < i; j++, k++) {
      const pij = p[k]!;
      sum += pij * x[j]!;
      out[j]! += pij * xi;
    }
    out[i] = sum + p[k]! * xi;
    k++;
  }
}

const columnI = new Float64Array(STATES);
const timesI = new Float64Array(STATES);

/** Element (r, c) of P - P Lambda P, for several pairs; `pairs` alternates r and c. */
export function smoothedCovariances(
  record: Float64Array,
  at: number,
  Lambda: Float64Array,
  pairs: readonly (readonly [number, readonly number[]])[],
  out: Float64Array,
): void {
  let n = 0;
  for (const [c, rows] of pairs) {
    packedColumn(record, at + RECORD.COVARIANCE, c, columnI);
    timesVector(Lambda, columnI, 0, timesI);
    for (const r of rows) {
      let sum = record[at + RECORD.COVARIANCE + packedIndex(r, c)]!;
      for (let m = 0; m < STATES; m++) sum -= record[at + RECORD.COVARIANCE + packedIndex(r, m)]! * timesI[m]!;
      out[n++] = sum;
    }
  }
}

function packedIndex(i: number, j: number): number {
  return i >= j ? (i * (i + 1)) / 2 + j : (j * (j + 1)) / 2 + i;
}

function packedColumn(p: Float64Array, at: number, c: number, out: Float64Array): void {
  for (let i = 0; i < STATES; i++) out[i] = p[at + packedIndex(i, c)]!;
}
