import { describe, expect, it } from 'vitest';
import { seededStream } from '../../../data/synthetic/random.ts';
import { Cholesky } from '../../../server/alignment/cholesky.ts';
import { pointNoise } from '../../../server/alignment/noise.ts';
import { NormalEquations, type Linearised } from '../../../server/alignment/normal-equations.ts';
import type { NormalPoints } from '../../../server/alignment/points.ts';

const random = seededStream(8);
const COUNT = 9;
const SIZE = 4;

/** Points in a bend, with irregular times, one without position and one without course. */
function somePoints(): NormalPoints {
  const timeS = Float64Array.from([0, 1, 2, 3.5, 4, 9, 10, 11, 12.2]);
  const share = Float32Array.from([1, 1, 2.5, 1, 0, 1, 0.5, 1, 1]);
  return {
    count: COUNT,
    binS: 0,
    timeS,
    chainageM: timeS.map((t) => 12 * t),
    xM: timeS.map((t) => 12 * t),
    yM: timeS.map(() => 0),
    referenceRad: timeS.map((t) => 0.4 + 0.1 * t),
    headingRad: timeS.map(() => 0.4),
    speedMps: timeS.map(() => 12),
    positionShare: share,
    courseShare: share.map((value, i) => (i === 2 ? 0 : value)),
  };
}

const noise = pointNoise([Math.log(0.5), Math.log(0.05), Math.log(0.06), Math.log(0.05), Math.log(1.4)], 0);

type Matrix = number[][];

/** Gaussian elimination: the inverse and the logarithm of the determinant, independent of the code under test. */
function invert(matrix: Matrix): { inverse: Matrix; logDet: number } {
  const n = matrix.length;
  const rows = matrix.map((row, i) => [...row, ...Array.from({ length: n }, (_, j) => (i === j ? 1 : 0))]);
  let logDet = 0;
  for (let k = 0; k < n; k++) {
    const pivot = rows[k]![k]!;
    logDet += Math.log(pivot);
    for (let j = 0; j < 2 * n; j++) rows[k]![j]! /= pivot;
    for (let i = 0; i < n; i++) {
      if (i === k) continue;
      const factor = rows[i]![k]!;
      for (let j = 0; j < 2 * n; j++) rows[i]![j]! -= factor * rows[k]![j]!;
    }
  }
  return { inverse: rows.map((row) => row.slice(n)), logDet };
}

/** Values of one observation: derivatives, then the residual. */
type Observation = { readonly values: Float64Array; readonly at: number; readonly axis: readonly [number, number] };

/** J' V^-1 J, J' V^-1 e, e' V^-1 e and ln det V with the covariance written out. */
function dense(observations: readonly Observation[], covariance: Matrix) {
  const { inverse, logDet } = invert(covariance);
  const form = (p: number, q: number) =>
    observations.reduce(
      (sum, a, i) => sum + observations.reduce((s, b, j) => s + a.values[p]! * inverse[i]![j]! * b.values[q]!, 0),
      0,
    );
  return { form, logDet };
}

