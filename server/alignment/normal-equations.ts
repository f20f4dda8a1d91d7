import { wrapAngle } from '../estimate/motion-filter.ts';
import type { StretchFit } from './fit-stretch.ts';
import type { PointNoise } from './noise.ts';
import type { NormalPoints } from './points.ts';
import { LineWalk } from './line-walk.ts';
import type { Layout, Stretch } from './stretch-model.ts';

/** Beyond this many standard deviations a whitened residual is weighted down in the robust passes. */
const GATE = 3.5;
/** Variance of the along-track reading that the error of the smoothed chainage adds, m^2. */
const CHAINAGE_VARIANCE = 0.05;

/** Which observations a fit uses. */
export interface Use {
  /** Along-track residuals: only where the chainage rests on Doppler speed. */
  readonly along: boolean;
  readonly course: boolean;
}

/** Pose of the window's start in the plane of the run: what x0, y0 and theta0 are relative to. */
export interface Origin {
  readonly xM: number;
  readonly yM: number;
  readonly headingRad: number;
}

/** Residuals and derivatives of one stretch, as `NormalEquations.snapshot` keeps them. */
export interface Linearised {
  readonly first: number;
  readonly end: number;
  readonly size: number;
  readonly across: Float64Array;
  readonly along: Float64Array;
  readonly course: Float64Array;
}

/**
 * Model, derivatives and whitened normal equations of one stretch over its window of points.
 * Buffers are kept and grown: nothing is allocated per evaluation.
 *
 * Residuals across (and along) the track and v (course - theta) pass, together with every column of the
 * Jacobian, through Kalman filters of the Gauss-Markov errors: exact generalised least squares in O(n P^2).
 */
export class NormalEquations {
  #points: NormalPoints;
  first = 0;
  end = 0;
  size = 0;
  /** Information matrix, size x size, row-major, and right-hand side. */
  A = new Float64Array(0);
  g = new Float64Array(0);
  chi2 = 0;
  logDet = 0;
  /** Scalar observations used. */
  observations = 0;
  /** Columns (derivatives) then the residual: lateral, along, course, each point after point. */
  #across = new Float64Array(0);
  #along = new Float64Array(0);
  #course = new Float64Array(0);
  /** Robust variance factors, by point. */
  #acrossFactor = new Float64Array(0);
  #alongFactor = new Float64Array(0);
  #courseFactor = new Float64Array(0);
  #walk = new LineWalk();
  #bx = new Float64Array(0);
  #by = new Float64Array(0);
  #z = new Float64Array(0);
  #product = 1;
  /** Largest ratio between a robust factor and the one before, of the last update. */
  factorChange = 1;

  constructor(points: NormalPoints) {
    this.#points = points;
  }

  /** Begins a window of points [first, end); robust factors start at one. */
  open(first: number, end: number): void {
    this.first = first;
    this.end = end;
    const n = end - first;
    if (this.#acrossFactor.length < n) {
      this.#acrossFactor = new Float64Array(2 * n);
      this.#alongFactor = new Float64Array(2 * n);
      this.#courseFactor = new Float64Array(2 * n);
    }
    this.#acrossFactor.fill(1, 0, n);
    this.#alongFactor.fill(1, 0, n);
    this.#courseFactor.fill(1, 0, n);
  }

