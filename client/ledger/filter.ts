import type { AssessedCurve, CurveRow } from '../../shared/schema/curve-row.ts';
import { byWorst } from '../parts/text.ts';

/** What the ledger shows: absent bounds are open, an empty set of verdicts shows all. */
export interface Filter {
  readonly verdicts: readonly CurveRow['verdict'][];
  /** Curves that this criterion governs, or where it is over or undecided; empty for all. */
  readonly criterion: string;
  readonly radiusFromM: number | null;
  readonly radiusToM: number | null;
  readonly speedFromKmh: number | null;
  readonly speedToKmh: number | null;
  readonly fromM: number | null;
  readonly toM: number | null;
}

export const NO_FILTER: Filter = {
  verdicts: [],
  criterion: '',
  radiusFromM: null,
  radiusToM: null,
  speedFromKmh: null,
  speedToKmh: null,
  fromM: null,
  toM: null,
};

export interface Sort {
  /** A column, or `worst` for verdict then utilisation. */
  readonly key: keyof CurveRow | 'worst';
  readonly descending: boolean;
}

export const WORST_FIRST: Sort = { key: 'worst', descending: true };

export function filterCurves(curves: readonly AssessedCurve[], filter: Filter): AssessedCurve[] {
  return curves.filter(
    ({ row, criteria }) =>
      (filter.verdicts.length === 0 || filter.verdicts.includes(row.verdict)) &&
      (filter.criterion === '' ||
        row.governing_criterion === filter.criterion ||
        criteria.some(
          (c) => c.criterion === filter.criterion && (c.verdict === 'over' || c.verdict === 'undecided'),
        )) &&
      isBetween(row.radius_m ?? Infinity, filter.radiusFromM, filter.radiusToM) &&
      isBetween(row.speed_kmh ?? 0, filter.speedFromKmh, filter.speedToKmh) &&
      (filter.fromM === null || row.end_m >= filter.fromM) &&
      (filter.toM === null || row.start_m <= filter.toM),
  );
}

function isBetween(value: number, from: number | null, to: number | null): boolean {
  return (from === null || value >= from) && (to === null || value <= to);
}

/** How many bounds besides verdicts and criterion are set. */
export function countBounds(filter: Filter): number {
  const { radiusFromM, radiusToM, speedFromKmh, speedToKmh, fromM, toM } = filter;
  return [radiusFromM, radiusToM, speedFromKmh, speedToKmh, fromM, toM].filter((bound) => bound !== null).length;
}

/** Sorted copy; unknown values come last whichever way. */
export function sortCurves(curves: readonly AssessedCurve[], sort: Sort): AssessedCurve[] {
  const { key } = sort;
  const sign = sort.descending ? -1 : 1;
  if (key === 'worst') return [...curves].sort((a, b) => (sort.descending ? byWorst(a, b) : -byWorst(a, b)));
  return [...curves].sort((a, b) => {
    const [x, y] = [a.row[key], b.row[key]];
    if (x === null || y === null) return x === y ? 0 : x === null ? 1 : -1;
    if (typeof x === 'number' && typeof y === 'number') return sign * (x - y);
    return sign * String(x).localeCompare(String(y));
  });
}
