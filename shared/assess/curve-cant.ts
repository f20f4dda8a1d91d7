import type { CurveRow } from '../schema/curve-row.ts';

/**
 * Cant of one curve. Rail: `mm` over the base, positive raising the outer rail. Road: `ratio` is the superelevation's
 * tangent. Both null when unknown.
 */
export interface CurveCant {
  readonly source: CurveRow['cant_source'];
  readonly mm: number | null;
  readonly ratio: number | null;
}

export const UNKNOWN_CANT: CurveCant = { source: 'unknown', mm: null, ratio: null };
