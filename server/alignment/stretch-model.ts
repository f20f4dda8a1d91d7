/**
 * A stretch of the line from one straight to another: levels of curvature joined by changes.
 *
 *   kappa(s) = sum_j dkappa_j ramp((s - c_j) / L_j),   theta(s) = theta_0 + sum_j dkappa_j R1(s - c_j, L_j)
 *   ramp(z) = clamp(z + 1/2, 0, 1),   R1 = 0 | (z + L/2)^2 / (2 L) | z
 *
 * A change is described by its middle c and by u = L^2: the shift of the arc dkappa L^2 / 24 is linear in u,
 * while the derivative with respect to L vanishes at L = 0.
 */
export interface Stretch {
  /** Curvature between the changes, 1/m; entry k lies between change k and k + 1. */
  levels: number[];
  /** True where the level is a straight: held at zero. */
  straight: boolean[];
  /** Middles of the changes, m of chainage; one more than levels. */
  middles: number[];
  /** Squared lengths of the changes, m^2. */
  squares: number[];
  /** Window of chainage on which it is fitted. */
  fromM: number;
  toM: number;
}

/** Shorter changes are drawn this long, m: their effect cannot be told from an abrupt change. */
export const SHORTEST_M = 0.5;

/**
 * Changes leave at least the rest of a curve to the arc: curves are laid out with an arc, and where the data do not tell, one that
 * vanishes between two long changes would be sharper than any seen.
 */
const LARGEST_SHARE_OF_CHANGES = 0.85;

export function changeLength(square: number): number {
  return Math.sqrt(Math.max(square, SHORTEST_M * SHORTEST_M));
}

/** Where each parameter stands: x0, y0, theta0, free levels, then middle and square of each change. */
export interface Layout {
  readonly size: number;
  /** Parameter of level k, or -1 for a straight. */
  readonly level: Int32Array;
  /** Parameter of the middle of change j; its square follows. */
  readonly middle: Int32Array;
}

export const POSE = 3;

export function layoutOf(stretch: Stretch): Layout {
  const level = new Int32Array(stretch.levels.length);
  let next = POSE;
  for (let k = 0; k < level.length; k++) level[k] = stretch.straight[k]! ? -1 : next++;
  const middle = new Int32Array(stretch.middles.length);
  for (let j = 0; j < middle.length; j++) {
    middle[j] = next;
    next += 2;
  }
  return { size: next, level, middle };
}

/** Curvature of the level before change j (0 before the first). */
export function levelBefore(stretch: Stretch, j: number): number {
  return j === 0 ? 0 : stretch.levels[j - 1]!;
}

/** Curvature of the level after change j (0 after the last). */
export function levelAfter(stretch: Stretch, j: number): number {
  return j === stretch.levels.length ? 0 : stretch.levels[j]!;
}

/** Keeps the changes in order and no longer than the levels between them allow. */
export function settle(stretch: Stretch): void {
  const { straight, middles, squares, fromM, toM } = stretch;
  const n = middles.length;
  for (let j = 0; j < n; j++) {
    middles[j] = Math.min(toM - 1, Math.max(fromM + 1, middles[j]!));
    squares[j] = Math.max(SHORTEST_M * SHORTEST_M, squares[j]!);
  }
  for (let j = 1; j < n; j++) if (middles[j]! < middles[j - 1]! + 1) middles[j] = middles[j - 1]! + 1;
  const room = (j: number) => {
    const before = j > 0 ? middles[j]! - middles[j - 1]! : 2 * (middles[j]! - fromM);
    const after = j < n - 1 ? middles[j + 1]! - middles[j]! : 2 * (toM - middles[j]!);
    return Math.max(1, Math.min(before, after) * 2);
  };
  for (let j = 0; j < n; j++) squares[j] = Math.min(squares[j]!, room(j) ** 2);
  for (let j = 0; j + 1 < n; j++) {
    const gap = middles[j + 1]! - middles[j]!;
    const taken = (changeLength(squares[j]!) + changeLength(squares[j + 1]!)) / 2;
    const most = straight[j]! ? gap : LARGEST_SHARE_OF_CHANGES * gap;
    if (taken <= most) continue;
    const shrink = (most / taken) ** 2;
    squares[j] = squares[j]! * shrink;
    squares[j + 1] = squares[j + 1]! * shrink;
  }
}

export function copyStretch(stretch: Stretch): Stretch {
  return {
    levels: [...stretch.levels],
    straight: [...stretch.straight],
    middles: [...stretch.middles],
    squares: [...stretch.squares],
    fromM: stretch.fromM,
    toM: stretch.toM,
  };
}
