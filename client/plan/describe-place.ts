import type { ProfileWindow } from '../../shared/schema/api.ts';
import { figure, quantity } from '../parts/text.ts';
import type { ShownUnits } from '../parts/units.ts';

const Z95 = 1.96;

/** What is known at one place of the run, with 95 % intervals, in the reader's units. */
export function describePlace(columns: ProfileWindow['columns'], i: number, units: ShownUnits): string {
  const at = (name: string) => columns[name]?.[i] ?? null;
  const withInterval = (value: number | null, sd: number | null, unit: string, decimals: number) =>
    sd === null
      ? quantity(value, unit, decimals, units)
      : `${quantity(value, unit, decimals, units)} ± ${quantity(Z95 * sd, unit, decimals, units)}`;
  const times = (value: number | null, factor: number) => (value === null ? null : value * factor);
  const fitted = at('curvature_fit_1_m');
  const use = at('utilisation');
  return [
    quantity(at('s_m'), 'm', 0, units, true),
    withInterval(times(at('speed_ms'), 3.6), times(at('speed_sd_ms'), 3.6), 'km/h', 1),
    fitted === null || fitted === 0
      ? 'straight'
      : `R ${quantity(1 / Math.abs(fitted), 'm', 0, units)} ${fitted > 0 ? 'left' : 'right'}`,
    `lateral ${withInterval(at('lateral_track_ms2'), at('lateral_track_sd_ms2'), 'm/s²', 2)}`,
    ...(use === null ? [] : [`utilisation ${figure(use, 2)}`]),
    ...(at('observed') === 0 ? ['not observed'] : []),
  ].join(' · ');
}
