import { interpolateCividis } from 'd3-scale-chromatic';
import type { ReportedRun } from './context.ts';
import { INK, OVER, QUIET, RULE, UNDECIDED, type Drawing, type Mark } from './drawing.ts';
import type { ProfileTable } from './profile-csv.ts';

/** Metres per radian on a sphere of the Earth's mean radius: enough for a picture. */
const EARTH_RADIUS_M = 6371008.8;
/** Classes of utilisation below the limit, coloured from cividis. */
const CLASSES = 5;

/** Local map of a profile: true proportions, north up. */
interface Projection {
  x(i: number): number;
  y(i: number): number;
  readonly metresPerPoint: number;
}

function project(
  table: ProfileTable,
  from: number,
  to: number,
  width: number,
  height: number,
  margin: number,
): Projection {
  const lat = table.lat!;
  const lon = table.lon!;
  const lat0 = lat[Math.floor((from + to) / 2)]!;
  const lon0 = lon[Math.floor((from + to) / 2)]!;
  const east = (i: number) => radians(wrap(lon[i]! - lon0)) * Math.cos(radians(lat0)) * EARTH_RADIUS_M;
  const north = (i: number) => radians(lat[i]! - lat0) * EARTH_RADIUS_M;
  let [w, e, s, n] = [Infinity, -Infinity, Infinity, -Infinity];
  for (let i = from; i <= to; i++) {
    w = Math.min(w, east(i));
    e = Math.max(e, east(i));
    s = Math.min(s, north(i));
    n = Math.max(n, north(i));
  }
  const metresPerPoint = Math.max((e - w) / (width - 2 * margin), (n - s) / (height - 2 * margin), 1e-3);
  const x0 = width / 2 - (w + e) / 2 / metresPerPoint;
  const y0 = height / 2 + (s + n) / 2 / metresPerPoint;
  return { x: (i) => x0 + east(i) / metresPerPoint, y: (i) => y0 - north(i) / metresPerPoint, metresPerPoint };
}

/** The run on a plan, coloured by utilisation; exceedances heavier, cased and numbered. */
export function planDrawing(run: ReportedRun, table: ProfileTable, width = 520, height = 300): Drawing {
  const count = table.s_m?.length ?? 0;
  if (count < 2) return { width, height, marks: [] };
  const p = project(table, 0, count - 1, width, height, 26);
  const marks: Mark[] = [];
  const over: number[] = [];
  const classes: number[][] = Array.from({ length: CLASSES }, () => []);
  for (let i = 0; i + 1 < count; i++) {
    const u = Math.abs(table.utilisation?.[i] ?? NaN);
    const target = u > 1 ? over : classes[Math.min(CLASSES - 1, Math.floor((Number.isFinite(u) ? u : 0) * CLASSES))]!;
    target.push(p.x(i), p.y(i), p.x(i + 1), p.y(i + 1), NaN, NaN);
  }
  classes.forEach((points, k) => {
    marks.push({
      kind: 'line',
      points,
      stroke: hexColour(interpolateCividis(0.05 + (0.8 * k) / (CLASSES - 1))),
      width: 1.6,
    });
  });
  marks.push(
    { kind: 'line', points: over, stroke: INK, width: 5.4 },
    { kind: 'line', points: over, stroke: OVER, width: 3.6 },
  );
  for (const { row } of run.curves) {
    if (row.verdict !== 'over' && row.verdict !== 'undecided') continue;
    const i = nearest(table.s_m!, (row.start_m + row.end_m) / 2);
    const fill = row.verdict === 'over' ? OVER : UNDECIDED;
    marks.push(
      { kind: 'disc', x: p.x(i) + 9, y: p.y(i) - 9, radius: 6.5, fill: '#ffffff', stroke: fill },
      {
        kind: 'text',
        x: p.x(i) + 9,
        y: p.y(i) - 6.6,
        text: String(row.curve),
        size: 7,
        fill,
        anchor: 'middle',
        bold: true,
      },
    );
  }
  return { width, height, marks: [...marks, ...scaleAndNorth(p, width, height)] };
}

/** One curve in plan with 40 % of its length on either side, tangent points marked. */
export function curveSketch(
  table: ProfileTable,
  startM: number,
  arcStartM: number,
  arcEndM: number,
  endM: number,
): Drawing {
  const [width, height] = [240, 160];
  const count = table.s_m?.length ?? 0;
  if (count < 2) return { width, height, marks: [] };
  const margin = Math.max(40, 0.4 * (endM - startM));
  const from = nearest(table.s_m!, startM - margin);
  const to = Math.max(from + 1, nearest(table.s_m!, endM + margin));
  if (to >= count) return { width, height, marks: [] };
  const p = project(table, from, to, width, height, 18);
  const points: number[] = [];
  for (let i = from; i <= to; i++) points.push(p.x(i), p.y(i));
  const marks: Mark[] = [{ kind: 'line', points, stroke: INK, width: 1.6 }];
  for (const s of new Set([startM, arcStartM, arcEndM, endM])) {
    const i = nearest(table.s_m!, s);
    marks.push({ kind: 'disc', x: p.x(i), y: p.y(i), radius: 2.6, fill: '#ffffff', stroke: INK });
  }
  return { width, height, marks: [...marks, ...scaleAndNorth(p, width, height)] };
}

function scaleAndNorth(p: Projection, width: number, height: number): Mark[] {
  const wanted = 70 * p.metresPerPoint;
  const power = 10 ** Math.floor(Math.log10(wanted));
  const length = power * (wanted / power >= 5 ? 5 : wanted / power >= 2 ? 2 : 1);
  const x1 = 10 + length / p.metresPerPoint;
  const y = height - 10;
  return [
    { kind: 'line', points: [10, y - 3, 10, y, x1, y, x1, y - 3], stroke: QUIET, width: 0.8 },
    {
      kind: 'text',
      x: x1 + 4,
      y: y + 1,
      text: length >= 1000 ? `${String(length / 1000)} km` : `${String(length)} m`,
      size: 7,
      fill: QUIET,
      anchor: 'start',
    },
    {
      kind: 'line',
      points: [
        width - 14,
        height - 10,
        width - 14,
        height - 30,
        width - 17,
        height - 24,
        NaN,
        NaN,
        width - 14,
        height - 30,
        width - 11,
        height - 24,
      ],
      stroke: QUIET,
      width: 0.9,
    },
    { kind: 'text', x: width - 14, y: height - 33, text: 'N', size: 7, fill: QUIET, anchor: 'middle' },
    {
      kind: 'line',
      points: [0.5, 0.5, width - 0.5, 0.5, width - 0.5, height - 0.5, 0.5, height - 0.5, 0.5, 0.5],
      stroke: RULE,
      width: 0.6,
    },
  ];
}

/** Index of the entry of an ascending column nearest to `value`. */
export function nearest(ascending: ArrayLike<number>, value: number): number {
  let low = 0;
  let high = ascending.length - 1;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (ascending[middle]! < value) low = middle + 1;
    else high = middle;
  }
  return low > 0 && value - ascending[low - 1]! < ascending[low]! - value ? low - 1 : low;
}

/** `rgb(r, g, b)` as `#rrggbb`, the one form that SVG and PDF both read. */
function hexColour(rgb: string): string {
  return `#${(rgb.match(/\d+/g) ?? []).map((part) => Number(part).toString(16).padStart(2, '0')).join('')}`;
}

function radians(deg: number): number {
  return (deg * Math.PI) / 180;
}

/** Difference of longitudes within -180..180 degrees. */
function wrap(deg: number): number {
  return deg > 180 ? deg - 360 : deg < -180 ? deg + 360 : deg;
}
