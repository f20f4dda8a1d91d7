import { useEffect, useMemo, useState } from 'preact/hooks';
import type { Curve } from '../../shared/model/alignment.ts';
import type { ProfileWindow } from '../../shared/schema/api.ts';
import { api } from '../api.ts';
import { quantity } from '../parts/text.ts';
import { unitRatio } from '../parts/units.ts';
import { app, report } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { fittedPath, laidOn, pointAt, turned, type PathPoint } from './curve-path.ts';

const [WIDTH, LEAST_HEIGHT, MOST_HEIGHT] = [360, 90, 260];
const PAD = 26;
const POINTS = 160;
/** Metres a degree of latitude; good enough to lay one path on another. */
const METRES_PER_DEGREE = 111_195;

/** Plan of the fitted geometry in true proportion over the recorded path, with its tangent points, north and a scale. */
export function Sketch({ runId, curve }: { readonly runId: string; readonly curve: Curve }) {
  const units = useSlice(app, (s) => s.units);
  const marginM = 0.2 * (curve.endM - curve.startM) + 15;
  const recorded = useRecordedPath(runId, curve.startM - marginM, curve.endM + marginM);
  const drawn = useMemo(() => place(curve, marginM, recorded), [curve, marginM, recorded]);
  const { fitted, under, northRad } = drawn;
  const all = [...fitted, ...under];
  const [x0, x1] = [Math.min(...all.map(({ x }) => x)), Math.max(...all.map(({ x }) => x))];
  const [y0, y1] = [Math.min(...all.map(({ y }) => y)), Math.max(...all.map(({ y }) => y))];
  const scale = Math.min((WIDTH - 2 * PAD) / Math.max(1, x1 - x0), (MOST_HEIGHT - 2 * PAD) / Math.max(1, y1 - y0));
  const height = Math.max(LEAST_HEIGHT, (y1 - y0) * scale + 2 * PAD + 16);
  const px = (p: PathPoint) => WIDTH / 2 + (p.x - (x0 + x1) / 2) * scale;
  const py = (p: PathPoint) => (height - 16) / 2 - (p.y - (y0 + y1) / 2) * scale;
  const line = (points: readonly PathPoint[]) =>
    points.map((p, i) => `${i === 0 ? 'M' : 'L'}${px(p).toFixed(1)} ${py(p).toFixed(1)}`).join('');
  const lengthUnit = units.length;
  const bar = niceLength((70 / scale) * unitRatio('m', lengthUnit));
  const barPx = (bar / unitRatio('m', lengthUnit)) * scale;
  return (
    <section>
      <h3>Plan</h3>
      <svg
        class="chart"
        viewBox={`0 0 ${String(WIDTH)} ${height.toFixed(0)}`}
        role="img"
        aria-label={`Plan of curve ${String(curve.number)} in true proportion: ${curve.hand}, radius ${quantity(curve.radiusM.value, 'm', 0, units)}`}
      >
        <path class="recorded-path" d={line(under)} />
        <path class="fitted-path" d={line(fitted)} />
        <path class="fitted-arc" d={line(fitted.filter(({ s }) => s >= curve.arcStartM && s <= curve.arcEndM))} />
        {tangentPoints(curve).map(([s, name]) => {
          const p = pointAt(fitted, s);
          return (
            <circle key={name} class="tangent-point" cx={px(p)} cy={py(p)} r="3.6">
              <title>{`${name}: ${quantity(s, 'm', 0, units, true)}`}</title>
            </circle>
          );
        })}
        <path class="scale-bar" d={`M10 ${(height - 12).toFixed(1)}v5h${barPx.toFixed(1)}v-5`} />
        <text x={16 + barPx} y={height - 6}>
          {bar} {lengthUnit}
        </text>
        {northRad !== null && (
          <g transform={`translate(${String(WIDTH - 16)} 18) rotate(${((-northRad * 180) / Math.PI + 90).toFixed(1)})`}>
            <path class="north-arrow" d="M0 -11 4 6 0 3 -4 6Z" />
          </g>
        )}
      </svg>
      <p class="quiet-text caption">
        Heavy: the circular arc. Rings: tangent points. Grey: the path as recorded. Arrow: north.
      </p>
    </section>
  );
}

function tangentPoints(curve: Curve): readonly (readonly [s: number, name: string])[] {
  return [
    [curve.startM, 'Start of the entry transition'],
    [curve.arcStartM, 'Start of the arc'],
    [curve.arcEndM, 'End of the arc'],
    [curve.endM, 'End of the exit transition'],
  ];
}

function useRecordedPath(runId: string, fromM: number, toM: number): readonly PathPoint[] {
  const [path, setPath] = useState<readonly PathPoint[]>([]);
  useEffect(() => {
    const abort = new AbortController();
    api
      .profile(runId, Math.max(0, fromM), toM, POINTS, abort.signal)
      .then((window) => setPath(localPath(window)))
      .catch((error: unknown) => {
        if (!abort.signal.aborted) report(error);
      });
    return () => abort.abort();
  }, [runId, fromM, toM]);
  return path;
}

function localPath({ columns }: ProfileWindow): PathPoint[] {
  const lat = columns.lat ?? [];
  const lon = columns.lon ?? [];
  const first = lat.findIndex((value) => value !== null);
  if (first < 0) return [];
  const [lat0, lon0] = [lat[first]!, lon[first]!];
  const perLon = METRES_PER_DEGREE * Math.cos((lat0 * Math.PI) / 180);
  return (columns.s_m ?? []).flatMap((s, i) => {
    const [a, o] = [lat[i] ?? null, lon[i] ?? null];
    if (s === null || a === null || o === null) return [];
    // Across the date line the shorter way round.
    const east = ((o - lon0 + 540) % 360) - 180;
    return [{ s, x: east * perLon, y: (a - lat0) * METRES_PER_DEGREE }];
  });
}

/** Fitted and recorded path with the chord level, the apex upwards, and where north lies then. */
function place(
  curve: Curve,
  marginM: number,
  recorded: readonly PathPoint[],
): { fitted: readonly PathPoint[]; under: readonly PathPoint[]; northRad: number | null } {
  const own = fittedPath(curve, marginM);
  const fitted = recorded.length < 3 ? own : laidOn(own, recorded).path;
  const [a, b] = [fitted[0]!, fitted[fitted.length - 1]!];
  const level = -Math.atan2(b.y - a.y, b.x - a.x);
  return {
    fitted: turned(fitted, level),
    under: turned(recorded, level),
    northRad: recorded.length < 3 ? null : Math.PI / 2 + level,
  };
}

function niceLength(raw: number): number {
  const power = 10 ** Math.floor(Math.log10(Math.max(raw, 1e-3)));
  const lead = raw / power;
  return power * (lead >= 5 ? 5 : lead >= 2 ? 2 : 1);
}
