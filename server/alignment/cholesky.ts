/**
 * Solves A x = g and inverts A for a symmetric positive matrix given by its lower triangle (row-major, n x n).
 * Rows are scaled to a unit diagonal first, since entries differ by ten orders of magnitude.
 * Buffers grow and are kept.
 */
export class Cholesky {
  #n = 0;
  #L = new Float64Array(0);
  #scale = new Float64Array(0);
  #work = new Float64Array(0);

  /** Factorises A + damping * diag(A); false when it is not positive definite. */
  factor(A: Float64Array, n: number, damping: number): boolean {
    this.#n = n;
    if (this.#L.length < n * n) {
      this.#L = new Float64Array(2 * n * n);
      this.#scale = new Float64Array(2 * n);
      this.#work = new Float64Array(2 * n);
    }
    const L = this.#L;
    const scale = this.#scale;
    for (let i = 0; i < n; i++) {
      const d = A[i * n + i]!;
      if (!(d > 0)) return false;
      scale[i] = 1 / Math.sqrt(d);
    }
    for (let i = 0; i < n; i++) {
      for (let j = 0; j <= i; j++) {
        let sum = A[i * n + j]! * scale[i]! * scale[j]!;
        if (i === j) sum += damping + 1e-12;
        for (let k = 0; k < j; k++) sum -= L[i * n + k]! * L[j * n + k]!;
        if (i !== j) L[i * n + j] = sum / L[j * n + j]!;
        else if (sum > 1e-13) L[i * n + i] = Math.sqrt(sum);
        else return false;
      }
    }
    return true;
  }

  /** x with A x = g. */
  solve(g: Float64Array, x: Float64Array): void {
    const n = this.#n;
    const L = this.#L;
    const scale = this.#scale;
    const y = this.#work;
    for (let i = 0; i < n; i++) {
      let sum = g[i]! * scale[i]!;
      for (let k = 0; k < i; k++) sum -= L[i * n + k]! * y[k]!;
      y[i] = sum / L[i * n + i]!;
    }
    for (let i = n - 1; i >= 0; i--) {
      let sum = y[i]!;
      for (let k = i + 1; k < n; k++) sum -= L[k * n + i]! * y[k]!;
      y[i] = sum / L[i * n + i]!;
    }
    for (let i = 0; i < n; i++) x[i] = y[i]! * scale[i]!;
  }

  /** Full inverse of A, row-major. */
  inverse(): Float64Array {
    const n = this.#n;
    const out = new Float64Array(n * n);
    const unit = new Float64Array(n);
    const x = new Float64Array(n);
    for (let j = 0; j < n; j++) {
      unit.fill(0);
      unit[j] = 1;
      this.solve(unit, x);
      for (let i = 0; i < n; i++) out[i * n + j] = x[i]!;
    }
    return out;
  }

  /** Logarithm of det A (damping included). */
  logDet(): number {
    let sum = 0;
    for (let i = 0; i < this.#n; i++) sum += 2 * (Math.log(this.#L[i * this.#n + i]!) - Math.log(this.#scale[i]!));
    return sum;
  }
}
