import type { TrueCurve } from '../../data/synthetic/simulate.ts';

/** Lengths below this are treated as this: the derivative with respect to the squared length would vanish. */
const SHORTEST_CHANGE_M = 0.5;
const QUADRATURE_STEP_M = 3;

/** Parameter indices of one change of curvature; levels are numbered in order, the outer ones are straights. */
interface Change {
  readonly middle: number;
  readonly squaredLength: number;
}

/**
 * Curves without a sufficient straight between them, with the straights at either end.
 * Parameters: x0, y0, heading0 at the window's start; the level of each curve; middle and squared length of each change.
 */
export interface CurveGroup {
  readonly curves: readonly TrueCurve[];
  readonly fromM: number;
  readonly toM: number;
  /** True values of all parameters. */
  readonly parameters: Float64Array;
  /** Level k (0 the first straight) -> index of its parameter, or -1 for a straight. */
  readonly levelParameter: readonly number[];
  readonly changes: readonly Change[];
  /** For each curve: parameter indices of its level, and of its entry's and exit's change. */
  readonly curveParameters: readonly {
    readonly level: number;
    readonly entry: { readonly middle: number; readonly squaredLength: number };
    readonly exit: { readonly middle: number; readonly squaredLength: number };
  }[];
}

/** Straights shorter than this tie two curves into one group. */
const TYING_STRAIGHT_M = 60;
/** No more of a neighbouring straight is used than this. */
const LONGEST_STRAIGHT_M = 500;

/** Groups the curves of a line; pose parameters start at zero and are relative to the true pose. */
export function groupCurves(curves: readonly TrueCurve[], lineLengthM: number): CurveGroup[] {
  const runs: TrueCurve[][] = [];
  for (const curve of curves) {
    const last = runs.at(-1)?.at(-1);
    if (last && (last.exit.joins === curve.number || curve.startM - last.endM < TYING_STRAIGHT_M))
      runs.at(-1)!.push(curve);
    else runs.push([curve]);
  }
  return runs.map((members, index) => {
    const before = runs[index - 1]?.at(-1)?.endM ?? 0;
    const after = runs[index + 1]?.[0]?.startM ?? lineLengthM;
    const first = members[0]!;
    const last = members.at(-1)!;
    return layGroup(
      members,
      Math.max(before, first.startM - LONGEST_STRAIGHT_M),
      Math.min(after, last.endM + LONGEST_STRAIGHT_M),
    );
  });
}

function layGroup(members: readonly TrueCurve[], fromM: number, toM: number): CurveGroup {
  const changes: { readonly middleM: number; readonly lengthM: number }[] = [];
  const levelValues = [0];
  const levelOfCurve: number[] = [];
  const entryOf: number[] = [];
  const exitOf: number[] = [];
  const change = (middleM: number, lengthM: number, to: number) => {
    changes.push({ middleM, lengthM });
    levelValues.push(to);
    return changes.length - 1;
  };
  members.forEach((curve, i) => {
    const previous = members[i - 1];
    // A compound curve shares the change of curvature between its two arcs.
    const shared = previous !== undefined && curve.entry.fromCurvaturePerM === previous.curvaturePerM;
    if (shared) entryOf.push(exitOf[i - 1]!);
    else entryOf.push(change(curve.entry.middleM, curve.entry.lengthM, curve.curvaturePerM));
    levelOfCurve.push(levelValues.length - 1);
    exitOf.push(change(curve.exit.middleM, curve.exit.lengthM, curve.exit.fromCurvaturePerM));
  });
  const values = [0, 0, 0];
  const levelParameter = levelValues.map((value) => {
    if (value === 0) return -1;
    values.push(value);
    return values.length - 1;
  });
  const placed = changes.map((one) => {
    values.push(one.middleM, Math.max(one.lengthM, SHORTEST_CHANGE_M) ** 2);
    return { middle: values.length - 2, squaredLength: values.length - 1 };
  });
  return {
    curves: members,
    fromM,
    toM,
    parameters: Float64Array.from(values),
    levelParameter,
    changes: placed,
    curveParameters: members.map((_, i) => ({
      level: levelParameter[levelOfCurve[i]!]!,
      entry: placed[entryOf[i]!]!,
      exit: placed[exitOf[i]!]!,
    })),
  };
}

