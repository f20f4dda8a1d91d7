import type { AssessedCurve, CurveRow } from '../../shared/schema/curve-row.ts';
import { byWorst } from '../parts/text.ts';

/** What the ledger shows: absent bounds are open, an empty set of verdicts shows all. */
export interface Filter {
  readonly verdicts: readonly CurveRow['verdict'][];
  readonly criterion: string;
  readonly radiusBelowM: number | null;
  readonly speedAboveKmh: number | null;
  readonly fromM: number | null;
  readonly toM: number | null;
}

export const NO_FILTER: Filter = {
  verdicts: [],
  criterion: '',
  radiusBelowM: null,
  speedAboveKmh: null,
  fromM: null,
  toM: null,
};

export interface Sort {
  /** A column, or `worst` for verdict then utilisation. */
  readonly key: keyof CurveRow | 'worst';
  readonly descending: boolean;
}

export function filterCurves(curves: readonly AssessedCurve[], filter: Filter): AssessedCurve[] {
  return curves.filter(
    ({ row }) =>
      (filter.verdicts.length === 0 || filter.verdicts.includes(row.verdict)) &&
      (filter.criterion === '' || row.governing_criterion === filter.criterion) &&
      (filter.radiusBelowM === null || (row.radius_m ?? Infinity) <= filter.radiusBelowM) &&
      (filter.speedAboveKmh === null || (row.speed_kmh ?? 0) >= filter.speedAboveKmh) &&
      (filter.fromM === null || row.end_m >= filter.fromM) &&
      (filter.toM === null || row.start_m <= filter.toM),
  );
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