  #reserve(n: number, size: number): void {
    this.size = size;
    const columns = size + 1;
    if (this.#across.length < n * columns) {
      this.#across = new Float64Array(2 * n * columns);
      this.#along = new Float64Array(2 * n * columns);
      this.#course = new Float64Array(2 * n * columns);
    }
    if (this.#z.length < columns) {
      const most = columns + 16;
      this.#bx = new Float64Array(most);
      this.#by = new Float64Array(most);
      this.#z = new Float64Array(most);
      this.A = new Float64Array(most * most);
      this.g = new Float64Array(most);
    }
  }

  /** Residuals and derivatives at the points of the window. `pose` is x0, y0, theta0 relative to the origin. */
  linearise(stretch: Stretch, layout: Layout, pose: Float64Array, origin: Origin): void {
    const { first, end } = this;
    const points = this.#points;
    const { size } = layout;
    this.#reserve(end - first, size);
    const columns = size + 1;
    const course = this.#course;
    const across = this.#across;
    const along = this.#along;
    const walk = this.#walk;
    const [c0, s0] = [Math.cos(origin.headingRad), Math.sin(origin.headingRad)];
    walk.begin(
      stretch,
      layout,
      origin.xM + pose[0]! * c0 - pose[1]! * s0,
      origin.yM + pose[0]! * s0 + pose[1]! * c0,
      origin.headingRad + pose[2]!,
    );
    const { dx, dy } = walk;
    for (let i = first; i < end; i++) {
      const row = (i - first) * columns;
      walk.advance(points.chainageM[i]!);
      const ref = points.referenceRad[i]!;
      const [nx, ny] = [-Math.sin(ref), Math.cos(ref)];
      across[row] = nx * c0 + ny * s0;
      across[row + 1] = -nx * s0 + ny * c0;
      along[row] = ny * c0 - nx * s0;
      along[row + 1] = -ny * s0 - nx * c0;
      for (let p = 2; p < size; p++) {
        across[row + p] = nx * dx[p]! + ny * dy[p]!;
        along[row + p] = ny * dx[p]! - nx * dy[p]!;
      }
      const ex = points.xM[i]! - walk.x;
      const ey = points.yM[i]! - walk.y;
      across[row + size] = nx * ex + ny * ey;
      along[row + size] = ny * ex - nx * ey;
      const v = points.speedMps[i]!;
      const { gradient } = walk;
      course[row] = 0;
      course[row + 1] = 0;
      course[row + 2] = v;
      for (let p = 3; p < size; p++) course[row + p] = v * gradient[p]!;
      course[row + size] = v * wrapAngle(points.headingRad[i]! - walk.theta);
    }
  }

  /** Residuals and derivatives of a fit at its solution, kept apart so that several can be whitened again and again. */
  snapshot(fit: StretchFit): Linearised {
    this.open(fit.first, fit.end);
    this.linearise(fit.stretch, fit.layout, fit.pose, fit.origin);
    const used = (fit.end - fit.first) * (this.size + 1);
    return {
      first: fit.first,
      end: fit.end,
      size: this.size,
      across: this.#across.slice(0, used),
      along: this.#along.slice(0, used),
      course: this.#course.slice(0, used),
    };
  }

  /** Puts a snapshot where `whiten` reads. */
  load(state: Linearised): void {
    this.open(state.first, state.end);
    this.#reserve(state.end - state.first, state.size);
    this.#across.set(state.across);
    this.#along.set(state.along);
    this.#course.set(state.course);
  }

  /** Whitens what `linearise` left and sums the normal equations. */
  whiten(noise: PointNoise, use: Use, updateFactors: boolean): void {
    const { first, end, size } = this;
    const points = this.#points;
    const columns = size + 1;
    const z = this.#z;
    const bx = this.#bx;
    const by = this.#by;
    this.A.fill(0, 0, size * size);
    this.g.fill(0, 0, size);
    this.chi2 = 0;
    this.logDet = 0;
    this.observations = 0;
    this.factorChange = 1;
    bx.fill(0);
    by.fill(0);
    let [pxx, pxy, pyy] = [noise.wander, 0, noise.wander];
    let last = NaN;
    for (let i = first; i < end; i++) {
      const share = points.positionShare[i]!;
      if (share === 0) continue;
      const row = (i - first) * columns;
      const t = points.timeS[i]!;
      if (!Number.isNaN(last)) {
        const rho = Math.exp(-(t - last) / noise.wanderTimeS);
        const grown = (1 - rho * rho) * noise.wander;
        pxx = rho * rho * pxx + grown;
        pyy = rho * rho * pyy + grown;
        pxy *= rho * rho;
        for (let p = 0; p < columns; p++) {
          bx[p]! *= rho;
          by[p]! *= rho;
        }
      }
      last = t;
      const ref = points.referenceRad[i]!;
      const [cos, sin] = [Math.cos(ref), Math.sin(ref)];
      for (let axis = 0; axis < (use.along ? 2 : 1); axis++) {
        const hx = axis === 0 ? -sin : cos;
        const hy = axis === 0 ? cos : sin;
        const values = axis === 0 ? this.#across : this.#along;
        const factors = axis === 0 ? this.#acrossFactor : this.#alongFactor;
        const kx = pxx * hx + pxy * hy;
        const ky = pxy * hx + pyy * hy;
        const white = noise.positionWhite * share + (axis === 0 ? 0 : CHAINAGE_VARIANCE);
        const S0 = hx * kx + hy * ky + white;
        const e = values[row + size]! - (hx * bx[size]! + hy * by[size]!);
        if (updateFactors) this.#update(factors, i - first, (e * e) / (GATE * GATE * S0));
        const S = S0 * factors[i - first]!;
        for (let p = 0; p < columns; p++) {
          const whitened = values[row + p]! - (hx * bx[p]! + hy * by[p]!);
          z[p] = whitened;
          bx[p]! += (kx / S) * whitened;
          by[p]! += (ky / S) * whitened;
        }
        pxx -= (kx * kx) / S;
        pxy -= (kx * ky) / S;
        pyy -= (ky * ky) / S;
        this.#add(z, S);
      }
    }
    if (use.course) this.#whitenCourse(noise, updateFactors);
    this.#closeProduct();
  }

  #whitenCourse(noise: PointNoise, updateFactors: boolean): void {
    const { first, end, size } = this;
    const points = this.#points;
    const columns = size + 1;
    const z = this.#z;
    const b = this.#bx;
    b.fill(0);
    let variance = noise.courseSlow;
    let last = NaN;
    for (let i = first; i < end; i++) {
      const share = points.courseShare[i]!;
      if (share === 0) continue;
      const row = (i - first) * columns;
      const t = points.timeS[i]!;
      if (!Number.isNaN(last)) {
        const rho = Math.exp(-(t - last) / noise.dopplerTimeS);
        variance = rho * rho * variance + (1 - rho * rho) * noise.courseSlow;
        for (let p = 0; p < columns; p++) b[p]! *= rho;
      }
      last = t;
      const white = Math.max(noise.courseWhite * share + noise.courseWhiteOfBin, 0.05 * noise.courseWhite * share);
      const S0 = variance + white;
      const e = this.#course[row + size]! - b[size]!;
      if (updateFactors) this.#update(this.#courseFactor, i - first, (e * e) / (GATE * GATE * S0));
      const S = S0 * this.#courseFactor[i - first]!;
      const gain = variance / S;
      for (let p = 0; p < columns; p++) {
        const whitened = this.#course[row + p]! - b[p]!;
        z[p] = whitened;
        b[p]! += gain * whitened;
      }
      variance -= gain * variance;
      this.#add(z, S);
    }
  }

  #update(factors: Float64Array, k: number, excess: number): void {
    const before = factors[k]!;
    const now = Math.max(1, excess);
    this.factorChange = Math.max(this.factorChange, now / before, before / now);
    factors[k] = now;
  }

  #add(z: Float64Array, S: number): void {
    const { size, A, g } = this;
    const e = z[size]! / S;
    for (let p = 0; p < size; p++) {
      const zp = z[p]!;
      if (zp === 0) continue;
      g[p]! += zp * e;
      const w = zp / S;
      const row = p * size;
      for (let q = 0; q <= p; q++) A[row + q]! += w * z[q]!;
    }
    this.chi2 += z[size]! * e;
    // Logarithms of products of a few dozen variances: one call instead of dozens.
    this.#product *= S;
    if (this.#product < 1e-200 || this.#product > 1e200) this.#closeProduct();
    this.observations++;
  }

  #closeProduct(): void {
    this.logDet += Math.log(this.#product);
    this.#product = 1;
  }
}
