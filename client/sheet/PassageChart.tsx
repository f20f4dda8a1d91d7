import type { Passage } from '../../shared/model/passage.ts';
import type { CurveRow } from '../../shared/schema/curve-row.ts';
import { figure, quantity } from '../parts/text.ts';
import { shownUnit, unitRatio } from '../parts/units.ts';
import { app } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

const [WIDTH, HEIGHT] = [360, 132];
const [LEFT, RIGHT, TOP, BOTTOM] = [34, 8, 10, 20];
const Z95 = 1.96;

/** Speed through the curve with its interval, over the transitions and the arc, against the complying speed. */
export function PassageChart(props: {
  readonly passage: Passage;
  readonly row: CurveRow;
  readonly triedKmh: number | null;
}) {
  const { passage, row, triedKmh } = props;
  const units = useSlice(app, (s) => s.units);
  const shown = shownUnit('km/h', units);
  const ratio = unitRatio('km/h', shown);
  const { chainageM: s, curve } = passage;
  const v = passage.speedMps.map((mps) => mps * 3.6 * ratio);
  const half = passage.speedSdMps.map((mps) => Z95 * mps * 3.6 * ratio);
  const complying = row.complying_speed_kmh === null ? null : row.complying_speed_kmh * ratio;
  const tried = triedKmh === null ? null : triedKmh * ratio;
  const all = [...v.map((x, i) => x + half[i]!), ...v.map((x, i) => x - half[i]!), complying, tried].filter(
    (x) => x !== null && Number.isFinite(x),
  ) as number[];
  const low = Math.max(0, Math.floor((Math.min(...all) - 3) / 10) * 10);
  const high = Math.ceil((Math.max(...all) + 3) / 10) * 10;
  const [first, last] = [s[0]!, s[s.length - 1]!];
  const x = (m: number) => LEFT + ((m - first) / Math.max(1e-6, last - first)) * (WIDTH - LEFT - RIGHT);
  const y = (value: number) => TOP + ((high - value) / (high - low)) * (HEIGHT - TOP - BOTTOM);
  const path = (values: readonly number[]) =>
    values.map((value, i) => `${i === 0 ? 'M' : 'L'}${x(s[i]!).toFixed(1)} ${y(value).toFixed(1)}`).join('');
  const band = `${path(v.map((value, i) => value + half[i]!))}${s
    .map((_, k) => s.length - 1 - k)
    .map((i) => `L${x(s[i]!).toFixed(1)} ${y(v[i]! - half[i]!).toFixed(1)}`)
    .join('')}Z`;
  const middle = (low + high) / 2;
  return (
    <section>
      <h3>Passage</h3>
      <svg
        class="chart"
        viewBox={`0 0 ${String(WIDTH)} ${String(HEIGHT)}`}
        role="img"
        aria-label={`Speed through the curve: ${figure(Math.min(...v), 0)} to ${figure(Math.max(...v), 0)} ${shown}${complying === null ? '' : `; ${figure(complying, 0)} would comply`}`}
      >
        <rect
          class="arc-zone"
          x={x(curve.arcStartM)}
          y={TOP}
          width={Math.max(0, x(curve.arcEndM) - x(curve.arcStartM))}
          height={HEIGHT - TOP - BOTTOM}
        />
        {[low, middle, high].map((tick) => (
          <g key={tick}>
            <line class="grid-line" x1={LEFT} x2={WIDTH - RIGHT} y1={y(tick)} y2={y(tick)} />
            <text x={LEFT - 5} y={y(tick) + 3.5} text-anchor="end">
              {figure(tick, 0)}
            </text>
          </g>
        ))}
        <path class="interval" d={band} />
        <path class="speed-line" d={path(v)} />
        {complying !== null && complying >= low && (
          <>
            <line class="comply-line" x1={LEFT} x2={WIDTH - RIGHT} y1={y(complying)} y2={y(complying)} />
            <text class="comply-text" x={WIDTH - RIGHT - 2} y={y(complying) - 4} text-anchor="end">
              {figure(complying, 0)} would comply
            </text>
          </>
        )}
        {tried !== null && <line class="tried-line" x1={LEFT} x2={WIDTH - RIGHT} y1={y(tried)} y2={y(tried)} />}
        <text x={LEFT} y={HEIGHT - 5}>
          {quantity(first, 'm', 0, units, true)}
        </text>
        <text x={WIDTH - RIGHT} y={HEIGHT - 5} text-anchor="end">
          {quantity(last, 'm', 0, units, true)}
        </text>
        <text x={(x(curve.arcStartM) + x(curve.arcEndM)) / 2} y={HEIGHT - 5} text-anchor="middle">
          circular arc
        </text>
      </svg>
      <p class="quiet-text caption">
        Speed, {shown}, with its 95 % interval; shaded: the circular arc.
        {tried === null ? '' : ' Dotted: the speed tried.'}
      </p>
    </section>
  );
}
