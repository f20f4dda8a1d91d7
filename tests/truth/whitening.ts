/** One Gauss-Markov part of the error of each horizontal axis. */
interface SlowError {
  readonly sigma: number;
  readonly tauS: number;
}

/** Error of a pair of horizontal axes: white plus any number of Gauss-Markov parts, all independent and isotropic. */
export interface AxisError {
  readonly sigmaWhite: number;
  readonly slow: readonly SlowError[];
}

/** Information about P parameters: A = J' V^-1 J, g = J' V^-1 r, chi2 = r' V^-1 r. */
export interface Information {
  readonly size: number;
  readonly matrix: Float64Array;
  readonly gradient: Float64Array;
  chi2: number;
}

export function emptyInformation(size: number): Information {
  return { size, matrix: new Float64Array(size * size), gradient: new Float64Array(size), chi2: 0 };
}

/**
 * Exact generalised least squares for scalar readings z = J p + h . e(t) + white, where e is a two-axis error
 * with Gauss-Markov parts: every column and the residual pass through the same Kalman filter of the slow parts
 * (innovations form: V^-1 is never formed). Readings must come in order of time; several may share an instant.
 */
export class Whitener {
  readonly #error: AxisError;
  readonly #states: number;
  readonly #columns: number;
  readonly #covariance: Float64Array;
  /** Predicted slow error of each column and, last, of the residual. */
  readonly #bias: Float64Array;
  readonly #direction: Float64Array;
  readonly #gain: Float64Array;
  readonly #innovation: Float64Array;
  #time = Number.NaN;

  constructor(error: AxisError, columns: number) {
    this.#error = error;
    this.#states = 2 * error.slow.length;
    this.#columns = columns;
    this.#covariance = new Float64Array(this.#states ** 2);
    error.slow.forEach((part, k) => {
      this.#covariance[2 * k * (this.#states + 1)] = part.sigma ** 2;
      this.#covariance[(2 * k + 1) * (this.#states + 1)] = part.sigma ** 2;
    });
    this.#bias = new Float64Array(this.#states * (columns + 1));
    this.#direction = new Float64Array(this.#states);
    this.#gain = new Float64Array(this.#states);
    this.#innovation = new Float64Array(columns + 1);
  }

  /**
   * Adds one reading.
   *
   * @param hx @param hy direction (unit vector) in which the two-axis error is seen
   * @param row derivatives of the reading with respect to the parameters
   */
  add(timeS: number, hx: number, hy: number, row: ArrayLike<number>, residual: number, out: Information): void {
    const n = this.#states;
    const P = this.#covariance;
    const b = this.#bias;
    const h = this.#direction;
    const width = this.#columns + 1;
    if (timeS > this.#time) this.#predict(timeS - this.#time);
    this.#time = timeS;
    for (let k = 0; k < n; k += 2) {
      h[k] = hx;
      h[k + 1] = hy;
    }
    let variance = this.#error.sigmaWhite ** 2;
    for (let i = 0; i < n; i += 1) {
      let sum = 0;
      for (let j = 0; j < n; j += 1) sum += P[i * n + j]! * h[j]!;
      this.#gain[i] = sum;
      variance += sum * h[i]!;
    }
    const z = this.#innovation;
    for (let c = 0; c < width; c += 1) {
      let predicted = 0;
      for (let i = 0; i < n; i += 1) predicted += h[i]! * b[c * n + i]!;
      z[c] = (c < this.#columns ? row[c]! : residual) - predicted;
      for (let i = 0; i < n; i += 1) b[c * n + i]! += (this.#gain[i]! / variance) * z[c]!;
    }
    for (let i = 0; i < n; i += 1) {
      for (let j = 0; j < n; j += 1) P[i * n + j]! -= (this.#gain[i]! * this.#gain[j]!) / variance;
    }
    const r = z[this.#columns]!;
    for (let i = 0; i < this.#columns; i += 1) {
      const weighted = z[i]! / variance;
      if (weighted === 0) continue;
      for (let j = 0; j < this.#columns; j += 1) out.matrix[i * out.size + j]! += weighted * z[j]!;
      out.gradient[i]! += weighted * r;
    }
    out.chi2 += (r * r) / variance;
  }

  #predict(dtS: number): void {
    const n = this.#states;
    const rho = this.#error.slow.flatMap((part) => {
      const value = Math.exp(-dtS / part.tauS);
      return [value, value];
    });
    for (let i = 0; i < n; i += 1) {
      for (let j = 0; j < n; j += 1) this.#covariance[i * n + j]! *= rho[i]! * rho[j]!;
      const sigma = this.#error.slow[i >> 1]!.sigma;
      this.#covariance[i * n + i]! += (1 - rho[i]! ** 2) * sigma ** 2;
    }
    for (let c = 0; c <= this.#columns; c += 1) {
      for (let i = 0; i < n; i += 1) this.#bias[c * n + i]! *= rho[i]!;
    }
  }
}

/**
 * Inverse of a symmetric positive definite matrix, scaled to unit diagonal first (parameters of very different size).
 *
 * @returns the inverse, or null when a parameter is not determined
 */
export function invertInformation(matrix: Float64Array, size: number): Float64Array | null {
  const scale = Float64Array.from({ length: size }, (_, i) => 1 / Math.sqrt(matrix[i * size + i]!));
  if (!scale.every((value) => Number.isFinite(value))) return null;
  const lower = new Float64Array(size * size);
  for (let i = 0; i < size; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      let sum = matrix[i * size + j]! * scale[i]! * scale[j]! + (i === j ? 1e-13 : 0);
      for (let k = 0; k < j; k += 1) sum -= lower[i * size + k]! * lower[j * size + k]!;
      if (i === j) {
        if (!(sum > 1e-12)) return null;
        lower[i * size + i] = Math.sqrt(sum);
      } else lower[i * size + j] = sum / lower[j * size + j]!;
    }
  }
  const inverse = new Float64Array(size * size);
  const column = new Float64Array(size);
  for (let c = 0; c < size; c += 1) {
    for (let i = 0; i < size; i += 1) {
      let sum = i === c ? 1 : 0;
      for (let k = 0; k < i; k += 1) sum -= lower[i * size + k]! * column[k]!;
      column[i] = sum / lower[i * size + i]!;
    }
    for (let i = size - 1; i >= 0; i -= 1) {
      let sum = column[i]!;
      for (let k = i + 1; k < size; k += 1) sum -= lower[k * size + i]! * column[k]!;
      column[i] = sum / lower[i * size + i]!;
      inverse[i * size + c] = column[i]! * scale[i]! * scale[c]!;
    }
  }
  return inverse;
}
