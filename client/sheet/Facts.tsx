import type { Curve, CurveEnd } from '../../shared/model/alignment.ts';
import type { CurveRow } from '../../shared/schema/curve-row.ts';
import { figure, quantity, shownInterval } from '../parts/text.ts';
import { app } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

/** The figures of a curve, each with its 95 % interval. */
export function Facts({
  curve,
  row,
  mode,
}: {
  readonly curve: Curve;
  readonly row: CurveRow;
  readonly mode: 'rail' | 'road';
}) {
  const units = useSlice(app, (s) => s.units);
  const q = (value: number | null, unit: string, decimals: number) => quantity(value, unit, decimals, units);
  const range = (low: number | null, high: number | null, unit: string, decimals: number) =>
    shownInterval(low, high, unit, decimals, units);
  const rail = mode === 'rail';
  const rows: readonly (readonly [name: string, value: string, interval: string])[] = [
    ['Radius', q(row.radius_m, 'm', 0), range(row.radius_low_m, row.radius_high_m, 'm', 0)],
    ['Speed where it counts', q(row.speed_kmh, 'km/h', 1), range(row.speed_low_kmh, row.speed_high_kmh, 'km/h', 1)],
    ['Top speed in the curve', q(row.speed_max_kmh, 'km/h', 1), ''],
    rail
      ? ['Cant', q(row.cant_mm, 'mm', 0), row.cant_source]
      : ['Superelevation', q(row.superelevation_pct, '%', 1), row.cant_source],
    ...(rail
      ? ([
          ['Equilibrium cant', q(row.equilibrium_cant_mm, 'mm', 0), ''],
          [
            (row.cant_deficiency_mm ?? 0) < 0 ? 'Cant deficiency (excess)' : 'Cant deficiency',
            q(row.cant_deficiency_mm, 'mm', 1),
            range(row.cant_deficiency_low_mm, row.cant_deficiency_high_mm, 'mm', 1),
          ],
        ] as const)
      : ([
          ['Side friction demand', figure(row.side_friction, 3), ''],
          ['Ball-bank angle', `${figure(row.ball_bank_deg, 1)}°`, ''],
        ] as const)),
    [
      'Lateral, track plane',
      q(row.lateral_track_ms2, 'm/s²', 2),
      range(row.lateral_track_low_ms2, row.lateral_track_high_ms2, 'm/s²', 2),
    ],
    ['Lateral, body', q(row.lateral_body_ms2, 'm/s²', 2), 'modelled'],
    ['Lateral jerk', q(row.jerk_ms3, 'm/s³', 2), ''],
    ['Entry transition', ...end(curve.entry, q, range)],
    ['Exit transition', ...end(curve.exit, q, range)],
    ['Circular arc', q(row.arc_m, 'm', 0), ''],
    ['Deflection', `${figure(row.deflection_deg, 1)}°`, ''],
    ['Chainage', quantity(row.start_m, 'm', 0, units, true), `to ${quantity(row.end_m, 'm', 0, units, true)}`],
  ];
  return (
    <section>
      <h3>Figures</h3>
      <table class="plain figures">
        <thead class="sr">
          <tr>
            <th scope="col">Figure</th>
            <th scope="col">Value</th>
            <th scope="col">95 % interval or source</th>
          </tr>
        </thead>
        <tbody>
          {rows.map(([name, value, interval]) => (
            <tr key={name}>
              <th scope="row">{name}</th>
              <td class="num strong">{value}</td>
              <td class="num quiet-text">{interval}</td>
            </tr>
          ))}
        </tbody>
      </table>
    </section>
  );
}

function end(
  curveEnd: CurveEnd,
  q: (value: number | null, unit: string, decimals: number) => string,
  range: (low: number | null, high: number | null, unit: string, decimals: number) => string,
): [value: string, interval: string] {
  const { kind, lengthM } = curveEnd;
  const joined = curveEnd.joins === null ? '' : `, to curve ${String(curveEnd.joins)}`;
  if (kind === 'transition') return [q(lengthM.value, 'm', 0), `${range(lengthM.low, lengthM.high, 'm', 0)}${joined}`];
  if (kind === 'abrupt') return ['none', `abrupt change${joined}`];
  return ['not resolved', `at most ${q(lengthM.high, 'm', 0)}${joined}`];
}
