import { describe, expect, it } from 'vitest';
import { seededStream } from '../../../data/synthetic/random.ts';
import {
  COEFFICIENTS,
  PACKED,
  STATES,
  predictAdjoint,
  predictAdjointVector,
  predictCovariance,
  subtractOuter,
  timesVector,
} from '../../../server/estimate/covariance-kernels.ts';
import { nelderMead } from '../../../server/estimate/nelder-mead.ts';
import { effectiveVariance, positionCurvatureVariance } from '../../../server/estimate/noise.ts';

const random = seededStream(20);
const normals = (n: number): Float64Array => Float64Array.from({ length: n }, () => random.normal());

type Matrix = number[][];

const product = (a: Matrix, b: Matrix): Matrix =>
  a.map((row) => b[0]!.map((_, j) => row.reduce((s, x, k) => s + x * b[k]![j]!, 0)));
const transpose = (a: Matrix): Matrix => a[0]!.map((_, j) => a.map((row) => row[j]!));

function unpack(p: Float64Array): Matrix {
  return Array.from({ length: STATES }, (_, i) =>
    Array.from({ length: STATES }, (__, j) => p[i >= j ? (i * (i + 1)) / 2 + j : (j * (j + 1)) / 2 + i]!),
  );
}

/** The full transition matrix of which the kernels know the sparse form. */
function transition(f: Float64Array): Matrix {
  const m: Matrix = Array.from({ length: STATES }, (_, i) =>
    Array.from({ length: STATES }, (__, j) => (i === j ? 1 : 0)),
  );
  for (let k = 0; k < 5; k++) {
    m[0]![2 + k] = f[k]!;
    m[1]![2 + k] = f[5 + k]!;
  }
  for (let k = 0; k < 4; k++) m[2]![3 + k] = f[10 + k]!;
  m[3]![4] = f[14]!;
  m[5]![6] = f[15]!;
  m[4]![4] = f[16]!;
  m[6]![6] = f[17]!;
  m[7]![7] = f[18]!;
  return m;
}

function expectClose(packed: Float64Array, full: Matrix): void {
  const ours = unpack(packed);
  for (let i = 0; i < STATES; i++) for (let j = 0; j < STATES; j++) expect(ours[i]![j]).toBeCloseTo(full[i]![j]!, 9);
}

describe('covariance kernels against full matrices', () => {
  it('predictCovariance is F P F transposed', () => {
    const p = normals(PACKED);
    const f = normals(COEFFICIENTS);
    const wanted = product(product(transition(f), unpack(p)), transpose(transition(f)));
    predictCovariance(p, f, 0);
    expectClose(p, wanted);
  });

  it('predictAdjoint is F transposed L F, and its vector F transposed lambda', () => {
    const l = normals(PACKED);
    const f = normals(COEFFICIENTS);
    const wanted = product(product(transpose(transition(f)), unpack(l)), transition(f));
    predictAdjoint(l, f, 0);
    expectClose(l, wanted);
    const vector = normals(STATES);
    const wantedVector = product(
      transpose(transition(f)),
      Array.from(vector, (x) => [x]),
    );
    predictAdjointVector(vector, f, 0);
    wantedVector.forEach(([x], i) => expect(vector[i]).toBeCloseTo(x!, 10));
  });

  it('subtractOuter and timesVector agree with their definitions', () => {
    const p = normals(PACKED);
    const g = normals(STATES);
    const before = unpack(p);
    const out = new Float64Array(STATES);
    timesVector(p, g, 0, out);
    before.forEach((row, i) =>
      expect(out[i]).toBeCloseTo(
        row.reduce((s, x, k) => s + x * g[k]!, 0),
        10,
      ),
    );
    subtractOuter(p, g, 0.7);
    expectClose(
      p,
      before.map((row, i) => row.map((x, j) => x - 0.7 * g[i]! * g[j]!)),
    );
  });
});

describe('nelderMead', () => {
  it("finds the minimum (1, 1) of Rosenbrock's valley (Rosenbrock 1960, The Computer Journal 3, 175)", () => {
    const valley = ([x, y]: readonly number[]): number => 100 * (y! - x! * x!) ** 2 + (1 - x!) ** 2;
    const { x, value } = nelderMead(valley, [-1.2, 1], [0.5, 0.5], 400, 1e-14);
    expect(x[0]).toBeCloseTo(1, 4);
    expect(x[1]).toBeCloseTo(1, 4);
    expect(value).toBeLessThan(1e-8);
  });

  it('takes values that are not finite for bad ones', () => {
    const { x } = nelderMead(([t]) => (t! < 0 ? NaN : (t! - 2) ** 2), [1], [-2], 60, 1e-10);
    expect(x[0]).toBeCloseTo(2, 3);
  });
});

describe('noise formulas', () => {
  it('variance of curvature from white positions is that of a least-squares parabola', () => {
    const n = 12;
    const length = 110;
    // Normal equations of y = a + b s + c s^2 / 2 at n equally spaced points, solved by hand for the last element of the inverse.
    const s = Array.from({ length: n }, (_, i) => (length * i) / (n - 1) - length / 2);
    const moment = (k: number): number => s.reduce((sum, x) => sum + x ** k, 0);
    const schur = moment(4) / 4 - moment(2) ** 2 / (4 * n);
    expect(positionCurvatureVariance(0.8, 0, length, 10, 1).white).toBeCloseTo(0.64 / schur, 12);
  });

  it('half white, half slow errors of 1 s count 1.58 times at 1 Hz and 10.5 times at 10 Hz', () => {
    // Sum of the autocorrelations 1 + 2 rho + 2 rho^2 + ..., for rho = exp(-dt).
    const factor = (dt: number): number => {
      let sum = 1;
      for (let k = 1; k < 2000; k++) sum += 2 * Math.exp(-k * dt);
      return 0.5 + 0.5 * sum;
    };
    for (const dt of [1, 0.1]) expect(effectiveVariance(Math.SQRT1_2, Math.SQRT1_2, dt, 1)).toBeCloseTo(factor(dt), 9);
    expect(factor(1)).toBeCloseTo(1.58, 2);
    expect(factor(0.1)).toBeCloseTo(10.5, 1);
  });
});
