import type { ReportedRun } from './context.ts';
import { FITTED, INK, OVER, QUIET, RULE, UNDECIDED, type Drawing, type Mark } from './drawing.ts';
import { nearest } from './plan-drawing.ts';
import type { ProfileTable } from './profile-csv.ts';

interface Strip {
  readonly title: string;
  readonly column: string;
  readonly factor: number;
  /** Further column drawn over the first, for example the fitted curvature. */
  readonly over?: string;
  /** Column of standard deviations, drawn as a 95 % band. */
  readonly sd?: string;
  readonly signed: boolean;
  readonly limit: number | null;
}

const LEFT = 46;
const RIGHT = 8;
const STRIP_HEIGHT = 62;

/** Strips over chainage: curvature, speed, cant deficiency (rail), lateral acceleration with their limits. */
export function bandDrawing(run: ReportedRun, table: ProfileTable, mode: 'rail' | 'road', width = 520): Drawing {
  const strips = stripsFor(run, mode);
  const height = strips.length * (STRIP_HEIGHT + 14) + 20;
  const s = table.s_m ?? [];
  if (s.length < 2) return { width, height, marks: [] };
  const s0 = s[0]!;
  const s1 = s[s.length - 1]!;
  const x = (m: number) => LEFT + ((m - s0) / (s1 - s0)) * (width - LEFT - RIGHT);
  const marks: Mark[] = [];
  for (const { row } of run.curves) {
    const fill = row.verdict === 'over' ? OVER : row.verdict === 'undecided' ? UNDECIDED : QUIET;
    const [a, b] = [x(row.start_m), x(row.end_m)];
    marks.push({
      kind: 'area',
      points: [a, 8, b, 8, b, height - 18, a, height - 18],
      fill,
      opacity: row.verdict === 'over' ? 0.16 : 0.07,
    });
    marks.push({
      kind: 'text',
      x: (a + b) / 2,
      y: 7,
      text: String(row.curve),
      size: 5.5,
      fill,
      anchor: 'middle',
      bold: row.verdict === 'over',
    });
  }
  strips.forEach((strip, k) => {
    marks.push(...stripMarks(strip, table, x, 12 + k * (STRIP_HEIGHT + 14), width));
  });
  const step = niceStep((s1 - s0) / 1000 / 8);
  for (let km = Math.ceil(s0 / 1000 / step) * step; km * 1000 <= s1; km += step) {
    marks.push({
      kind: 'text',
      x: x(km * 1000),
      y: height - 8,
      text: `${String(Math.round(km * 100) / 100)} km`,
      size: 6.5,
      fill: QUIET,
      anchor: 'middle',
    });
  }
  return { width, height, marks };
}

function stripsFor(run: ReportedRun, mode: 'rail' | 'road'): Strip[] {
  const limitOf = (criterion: string): number | null => {
    for (const { criteria } of run.curves) {
      const found = criteria.find((c) => c.criterion === criterion && c.limit !== null);
      if (found !== undefined) return found.limit;
    }
    return null;
  };
  return [
    {
      title: 'Curvature 1/km, left +',
      column: 'curvature_1_m',
      factor: 1000,
      over: 'curvature_fit_1_m',
      sd: 'curvature_sd_1_m',
      signed: true,
      limit: null,
    },
    { title: 'Speed km/h', column: 'speed_ms', factor: 3.6, signed: false, limit: null },
    ...(mode === 'rail'
      ? [
          {
            title: 'Cant deficiency mm',
            column: 'cant_deficiency_mm',
            factor: 1,
            signed: true,
            limit: limitOf('cant_deficiency'),
          },
        ]
      : []),
    {
      title: 'Lateral, track plane m/s²',
      column: 'lateral_track_ms2',
      factor: 1,
      sd: 'lateral_track_sd_ms2',
      signed: true,
      limit: limitOf('lateral_track'),
    },
  ];
}

