import { changeLength, levelAfter, levelBefore, type Layout, type Stretch } from './stretch-model.ts';

/** A step of integration turns by no more than this, rad: Simpson's rule then errs by 1e-5 of the step's length. */
const LARGEST_TURN_RAD = 0.25;

/**
 * Walks along a stretch from its beginning: position and heading with their derivatives by all parameters.
 * Steps end where changes of curvature begin and end, so that within each the heading is a polynomial.
 * Buffers grow and are kept.
 */
export class LineWalk {
  x = 0;
  y = 0;
  /** Heading, rad, and its derivatives by the parameters from the levels on (that by theta0 is one). */
  theta = 0;
  gradient = new Float64Array(0);
  /** Derivatives of x and y; entries 0 and 1 (of x0 and y0) are left at zero. */
  dx = new Float64Array(0);
  dy = new Float64Array(0);
  #middle = new Float64Array(0);
  #at = 0;
  #theta0 = 0;
  #size = 0;
  #changes = 0;
  /** Piece the walk is in: 0 before the first change, 2j + 1 inside change j, 2j + 2 beyond it. */
  #piece = 0;
  #sin = 0;
  #cos = 1;
  #from = new Float64Array(0);
  #length = new Float64Array(0);
  #step = new Float64Array(0);
  #sharp = new Float64Array(0);
  #before = new Int32Array(0);
  #after = new Int32Array(0);
  #parameter = new Int32Array(0);

  /** Stands at the beginning of a stretch with the given position and heading. */
  begin(stretch: Stretch, layout: Layout, x: number, y: number, theta0: number): void {
    const n = stretch.middles.length;
    this.#reserve(layout.size, n);
    this.#changes = n;
    this.#size = layout.size;
    for (let j = 0; j < n; j++) {
      const L = changeLength(stretch.squares[j]!);
      const before = levelBefore(stretch, j);
      const after = levelAfter(stretch, j);
      this.#from[j] = stretch.middles[j]! - L / 2;
      this.#length[j] = L;
      this.#step[j] = after - before;
      this.#sharp[2 * j + 1] = Math.max(Math.abs(before), Math.abs(after));
      this.#sharp[2 * j + 2] = Math.abs(after);
      this.#before[j] = j > 0 ? layout.level[j - 1]! : -1;
      this.#after[j] = j < n - 1 ? layout.level[j]! : -1;
      this.#parameter[j] = layout.middle[j]!;
    }
    this.x = x;
    this.y = y;
    this.#theta0 = theta0;
    this.theta = theta0;
    this.#at = stretch.fromM;
    this.#piece = 0;
    this.#sin = Math.sin(theta0);
    this.#cos = Math.cos(theta0);
    this.dx.fill(0, 0, this.#size);
    this.dy.fill(0, 0, this.#size);
    this.gradient.fill(0, 0, this.#size);
  }

  /** Goes to chainage `target`, not before where it stands. */
  advance(target: number): void {
    while (this.#at < target) {
      const boundary = this.#endOfPiece();
      if (boundary <= this.#at) {
        this.#piece++;
        continue;
      }
      const to = Math.min(target, boundary);
      const length = to - this.#at;
      const steps = Math.max(1, Math.ceil((length * this.#sharp[this.#piece]!) / LARGEST_TURN_RAD));
      for (let k = 0; k < steps; k++) this.#integrate(length / steps);
      this.#at = to;
    }
  }

  #endOfPiece(): number {
    const j = this.#piece >> 1;
    if (j >= this.#changes) return Infinity;
    return (this.#piece & 1) === 0 ? this.#from[j]! : this.#from[j]! + this.#length[j]!;
  }

  /** Simpson's rule over one step; the gradient of its end is the beginning of the next. */
  #integrate(step: number): void {
    const { dx, dy } = this;
    const size = this.#size;
    const w = step / 6;
    // Before the first change nothing depends on levels and changes yet.
    const used = this.#piece === 0 ? 3 : size;
    const [s0, c0] = [w * this.#sin, w * this.#cos];
    for (let p = 3; p < used; p++) {
      const d = this.gradient[p]!;
      dx[p]! -= s0 * d;
      dy[p]! += c0 * d;
    }
    const middle = this.#heading(this.#at + step / 2, this.#middle);
    const [sm, cm] = [4 * w * Math.sin(middle), 4 * w * Math.cos(middle)];
    this.theta = this.#heading(this.#at + step, this.gradient);
    this.#sin = Math.sin(this.theta);
    this.#cos = Math.cos(this.theta);
    const [s1, c1] = [w * this.#sin, w * this.#cos];
    for (let p = 3; p < used; p++) {
      const m = this.#middle[p]!;
      const d = this.gradient[p]!;
      dx[p]! -= sm * m + s1 * d;
      dy[p]! += cm * m + c1 * d;
    }
    const north = s0 + sm + s1;
    const east = c0 + cm + c1;
    this.x += east;
    this.y += north;
    dx[2]! -= north;
    dy[2]! += east;
    this.#at += step;
  }

  /** Heading at s within the present piece, and its derivatives. */
  #heading(s: number, gradient: Float64Array): number {
    const last = (this.#piece + 1) >> 1;
    let theta = this.#theta0;
    gradient.fill(0, 3, this.#size);
    for (let j = 0; j < last; j++) {
      const L = this.#length[j]!;
      const w = s - this.#from[j]!;
      const step = this.#step[j]!;
      const inside = 2 * j + 1 === this.#piece;
      const R1 = inside ? (w * w) / (2 * L) : w - L / 2;
      theta += step * R1;
      const after = this.#after[j]!;
      const before = this.#before[j]!;
      if (after >= 0) gradient[after]! += R1;
      if (before >= 0) gradient[before]! -= R1;
      const m = this.#parameter[j]!;
      gradient[m] = inside ? (-step * w) / L : -step;
      // d R1 / d u = (w / (2 L) - w^2 / (2 L^2)) / (2 L) inside the change, zero beyond it.
      if (inside) gradient[m + 1] = (step * (w / (2 * L) - (w * w) / (2 * L * L))) / (2 * L);
    }
    return theta;
  }

  #reserve(size: number, changes: number): void {
    if (this.dx.length < size) {
      const most = 2 * size;
      this.dx = new Float64Array(most);
      this.dy = new Float64Array(most);
      this.gradient = new Float64Array(most);
      this.#middle = new Float64Array(most);
    }
    if (this.#from.length < changes) {
      const most = 2 * changes;
      this.#from = new Float64Array(most);
      this.#length = new Float64Array(most);
      this.#step = new Float64Array(most);
      this.#sharp = new Float64Array(2 * most + 1);
      this.#before = new Int32Array(most);
      this.#after = new Int32Array(most);
      this.#parameter = new Int32Array(most);
    }
  }
}
