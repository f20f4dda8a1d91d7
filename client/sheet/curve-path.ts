import type { Curve } from '../../shared/model/alignment.ts';

export interface PathPoint {
  readonly s: number;
  readonly x: number;
  readonly y: number;
}

const STEPS = 300;

/** Fitted curvature at a chainage: linear along the transitions, the neighbour's beyond the curve. */
function curvatureAt(curve: Curve, s: number): number {
  const { startM, endM, arcStartM, arcEndM } = curve;
  const kappa = curve.curvaturePerM.value;
  const mix = (a: number, b: number, t: number) => a + (b - a) * t;
  if (s < startM) return curve.entry.fromCurvaturePerM;
  if (s < arcStartM) return mix(curve.entry.fromCurvaturePerM, kappa, (s - startM) / (arcStartM - startM));
  if (s <= arcEndM) return kappa;
  if (s < endM) return mix(kappa, curve.exit.fromCurvaturePerM, (s - arcEndM) / (endM - arcEndM));
  return curve.exit.fromCurvaturePerM;
}

/** The fitted centre line from `marginM` before the curve to as much after it, m, by small steps of heading. */
export function fittedPath(curve: Curve, marginM: number): PathPoint[] {
  const from = curve.startM - marginM;
  const ds = (curve.endM - curve.startM + 2 * marginM) / STEPS;
  let [x, y, heading] = [0, 0, 0];
  const points: PathPoint[] = [{ s: from, x, y }];
  for (let k = 0; k < STEPS; k++) {
    const turn = curvatureAt(curve, from + (k + 0.5) * ds) * ds;
    heading += turn;
    x += Math.cos(heading - turn / 2) * ds;
    y += Math.sin(heading - turn / 2) * ds;
    points.push({ s: from + (k + 1) * ds, x, y });
  }
  return points;
}

/** Point of a path at a chainage. */
export function pointAt(path: readonly PathPoint[], s: number): PathPoint {
  const first = path[0]!;
  const last = path[path.length - 1]!;
  const t = ((s - first.s) / (last.s - first.s)) * (path.length - 1);
  const i = Math.min(path.length - 2, Math.max(0, Math.floor(t)));
  const [a, b] = [path[i]!, path[i + 1]!];
  const f = t - i;
  return { s, x: a.x + f * (b.x - a.x), y: a.y + f * (b.y - a.y) };
}

/**
 * Moves `path` so that its points lie nearest those recorded at the same chainages (rigid, least squares), with the
 * rotation of the best fit. Returns the moved path and the angle it was turned by, radians.
 */
export function laidOn(
  path: readonly PathPoint[],
  recorded: readonly PathPoint[],
): { path: PathPoint[]; turnRad: number } {
  const pairs = recorded.map((p) => [pointAt(path, p.s), p] as const);
  const mean = (pick: (pair: (typeof pairs)[number]) => number) =>
    pairs.reduce((sum, pair) => sum + pick(pair), 0) / pairs.length;
  const [ax, ay] = [mean(([a]) => a.x), mean(([a]) => a.y)];
  const [bx, by] = [mean(([, b]) => b.x), mean(([, b]) => b.y)];
  let [dot, cross] = [0, 0];
  for (const [a, b] of pairs) {
    dot += (a.x - ax) * (b.x - bx) + (a.y - ay) * (b.y - by);
    cross += (a.x - ax) * (b.y - by) - (a.y - ay) * (b.x - bx);
  }
  const turnRad = Math.atan2(cross, dot);
  const [cos, sin] = [Math.cos(turnRad), Math.sin(turnRad)];
  const moved = path.map(({ s, x, y }) => ({
    s,
    x: bx + (x - ax) * cos - (y - ay) * sin,
    y: by + (x - ax) * sin + (y - ay) * cos,
  }));
  return { path: moved, turnRad };
}

/** The points turned by an angle about the origin. */
export function turned(points: readonly PathPoint[], angleRad: number): PathPoint[] {
  const [cos, sin] = [Math.cos(angleRad), Math.sin(angleRad)];
  return points.map(({ s, x, y }) => ({ s, x: x * cos - y * sin, y: x * sin + y * cos }));
}