describe('normal equations under correlated errors', () => {
  const points = somePoints();
  const draw = () => Float64Array.from({ length: COUNT * (SIZE + 1) }, () => random.normal());
  const state: Linearised = { first: 0, end: COUNT, size: SIZE, across: draw(), along: draw(), course: draw() };
  const valuesOf = (columns: Float64Array, i: number) => columns.subarray(i * (SIZE + 1), (i + 1) * (SIZE + 1));

  for (const use of [
    { along: true, course: true },
    { along: false, course: false },
  ]) {
    it(`are those of the full covariance matrix, ${use.course ? 'with speed and course' : 'positions across the track only'}`, () => {
      const equations = new NormalEquations(points);
      equations.load(state);
      equations.whiten(noise, use, false);

      const positions: Observation[] = [];
      const courses: Observation[] = [];
      for (let i = 0; i < COUNT; i++) {
        const ref = points.referenceRad[i]!;
        if (points.positionShare[i]! > 0) {
          positions.push({ values: valuesOf(state.across, i), at: i, axis: [-Math.sin(ref), Math.cos(ref)] });
          if (use.along)
            positions.push({ values: valuesOf(state.along, i), at: i, axis: [Math.cos(ref), Math.sin(ref)] });
        }
        if (use.course && points.courseShare[i]! > 0)
          courses.push({ values: valuesOf(state.course, i), at: i, axis: [1, 0] });
      }
      const apart = (a: Observation, b: Observation) => Math.abs(points.timeS[a.at]! - points.timeS[b.at]!);
      // The variance that the smoothed chainage adds along the track, m^2.
      const chainage = 0.05;
      const wandering = positions.map((a, i) =>
        positions.map((b, j) => {
          const turned = a.axis[0] * b.axis[0] + a.axis[1] * b.axis[1];
          const along = a.values.buffer === state.along.buffer;
          const white = noise.positionWhite * points.positionShare[a.at]! + (along ? chainage : 0);
          return noise.wander * turned * Math.exp(-apart(a, b) / noise.wanderTimeS) + (i === j ? white : 0);
        }),
      );
      const doppler = courses.map((a, i) =>
        courses.map(
          (b, j) =>
            noise.courseSlow * Math.exp(-apart(a, b) / noise.dopplerTimeS) +
            (i === j ? noise.courseWhite * points.courseShare[a.at]! : 0),
        ),
      );
      const parts = [dense(positions, wandering), ...(courses.length > 0 ? [dense(courses, doppler)] : [])];
      const sum = (f: (part: (typeof parts)[number]) => number) => parts.reduce((total, part) => total + f(part), 0);

      for (let p = 0; p < SIZE; p++) {
        expect(equations.g[p]).toBeCloseTo(
          sum((part) => part.form(p, SIZE)),
          6,
        );
        for (let q = 0; q <= p; q++)
          expect(equations.A[p * SIZE + q]).toBeCloseTo(
            sum((part) => part.form(p, q)),
            6,
          );
      }
      expect(equations.chi2).toBeCloseTo(
        sum((part) => part.form(SIZE, SIZE)),
        6,
      );
      expect(equations.logDet).toBeCloseTo(
        sum((part) => part.logDet),
        8,
      );
      expect(equations.observations).toBe(positions.length + courses.length);
    });
  }
});

describe('normal points of a dense log', () => {
  it('carry the covariance of averaged Gauss-Markov errors', () => {
    const [sigma, tau, fine, perBin] = [0.08, 1.3, 0.005, 100];
    const binS = fine * perBin;
    const point = pointNoise([0, 0, Math.log(0.01), Math.log(sigma), Math.log(tau)], binS);
    // Averages of the covariance sigma^2 e^{-|t|/tau} over one bin, and over two bins k apart, summed directly.
    const averaged = (k: number) => {
      let total = 0;
      for (let i = 0; i < perBin; i++) {
        for (let j = 0; j < perBin; j++) total += sigma ** 2 * Math.exp(-Math.abs(k * binS + (i - j) * fine) / tau);
      }
      return total / perBin ** 2;
    };
    expect((point.courseSlow + point.courseWhiteOfBin) / averaged(0)).toBeCloseTo(1, 3);
    for (const k of [1, 2, 5]) {
      expect((point.courseSlow * Math.exp((-k * binS) / tau)) / averaged(k)).toBeCloseTo(1, 3);
    }
  });
});

describe('Cholesky factors', () => {
  it('solve, invert and give the determinant of a badly scaled matrix', () => {
    const n = 5;
    const scale = [1, 1e5, 1e-4, 1e2, 1e-6];
    const rows = Array.from({ length: n }, () => Array.from({ length: n + 3 }, () => random.normal()));
    const full: Matrix = rows.map((a, i) =>
      rows.map((b, j) => scale[i]! * scale[j]! * a.reduce((sum, value, k) => sum + value * b[k]!, 0)),
    );
    const cholesky = new Cholesky();
    expect(cholesky.factor(Float64Array.from(full.flat()), n, 0)).toBe(true);
    const inverse = cholesky.inverse();
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < n; j++) {
        const product = full[i]!.reduce((sum, value, k) => sum + value * inverse[k * n + j]!, 0);
        expect((product * scale[j]!) / scale[i]!).toBeCloseTo(i === j ? 1 : 0, 6);
      }
    }
    expect(cholesky.logDet()).toBeCloseTo(invert(full).logDet, 6);
    const indefinite = Float64Array.from([1, 2, 2, 1]);
    expect(cholesky.factor(indefinite, 2, 0)).toBe(false);
  });
});
