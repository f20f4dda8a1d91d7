/** A picture as data, in points with y downwards: drawn alike into SVG and PDF. */
export interface Drawing {
  readonly width: number;
  readonly height: number;
  readonly marks: readonly Mark[];
}

export type Mark =
  | {
      readonly kind: 'line';
      /** x0, y0, x1, y1, ...; NaN lifts the pen. */
      readonly points: readonly number[];
      readonly stroke: string;
      readonly width: number;
      readonly dash?: readonly [number, number];
    }
  | { readonly kind: 'area'; readonly points: readonly number[]; readonly fill: string; readonly opacity: number }
  | {
      readonly kind: 'text';
      readonly x: number;
      /** Baseline. */
      readonly y: number;
      readonly text: string;
      readonly size: number;
      readonly fill: string;
      readonly anchor: 'start' | 'middle' | 'end';
      readonly bold?: boolean;
    }
  | {
      readonly kind: 'disc';
      readonly x: number;
      readonly y: number;
      readonly radius: number;
      readonly fill: string;
      readonly stroke: string;
    };

export const INK = '#1d2730';
export const QUIET = '#6b7680';
export const RULE = '#d5dade';
export const OVER = '#a32a0e';
export const UNDECIDED = '#6a4c00';
export const FITTED = '#0b5c7a';

/** Straight pieces of a pen path: the points between two lifts of the pen (NaN). */
export function strokes(points: readonly number[]): number[][] {
  const parts: number[][] = [];
  let current: number[] = [];
  for (let i = 0; i + 1 < points.length; i += 2) {
    const x = points[i]!;
    const y = points[i + 1]!;
    if (Number.isFinite(x) && Number.isFinite(y)) current.push(x, y);
    else if (current.length > 0) {
      parts.push(current);
      current = [];
    }
  }
  if (current.length > 0) parts.push(current);
  return parts.filter((part) => part.length >= 4);
}