/** Positions, headings and their derivatives at given chainages. */
export interface ModelValues {
  readonly count: number;
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  readonly headingRad: Float64Array;
  /** Row-major, count x parameters. */
  readonly dx: Float64Array;
  readonly dy: Float64Array;
  readonly dHeading: Float64Array;
}

/**
 * Evaluates a group at ascending chainages of its window, in the frame of the window's start
 * (heading 0 there for zero pose parameters).
 *
 * kappa(s) = sum of level steps d_j ramp((s - c_j)/L_j), heading = its integral in closed form,
 * position and its derivatives by Simpson's rule between break points.
 */
export function evaluateGroup(group: CurveGroup, parameters: Float64Array, chainageM: Float64Array): ModelValues {
  const size = parameters.length;
  const count = chainageM.length;
  const out: ModelValues = {
    count,
    xM: new Float64Array(count),
    yM: new Float64Array(count),
    headingRad: new Float64Array(count),
    dx: new Float64Array(count * size),
    dy: new Float64Array(count * size),
    dHeading: new Float64Array(count * size),
  };
  const levels = group.levelParameter.map((index) => (index < 0 ? 0 : parameters[index]!));
  const changes = group.changes.map((one) => ({
    middleM: parameters[one.middle]!,
    lengthM: Math.sqrt(Math.max(parameters[one.squaredLength]!, SHORTEST_CHANGE_M ** 2)),
  }));
  const row = new Float64Array(size);

  /** Heading at s, its derivatives left in `row`. */
  function heading(s: number): number {
    row.fill(0);
    row[2] = 1;
    let theta = parameters[2]!;
    changes.forEach((one, j) => {
      const step = levels[j + 1]! - levels[j]!;
      const w = (s - one.middleM) / one.lengthM + 0.5;
      if (w <= 0) return;
      const integral = w < 1 ? (one.lengthM * w * w) / 2 : s - one.middleM;
      theta += step * integral;
      const before = group.levelParameter[j]!;
      const after = group.levelParameter[j + 1]!;
      if (before >= 0) row[before]! -= integral;
      if (after >= 0) row[after]! += integral;
      row[group.changes[j]!.middle] = -step * Math.min(1, w);
      if (w < 1) row[group.changes[j]!.squaredLength] = (step * w * (1 - w)) / (4 * one.lengthM);
    });
    return theta;
  }

  const breaks = changes
    .flatMap((one) => [one.middleM - one.lengthM / 2, one.middleM, one.middleM + one.lengthM / 2])
    .sort((a, b) => a - b);
  let at = group.fromM;
  let x = parameters[0]!;
  let y = parameters[1]!;
  const dx = new Float64Array(size);
  const dy = new Float64Array(size);
  dx[0] = 1;
  dy[1] = 1;

  function integrate(to: number): void {
    const steps = Math.max(1, Math.ceil((to - at) / QUADRATURE_STEP_M));
    const h = (to - at) / steps;
    for (let i = 0; i < steps; i += 1) {
      for (let k = 0; k < 3; k += 1) {
        const weight = ((k === 1 ? 4 : 1) * h) / 6;
        const theta = heading(at + h * (i + k / 2));
        const c = Math.cos(theta);
        const sn = Math.sin(theta);
        x += weight * c;
        y += weight * sn;
        for (let p = 2; p < size; p += 1) {
          if (row[p] === 0) continue;
          dx[p]! -= weight * sn * row[p]!;
          dy[p]! += weight * c * row[p]!;
        }
      }
    }
    at = to;
  }

  let nextBreak = 0;
  for (let i = 0; i < count; i += 1) {
    const s = chainageM[i]!;
    while (nextBreak < breaks.length && breaks[nextBreak]! < s) {
      if (breaks[nextBreak]! > at) integrate(breaks[nextBreak]!);
      nextBreak += 1;
    }
    if (s > at) integrate(s);
    out.xM[i] = x;
    out.yM[i] = y;
    out.headingRad[i] = heading(s);
    out.dHeading.set(row, i * size);
    out.dx.set(dx, i * size);
    out.dy.set(dy, i * size);
  }
  return out;
}
