import { roundTo } from '../../shared/schema/curve-columns.ts';

/** Columns of the resampled profile in their order, with the decimals given. */
const PROFILE_COLUMNS: readonly (readonly [name: string, decimals: number])[] = [
  ['s_m', 2],
  ['t_s', 3],
  ['lat', 8],
  ['lon', 8],
  ['speed_ms', 4],
  ['speed_sd_ms', 4],
  ['course_deg', 4],
  ['curvature_1_m', 9],
  ['curvature_sd_1_m', 9],
  ['cant_mm', 2],
  ['lateral_track_ms2', 5],
  ['lateral_track_sd_ms2', 5],
  ['lateral_body_ms2', 5],
  ['jerk_ms3', 5],
  ['utilisation', 4],
  ['ele_m', 2],
  ['curvature_fit_1_m', 9],
  ['equilibrium_cant_mm', 2],
  ['cant_deficiency_mm', 2],
  ['observed', 0],
];

export type ProfileTable = Readonly<Record<string, ArrayLike<number>>>;

/**
 * The resampled run as CSV, in pieces of some thousand rows so that a long run is never held as one
 * text. Unknown values are empty. The caution stands in the last column of the first row.
 * A column that `table` lacks is left empty.
 */
export function* profileCsv(table: ProfileTable, caution: string): Generator<string> {
  const count = table.s_m?.length ?? 0;
  yield `${PROFILE_COLUMNS.map(([name]) => name).join(',')},caution\r\n`;
  const columns = PROFILE_COLUMNS.map(([name, decimals]) => ({ values: table[name], decimals }));
  let piece = '';
  for (let i = 0; i < count; i++) {
    for (const { values, decimals } of columns) {
      const value = values === undefined ? null : roundTo(values[i] ?? NaN, decimals);
      piece += value === null ? ',' : `${String(value)},`;
    }
    piece += i === 0 ? `"${caution.replaceAll('"', '""')}"\r\n` : '\r\n';
    if (piece.length > 200_000) {
      yield piece;
      piece = '';
    }
  }
  yield piece;
}
