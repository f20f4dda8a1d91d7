import type { AlignmentElement } from '../../shared/model/alignment.ts';

/** One piece of a line to be built: curvature changes linearly over its length. */
export interface Piece {
  readonly lengthM: number;
  /** Signed, positive left, 1/m. */
  readonly startCurvaturePerM: number;
  readonly endCurvaturePerM: number;
}

/** A line of known geometry in a plane, by chainage from 0. */
export interface SyntheticLine {
  readonly lengthM: number;
  readonly elements: readonly AlignmentElement[];
  curvatureAt(chainageM: number): number;
  /** Radians counter-clockwise from +x, not wrapped. */
  headingAt(chainageM: number): number;
  positionAt(chainageM: number): readonly [xM: number, yM: number];
}

export function straight(lengthM: number): Piece {
  return { lengthM, startCurvaturePerM: 0, endCurvaturePerM: 0 };
}

export function arc(lengthM: number, curvaturePerM: number): Piece {
  return { lengthM, startCurvaturePerM: curvaturePerM, endCurvaturePerM: curvaturePerM };
}

export function clothoid(lengthM: number, startCurvaturePerM: number, endCurvaturePerM: number): Piece {
  return { lengthM, startCurvaturePerM, endCurvaturePerM };
}

// Gauss-Legendre nodes and weights on [0, 1], 4 points: exact to degree 7.
const HALF_NODES = [0.8611363115940526, 0.3399810435848563];
const HALF_WEIGHTS = [0.34785484513745385, 0.6521451548625461];
const NODES = [-HALF_NODES[0]!, -HALF_NODES[1]!, HALF_NODES[1]!, HALF_NODES[0]!].map((x) => (x + 1) / 2);
const WEIGHTS = [HALF_WEIGHTS[0]!, HALF_WEIGHTS[1]!, HALF_WEIGHTS[1]!, HALF_WEIGHTS[0]!].map((w) => w / 2);

/** No quadrature step turns by more than this: the error of position stays below 1e-9 m a step. */
const STEP_TURN_RAD = 0.15;
const STEP_LENGTH_M = 50;

/** Index of the last entry of an ascending column that does not exceed `value` (0 when none). */
export function lastNotAbove(column: ArrayLike<number>, value: number): number {
  let low = 0;
  let high = column.length - 1;
  while (low < high) {
    const middle = (low + high + 1) >> 1;
    if (column[middle]! <= value) low = middle;
    else high = middle - 1;
  }
  return low;
}

/**
 * Lays pieces one after another from the origin.
 *
 * heading(s) = heading0 + integral of curvature, which is quadratic inside a piece and therefore exact;
 * position = integral of (cos, sin)(heading) by Gauss-Legendre quadrature between stored nodes.
 * Pieces of zero length are left out, so an abrupt change of curvature is two neighbouring pieces.
 *
 * @param headingRad heading at chainage 0, counter-clockwise from +x
 */
export function buildLine(pieces: readonly Piece[], headingRad = 0): SyntheticLine {
  const elements: AlignmentElement[] = [];
  const nodeS: number[] = [];
  const nodeHeading: number[] = [];
  const nodeCurvature: number[] = [];
  const nodeSlope: number[] = [];
  const nodeX: number[] = [];
  const nodeY: number[] = [];
  let s = 0;
  let heading = headingRad;
  let x = 0;
  let y = 0;
  for (const piece of pieces) {
    if (!(piece.lengthM > 0)) continue;
    const { startCurvaturePerM: k0, endCurvaturePerM: k1 } = piece;
    const kind = k0 !== k1 ? 'transition' : k0 === 0 ? 'straight' : 'arc';
    elements.push({
      kind,
      startM: s,
      endM: s + piece.lengthM,
      startCurvaturePerM: k0,
      endCurvaturePerM: k1,
    });
    const slope = (k1 - k0) / piece.lengthM;
    const turn = Math.max(Math.abs(k0), Math.abs(k1)) * piece.lengthM;
    const steps = Math.max(1, Math.ceil(turn / STEP_TURN_RAD), Math.ceil(piece.lengthM / STEP_LENGTH_M));
    const step = piece.lengthM / steps;
    for (let i = 0; i < steps; i += 1) {
      const curvature = k0 + slope * step * i;
      nodeS.push(s + step * i);
      nodeHeading.push(heading);
      nodeCurvature.push(curvature);
      nodeSlope.push(slope);
      nodeX.push(x);
      nodeY.push(y);
      const [dx, dy] = advance(heading, curvature, slope, step);
      x += dx;
      y += dy;
      heading += curvature * step + (slope * step * step) / 2;
    }
    s += piece.lengthM;
  }
  const lengthM = s;

  return {
    lengthM,
    elements,
    curvatureAt(chainageM) {
      const i = lastNotAbove(nodeS, chainageM);
      return nodeCurvature[i]! + nodeSlope[i]! * (chainageM - nodeS[i]!);
    },
    headingAt(chainageM) {
      const i = lastNotAbove(nodeS, chainageM);
      const d = chainageM - nodeS[i]!;
      return nodeHeading[i]! + nodeCurvature[i]! * d + (nodeSlope[i]! * d * d) / 2;
    },
    positionAt(chainageM) {
      const i = lastNotAbove(nodeS, chainageM);
      const [dx, dy] = advance(nodeHeading[i]!, nodeCurvature[i]!, nodeSlope[i]!, chainageM - nodeS[i]!);
      return [nodeX[i]! + dx, nodeY[i]! + dy];
    },
  };
}

function advance(heading: number, curvature: number, slope: number, length: number): readonly [number, number] {
  let dx = 0;
  let dy = 0;
  for (let k = 0; k < 4; k += 1) {
    const d = NODES[k]! * length;
    const angle = heading + curvature * d + (slope * d * d) / 2;
    dx += WEIGHTS[k]! * Math.cos(angle);
    dy += WEIGHTS[k]! * Math.sin(angle);
  }
  return [dx * length, dy * length];
}