function stripMarks(strip: Strip, table: ProfileTable, x: (m: number) => number, top: number, width: number): Mark[] {
  const s = table.s_m!;
  const values = table[strip.column] ?? [];
  const fitted = strip.over === undefined ? undefined : table[strip.over];
  let extreme = strip.limit === null ? 0 : strip.limit * 1.15;
  // The scale follows the fitted line where there is one: noise of single places must not flatten it.
  const ruling = fitted ?? values;
  for (let i = 0; i < s.length; i++) {
    const v = Math.abs(ruling[i] ?? NaN) * strip.factor;
    if (v > extreme) extreme = v;
  }
  if (extreme === 0) extreme = 1;
  extreme *= fitted === undefined ? 1.05 : 1.4;
  const zero = strip.signed ? top + STRIP_HEIGHT / 2 : top + STRIP_HEIGHT;
  const scale = (strip.signed ? STRIP_HEIGHT / 2 : STRIP_HEIGHT) / extreme;
  const y = (v: number) => Math.min(top + STRIP_HEIGHT, Math.max(top, zero - v * scale));
  const line = (column: ArrayLike<number>, offset = 0, sd?: ArrayLike<number>): number[] => {
    const points: number[] = [];
    for (let i = 0; i < s.length; i++) {
      const v = (column[i] ?? NaN) * strip.factor + offset * (sd?.[i] ?? 0) * strip.factor;
      points.push(x(s[i]!), Number.isFinite(v) ? y(v) : NaN);
    }
    return points;
  };
  const marks: Mark[] = [
    { kind: 'line', points: [LEFT, zero, width - RIGHT, zero], stroke: RULE, width: 0.6 },
    { kind: 'text', x: LEFT, y: top - 2, text: strip.title, size: 6.5, fill: INK, anchor: 'start', bold: true },
    { kind: 'text', x: LEFT - 4, y: top + 6, text: tick(extreme), size: 6, fill: QUIET, anchor: 'end' },
    {
      kind: 'text',
      x: LEFT - 4,
      y: top + STRIP_HEIGHT,
      text: strip.signed ? tick(-extreme) : '0',
      size: 6,
      fill: QUIET,
      anchor: 'end',
    },
  ];
  const sd = strip.sd === undefined ? undefined : table[strip.sd];
  if (sd !== undefined) marks.push(...intervalMarks(line(values, -1.96, sd), line(values, 1.96, sd)));
  marks.push({
    kind: 'line',
    points: line(values),
    stroke: fitted === undefined ? INK : QUIET,
    width: fitted === undefined ? 0.9 : 0.6,
  });
  if (fitted !== undefined) marks.push({ kind: 'line', points: line(fitted), stroke: FITTED, width: 1.1 });
  if (strip.limit !== null) {
    for (const v of strip.signed ? [strip.limit, -strip.limit] : [strip.limit]) {
      marks.push({ kind: 'line', points: [LEFT, y(v), width - RIGHT, y(v)], stroke: OVER, width: 0.7, dash: [4, 2] });
    }
    marks.push({
      kind: 'text',
      x: width - RIGHT,
      y: y(strip.limit) - 2,
      text: `limit ${tick(strip.limit)}`,
      size: 6,
      fill: OVER,
      anchor: 'end',
    });
  }
  return marks;
}

function intervalMarks(lower: number[], upper: number[]): Mark[] {
  const marks: Mark[] = [];
  let start = 0;
  for (let i = 0; i <= lower.length; i += 2) {
    const open = i < lower.length && Number.isFinite(lower[i + 1]) && Number.isFinite(upper[i + 1]);
    if (open) continue;
    if (i - start >= 4) {
      const back: number[] = [];
      for (let j = i - 2; j >= start; j -= 2) back.push(lower[j]!, lower[j + 1]!);
      marks.push({ kind: 'area', points: [...upper.slice(start, i), ...back], fill: QUIET, opacity: 0.22 });
    }
    start = i + 2;
  }
  return marks;
}

function tick(value: number): string {
  return Math.abs(value) >= 20 ? value.toFixed(0) : value.toPrecision(2);
}

function niceStep(raw: number): number {
  const power = 10 ** Math.floor(Math.log10(Math.max(raw, 1e-6)));
  const lead = raw / power;
  return power * (lead <= 1 ? 1 : lead <= 2 ? 2 : lead <= 5 ? 5 : 10);
}

/**
 * Every column thinned to about `points` places for a drawing; of each group the place of largest
 * |utilisation| is kept, so that no hotspot disappears.
 */
export function thinForDrawing(table: ProfileTable, points: number): ProfileTable {
  const count = table.s_m?.length ?? 0;
  if (count <= points) return table;
  const size = Math.ceil(count / points);
  const keep: number[] = [];
  for (let start = 0; start < count; start += size) {
    let best = start;
    for (let i = start; i < Math.min(count, start + size); i++) {
      if (Math.abs(table.utilisation?.[i] ?? 0) > Math.abs(table.utilisation?.[best] ?? 0)) best = i;
    }
    keep.push(best);
  }
  const last = nearest(table.s_m!, table.s_m![count - 1]!);
  if (keep.at(-1) !== last) keep.push(last);
  return Object.fromEntries(Object.entries(table).map(([name, column]) => [name, keep.map((i) => column[i] ?? NaN)]));
}
