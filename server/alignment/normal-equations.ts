import type { StretchFit } from './fit-stretch.ts';
import type { PointNoise } from './noise.ts';
import type { NormalPoints } from './points.ts';
import { changeLength, headingAt, type Layout, type Stretch } from './stretch-model.ts';

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
  #breaks = new Float64Array(0);
  #gradient = new Float64Array(0);
  #xColumn = new Float64Array(0);
  #yColumn = new Float64Array(0);
  #bx = new Float64Array(0);
  #by = new Float64Array(0);
  #z = new Float64Array(0);

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
      this.#gradient = new Float64Array(most);
      this.#xColumn = new Float64Array(most);
      this.#yColumn = new Float64Array(most);
      this.#bx = new Float64Array(most);
      this.#by = new Float64Array(most);
      this.#z = new Float64Array(most);
      this.A = new Float64Array(most * most);
      this.g = new Float64Array(most);
    }
  }

  /** Ends of all changes in ascending order; returns how many. */
  #layBreaks({ middles, squares }: Stretch): number {
    if (this.#breaks.length < 2 * middles.length) this.#breaks = new Float64Array(4 * middles.length);
    for (let j = 0; j < middles.length; j++) {
      const L = changeLength(squares[j]!);
      this.#breaks[2 * j] = middles[j]! - L / 2;
      this.#breaks[2 * j + 1] = middles[j]! + L / 2;
    }
    return 2 * middles.length;
  }

  /** Residuals and derivatives at the points of the window. `pose` is x0, y0, theta0 relative to the origin. */
  linearise(stretch: Stretch, layout: Layout, pose: Float64Array, origin: Origin): void {
    const { first, end } = this;
    const points = this.#points;
    const { size } = layout;
    this.#reserve(end - first, size);
    const columns = size + 1;
    const gradient = this.#gradient;
    const dx = this.#xColumn;
    const dy = this.#yColumn;
    dx.fill(0);
    dy.fill(0);
    const theta0 = origin.headingRad + pose[2]!;
    let x = origin.xM + pose[0]! * Math.cos(origin.headingRad) - pose[1]! * Math.sin(origin.headingRad);
    let y = origin.yM + pose[0]! * Math.sin(origin.headingRad) + pose[1]! * Math.cos(origin.headingRad);
    const [c0, s0] = [Math.cos(origin.headingRad), Math.sin(origin.headingRad)];
    let at = stretch.fromM;
    let sharpest = 1e-6;
    for (const k of stretch.levels) sharpest = Math.max(sharpest, Math.abs(k));
    // Two-point Gauss quadrature between the ends of changes, where everything is smooth: error of a step h below 2e-6 h.
    const longest = 0.35 / sharpest;
    const half = 0.5 / Math.sqrt(3);
    const breaks = this.#layBreaks(stretch);
    const lastBreak = breaks > 0 ? this.#breaks[breaks - 1]! : Infinity;
    let next = 0;
    for (let i = first; i < end; i++) {
      const row = (i - first) * columns;
      const target = points.chainageM[i]!;
      while (at !== target) {
        while (next < breaks && this.#breaks[next]! <= at) next++;
        const pieceEnd = target > at && next < breaks ? Math.min(target, this.#breaks[next]!) : target;
        const straight = next === 0 || at >= lastBreak;
        const steps = straight ? 1 : Math.max(1, Math.ceil((pieceEnd - at) / longest));
        const step = (pieceEnd - at) / steps;
        for (let k = 0; k < steps; k++) {
          // On a straight nothing varies: one place stands for the piece.
          for (let side = straight ? 2 : 0; side < (straight ? 3 : 2); side++) {
            const s = at + (k + 0.5 + (side === 2 ? 0 : side === 0 ? -half : half)) * step;
            const theta = theta0 + headingAt(stretch, layout, s, gradient);
            const weight = side === 2 ? step : 0.5 * step;
            const c = Math.cos(theta) * weight;
            const n = Math.sin(theta) * weight;
            x += c;
            y += n;
            dx[2]! -= n;
            dy[2]! += c;
            for (let p = 3; p < size; p++) {
              const d = gradient[p]!;
              if (d === 0) continue;
              dx[p]! -= n * d;
              dy[p]! += c * d;
            }
          }
        }
        at = pieceEnd;
      }
      const ref = points.referenceRad[i]!;
      const [nx, ny] = [-Math.sin(ref), Math.cos(ref)];
      const across = this.#across;
      const along = this.#along;
      across[row] = nx * c0 + ny * s0;
      across[row + 1] = -nx * s0 + ny * c0;
      along[row] = ny * c0 - nx * s0;
      along[row + 1] = -ny * s0 - nx * c0;
      for (let p = 2; p < size; p++) {
        across[row + p] = nx * dx[p]! + ny * dy[p]!;
        along[row + p] = ny * dx[p]! - nx * dy[p]!;
      }
      const ex = points.xM[i]! - x;
      const ey = points.yM[i]! - y;
      across[row + size] = nx * ex + ny * ey;
      along[row + size] = ny * ex - nx * ey;
      const theta = theta0 + headingAt(stretch, layout, target, gradient);
      const v = points.speedMps[i]!;
      const course = this.#course;
      course[row] = 0;
      course[row + 1] = 0;
      course[row + 2] = v;
      for (let p = 3; p < size; p++) course[row + p] = v * gradient[p]!;
      course[row + size] = v * (points.headingRad[i]! - theta);
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
        if (updateFactors) factors[i - first] = Math.max(1, (e * e) / (GATE * GATE * S0));
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
      if (updateFactors) this.#courseFactor[i - first] = Math.max(1, (e * e) / (GATE * GATE * S0));
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
    this.logDet += Math.log(S);
    this.observations++;
  }

  /** Share of the points of a range of chainage whose position or course counts at nearly full weight. */
  goodShare(fromM: number, toM: number): number {
    const points = this.#points;
    let good = 0;
    let all = 0;
    for (let i = this.first; i < this.end; i++) {
      const s = points.chainageM[i]!;
      if (s < fromM || s > toM) continue;
      all++;
      const k = i - this.first;
      const position = points.positionShare[i]! > 0 && this.#acrossFactor[k]! < 3;
      const course = points.courseShare[i]! > 0 && this.#courseFactor[k]! < 3;
      if (position || course) good++;
    }
    return all === 0 ? NaN : good / all;
  }
}
