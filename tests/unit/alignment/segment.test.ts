import { describe, expect, it } from 'vitest';
import { seededStream } from '../../../data/synthetic/random.ts';
import {
  KIND,
  segmentCurvature,
  WITH_COURSE,
  type CurvatureGrid,
  type Segment,
} from '../../../server/alignment/segment.ts';

function gridOf(kappa: readonly number[], sd: number): CurvatureGrid {
  return {
    count: kappa.length,
    fromM: 0,
    stepM: 10,
    kappa: Float64Array.from(kappa),
    weight: new Float64Array(kappa.length).fill(1 / (sd * sd)),
    correlationM: 50,
  };
}

/** Weighted squares of cells [a, b) about the best segment of a kind, straight from its definition. */
function costOf(grid: CurvatureGrid, kind: number, a: number, b: number): number {
  // Columns of the linear model: none, constant, line from zero, line to zero, any line.
  const columns: ((c: number) => number)[] =
    kind === KIND.STRAIGHT
      ? []
      : kind === KIND.ARC
        ? [() => 1]
        : kind === KIND.UP
          ? [(c) => c + 0.5 - a]
          : kind === KIND.DOWN
            ? [(c) => c + 0.5 - b]
            : b - a === 1
              ? [() => 1]
              : [() => 1, (c) => c - a];
  const fitted = leastSquares(grid, columns, a, b);
  let sum = 0;
  for (let c = a; c < b; c++) {
    const model = columns.reduce((value, column, k) => value + fitted[k]! * column(c), 0);
    sum += grid.weight[c]! * (grid.kappa[c]! - model) ** 2;
  }
  return sum;
}

function leastSquares(grid: CurvatureGrid, columns: ((c: number) => number)[], a: number, b: number): number[] {
  const sum = (f: (c: number) => number) => {
    let total = 0;
    for (let c = a; c < b; c++) total += grid.weight[c]! * f(c);
    return total;
  };
  const [p, q] = columns;
  if (p === undefined) return [];
  const pp = sum((c) => p(c) * p(c));
  const py = sum((c) => p(c) * grid.kappa[c]!);
  if (q === undefined) return [py / pp];
  const [pq, qq, qy] = [sum((c) => p(c) * q(c)), sum((c) => q(c) * q(c)), sum((c) => q(c) * grid.kappa[c]!)];
  const det = pp * qq - pq * pq;
  return [(py * qq - qy * pq) / det, (qy * pp - py * pq) / det];
}

/** Penalty of entering `next` after `before`; Infinity where the two may not meet. */
function penalty(before: number, next: number): number {
  const { arc, transition, straight, abruptFromStraight, abruptBetween } = WITH_COURSE;
  const { STRAIGHT, ARC, UP, DOWN, BETWEEN } = KIND;
  if (next === ARC) {
    if (before === STRAIGHT) return arc + abruptFromStraight;
    if (before === UP || before === BETWEEN) return arc;
    return before === ARC ? arc + abruptBetween : Infinity;
  }
  if (next === STRAIGHT) return before === DOWN ? straight : before === ARC ? straight + abruptFromStraight : Infinity;
  if (next === UP) return before === STRAIGHT || before === DOWN ? transition : Infinity;
  if (next === DOWN) return before === ARC ? transition : Infinity;
  return before === ARC ? transition + abruptBetween : Infinity;
}

/** Least total over every division of the cells, by trying them all. */
function bruteForce(grid: CurvatureGrid): number {
  const kinds = Object.values(KIND);
  let best = Infinity;
  const go = (at: number, before: number, total: number): void => {
    if (total >= best) return;
    if (at === grid.count) {
      best = total;
      return;
    }
    for (const kind of kinds) {
      const toll = penalty(before, kind);
      if (toll === Infinity) continue;
      for (let end = at + 1; end <= grid.count; end++) go(end, kind, total + toll + costOf(grid, kind, at, end));
    }
  };
  // The run begins on a straight or on an arc, of any length.
  for (let end = 0; end <= grid.count; end++) go(end, KIND.STRAIGHT, costOf(grid, KIND.STRAIGHT, 0, end));
  go(0, KIND.ARC, WITH_COURSE.arc);
  return best;
}

function totalOf(grid: CurvatureGrid, segments: readonly Segment[]): number {
  let total = 0;
  let before: number | null = null;
  for (const { kind, fromM, toM } of segments) {
    const [a, b] = [Math.round(fromM / grid.stepM), Math.round(toM / grid.stepM)];
    if (before !== null) total += penalty(before, kind);
    else if (kind === KIND.DOWN || kind === KIND.BETWEEN) total += WITH_COURSE.arc + penalty(KIND.ARC, kind);
    else if (kind !== KIND.STRAIGHT) total += penalty(KIND.STRAIGHT, kind);
    total += costOf(grid, kind, a, b);
    before = kind;
  }
  return total;
}

describe('description of curvature by straights, arcs and changes', () => {
  const random = seededStream(41);

  it('reaches the least total of all divisions of short inputs', () => {
    const shapes = [
      [0, 0, 0, 4, 4, 4, 0, 0],
      [0, 0, 2, 4, 4, 2, 0, 0],
      [0, 1, 2, 3, 3, -3, -3, 0],
      [5, 5, 5, 5, 1, 1, 0, 0],
      [0, 0, 0, 0, 0, 0, 0, 0],
      [0, 3, 6, 3, 0, -3, -6, -3],
    ];
    for (const shape of shapes) {
      for (const sd of [0.3e-3, 1e-3]) {
        const grid = gridOf(
          shape.map((k) => 1e-3 * k + sd * random.normal()),
          sd,
        );
        const reached = totalOf(grid, segmentCurvature(grid, WITH_COURSE));
        expect(reached).toBeCloseTo(bruteForce(grid), 6);
      }
    }
  });

  it('covers the run without gaps and in order', () => {
    const kappa = Array.from({ length: 400 }, (_, i) => (i % 100 < 40 ? 0.004 : 0) + 3e-4 * random.normal());
    const segments = segmentCurvature(gridOf(kappa, 3e-4), WITH_COURSE);
    expect(segments[0]!.fromM).toBe(0);
    expect(segments.at(-1)!.toM).toBe(4000);
    for (let i = 1; i < segments.length; i++) expect(segments[i]!.fromM).toBe(segments[i - 1]!.toM);
  });

  it('describes the end of a run of half a million cells as it does a short one', () => {
    // Sums of squared positions over the run would have lost every digit by then.
    const piece = Array.from({ length: 500 }, (_, i) => {
      const along = i % 100;
      const shape =
        along < 20 ? 0 : along < 30 ? (along - 19.5) / 10 : along < 60 ? 1 : along < 70 ? (69.5 - along) / 10 : 0;
      return 0.004 * shape + 1e-5 * random.normal();
    });
    const alone = segmentCurvature(gridOf(piece, 1e-5), WITH_COURSE);
    const before = 500_000;
    const long = gridOf([...new Array<number>(before).fill(0), ...piece], 1e-5);
    const last = segmentCurvature(long, WITH_COURSE).slice(-alone.length);
    const shift = before * long.stepM;
    expect(last.slice(1).map(({ kind, fromM, toM }) => [kind, fromM - shift, toM - shift])).toEqual(
      alone.slice(1).map(({ kind, fromM, toM }) => [kind, fromM, toM]),
    );
  });
});
