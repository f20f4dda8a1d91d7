import type { ProfileWindow } from '../../shared/schema/api.ts';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import { figure } from '../parts/text.ts';
import type { Strip, Trace } from './strips.ts';
import type { Surface } from './surface.ts';

export interface BandColours {
  readonly panel: string;
  readonly line: string;
  readonly ink: string;
  readonly ink2: string;
  readonly ink3: string;
  readonly fitted: string;
  readonly estimate: string;
  readonly interval: string;
  readonly limit: string;
  readonly over: string;
  readonly overSoft: string;
  readonly undecided: string;
  readonly undecidedSoft: string;
  readonly sunken: string;
  readonly accent: string;
}

export interface BandDrawing {
  readonly width: number;
  readonly height: number;
  readonly windowM: readonly [number, number];
  readonly lengthM: number;
  readonly strips: readonly Strip[];
  readonly data: ProfileWindow | null;
  /** The whole run, coarse, for the overview. */
  readonly overview: ProfileWindow | null;
  readonly curves: readonly AssessedCurve[];
  readonly selected: number | null;
  readonly colours: BandColours;
}

export const LEFT = 46;
export const RIGHT = 96;
const TOP = 18;
const AXIS = 22;
export const OVERVIEW = 34;
const GAP = 8;

/** Where things lie: shared by the drawing and the pointer. */
export function layout(drawing: Pick<BandDrawing, 'width' | 'height' | 'strips' | 'windowM'>) {
  const { width, height, strips, windowM } = drawing;
  const inner = Math.max(60, width - LEFT - RIGHT);
  const room = height - TOP - AXIS - OVERVIEW - GAP * strips.length;
  const stripHeight = Math.max(28, room / Math.max(1, strips.length));
  const span = Math.max(1, windowM[1] - windowM[0]);
  return {
    inner,
    stripHeight,
    overviewTop: height - OVERVIEW + 4,
    top: (k: number) => TOP + k * (stripHeight + GAP),
    x: (m: number) => LEFT + ((m - windowM[0]) / span) * inner,
    chainage: (x: number) => windowM[0] + ((x - LEFT) / inner) * span,
  };
}

/** Draws all strips, the axis and the overview. */
export function drawBand(surface: Surface, drawing: BandDrawing): void {
  const { width, height, colours, strips, curves, data } = drawing;
  const place = layout(drawing);
  surface.clip(0, 0, width, height);
  surface.box(0, 0, width, height, colours.panel);
  const bottom = place.top(strips.length - 1) + place.stripHeight;
  surface.clip(LEFT, 0, place.inner, bottom);
  let lastLabel = -Infinity;
  for (const { row } of curves) {
    const [a, b] = [place.x(row.start_m), place.x(row.end_m)];
    if (b < LEFT || a > LEFT + place.inner) continue;
    const chosen = row.curve === drawing.selected;
    const fill =
      row.verdict === 'over' ? colours.overSoft : row.verdict === 'undecided' ? colours.undecidedSoft : colours.sunken;
    surface.box(a, 0, Math.max(1, b - a), bottom, fill);
    if (chosen) {
      surface.line([a, 0, a, bottom], colours.accent, 1.5);
      surface.line([b, 0, b, bottom], colours.accent, 1.5);
    }
    const middle = (Math.max(a, LEFT) + Math.min(b, LEFT + place.inner)) / 2;
    if (middle - lastLabel > 26 || chosen) {
      const sign = row.verdict === 'over' ? '▲' : row.verdict === 'undecided' ? '┅' : '';
      const colour =
        row.verdict === 'over' ? colours.over : row.verdict === 'undecided' ? colours.undecided : colours.ink2;
      surface.text(middle, 12, `${sign}${String(row.curve)}`, colour, 11, 'middle', chosen || row.verdict === 'over');
      lastLabel = middle;
    }
  }
  strips.forEach((strip, k) => {
    drawStrip(surface, drawing, strip, place.top(k), place.stripHeight, place);
  });
  surface.clip(0, 0, width, height);
  drawAxis(surface, drawing, bottom, place);
  drawOverview(surface, drawing, place.overviewTop);
  if (data === null) surface.text(LEFT + place.inner / 2, height / 2, 'Loading …', colours.ink3, 12, 'middle');
}

type Place = ReturnType<typeof layout>;

function drawStrip(
  surface: Surface,
  drawing: BandDrawing,
  strip: Strip,
  top: number,
  height: number,
  place: Place,
): void {
  const { colours, data } = drawing;
  const limit = limitOf(strip, drawing.curves);
  const range = rangeOf(strip, data, limit);
  const y = (v: number) => top + height - ((v - range[0]) / (range[1] - range[0])) * height;
  surface.clip(0, top - 2, drawing.width, height + 4);
  surface.line([LEFT, top + height, LEFT + place.inner, top + height], colours.line, 1);
  if (strip.signed) surface.line([LEFT, y(0), LEFT + place.inner, y(0)], colours.line, 1);
  surface.text(LEFT - 6, top + 9, figure(range[1], decimalsFor(range)), colours.ink3, 10, 'end');
  surface.text(LEFT - 6, top + height - 1, figure(range[0], decimalsFor(range)), colours.ink3, 10, 'end');
  if (strip.signed && height > 50) surface.text(LEFT - 6, y(0) + 3, '0', colours.ink3, 10, 'end');
  surface.clip(LEFT, top - 1, place.inner, height + 2);
  if (data !== null) {
    const s = data.columns.s_m ?? [];
    drawUnobserved(surface, data, top, height, place, colours);
    for (const trace of strip.traces) {
      const values = data.columns[trace.column];
      if (values === undefined) continue;
      if (trace.sd !== undefined)
        drawInterval(surface, s, values, data.columns[trace.sd] ?? [], trace.factor, place, y, colours);
      const points: number[] = [];
      for (let i = 0; i < s.length; i++) {
        const v = values[i] ?? null;
        points.push(place.x(s[i] ?? 0), v === null ? NaN : y(v * trace.factor));
      }
      const style = strokeOf(trace, colours);
      surface.line(points, style.colour, style.width, style.dash);
    }
  }
  if (limit !== null) {
    for (const v of strip.signed ? [limit.value, -limit.value] : [limit.value]) {
      surface.line([LEFT, y(v), LEFT + place.inner, y(v)], colours.limit, 1.2, [6, 3]);
    }
    surface.text(
      LEFT + place.inner - 4,
      y(limit.value) - 3,
      `limit ${figure(limit.value, strip.decimals)}`,
      colours.limit,
      10,
      'end',
      true,
    );
  }
  surface.text(LEFT + 4, top + 10, `${strip.title}  ${strip.unit}`, colours.ink, 11, 'start', true);
}

function drawInterval(
  surface: Surface,
  s: readonly (number | null)[],
  values: readonly (number | null)[],
  sd: readonly (number | null)[],
  factor: number,
  place: Place,
  y: (v: number) => number,
  colours: BandColours,
): void {
  const upper: number[] = [];
  const lower: number[] = [];
  const close = () => {
    if (upper.length >= 4) {
      const back: number[] = [];
      for (let i = lower.length - 2; i >= 0; i -= 2) back.push(lower[i]!, lower[i + 1]!);
      surface.area([...upper, ...back], colours.interval);
    }
    upper.length = 0;
    lower.length = 0;
  };
  for (let i = 0; i < s.length; i++) {
    const v = values[i] ?? null;
    const e = sd[i] ?? null;
    if (v === null || e === null) {
      close();
      continue;
    }
    const x = place.x(s[i] ?? 0);
    upper.push(x, y((v + 1.96 * e) * factor));
    lower.push(x, y((v - 1.96 * e) * factor));
  }
  close();
}

/** Stretches that no good fix has seen are hatched. */
function drawUnobserved(
  surface: Surface,
  data: ProfileWindow,
  top: number,
  height: number,
  place: Place,
  colours: BandColours,
): void {
  const s = data.columns.s_m ?? [];
  const observed = data.columns.observed ?? [];
  let from = -1;
  for (let i = 0; i <= s.length; i++) {
    if (i < s.length && observed[i] === 0) {
      if (from < 0) from = i;
      continue;
    }
    if (from < 0) continue;
    const a = place.x(s[Math.max(0, from - 1)] ?? 0);
    const b = place.x(s[Math.min(s.length - 1, i)] ?? 0);
    for (let x = a; x < b; x += 7) surface.line([x, top + height, Math.min(b, x + height / 3), top], colours.line, 1);
    from = -1;
  }
}

function strokeOf(trace: Trace, colours: BandColours): { colour: string; width: number; dash: readonly number[] } {
  switch (trace.style) {
    case 'main':
      return { colour: colours.fitted, width: 1.8, dash: [] };
    case 'estimate':
      return { colour: colours.estimate, width: 1.1, dash: [] };
    case 'second':
      return { colour: colours.ink2, width: 1.3, dash: [2, 3] };
    case 'measured':
      return { colour: colours.undecided, width: 1, dash: [] };
  }
}

/** The limit most curves are judged by, where the set has one. */
function limitOf(strip: Strip, curves: readonly AssessedCurve[]): { value: number } | null {
  if (strip.criterion === null) return null;
  for (const { criteria } of curves) {
    const found = criteria.find((c) => c.criterion === strip.criterion);
    if (found !== undefined && found.limit !== null) return { value: found.limit };
  }
  return null;
}

function rangeOf(strip: Strip, data: ProfileWindow | null, limit: { value: number } | null): [number, number] {
  let most = Math.max(strip.least, limit === null ? 0 : limit.value * 1.15);
  let least = strip.signed ? 0 : Infinity;
  // The noisy estimate does not set the scale; the fitted line does.
  for (const trace of strip.traces) {
    if (trace.style === 'estimate' || trace.style === 'measured') continue;
    for (const v of data?.columns[trace.column] ?? []) {
      if (v === null) continue;
      const value = v * trace.factor;
      most = Math.max(most, strip.signed ? Math.abs(value) * 1.12 : value * 1.06);
      least = Math.min(least, value);
    }
  }
  if (strip.signed) return [-most, most];
  if (strip.id === 'elevation' && Number.isFinite(least))
    return [Math.floor(least - 1), Math.max(most, least + strip.least)];
  return [Math.min(0, Number.isFinite(least) ? least : 0), most];
}

function decimalsFor([low, high]: readonly [number, number]): number {
  const span = high - low;
  return span >= 20 ? 0 : span >= 2 ? 1 : 2;
}

function drawAxis(surface: Surface, drawing: BandDrawing, bottom: number, place: Place): void {
  const { windowM, colours } = drawing;
  const step = niceStep((windowM[1] - windowM[0]) / Math.max(2, place.inner / 90));
  const decimals = step >= 1000 ? 0 : step >= 100 ? 1 : step >= 10 ? 2 : 3;
  for (let m = Math.ceil(windowM[0] / step) * step; m <= windowM[1]; m += step) {
    const x = place.x(m);
    surface.line([x, bottom, x, bottom + 4], colours.ink3, 1);
    surface.text(x, bottom + 15, `${(m / 1000).toFixed(decimals)} km`, colours.ink3, 10, 'middle');
  }
}

function drawOverview(surface: Surface, drawing: BandDrawing, top: number): void {
  const { colours, overview, lengthM, windowM, curves } = drawing;
  const inner = Math.max(60, drawing.width - LEFT - RIGHT);
  const x = (m: number) => LEFT + (m / Math.max(1, lengthM)) * inner;
  const height = OVERVIEW - 12;
  surface.box(LEFT, top, inner, height, colours.sunken);
  const s = overview?.columns.s_m ?? [];
  const kappa = overview?.columns.curvature_fit_1_m ?? [];
  let most = 1e-6;
  for (const k of kappa) most = Math.max(most, Math.abs(k ?? 0));
  surface.line(
    s.flatMap((m, i) => [x(m ?? 0), top + height / 2 - ((kappa[i] ?? 0) / most) * (height / 2 - 1)]),
    colours.estimate,
    1,
  );
  for (const { row } of curves) {
    if (row.verdict !== 'over' && row.verdict !== 'undecided') continue;
    surface.box(
      x(row.start_m),
      top + height - 3,
      Math.max(2, x(row.end_m) - x(row.start_m)),
      3,
      row.verdict === 'over' ? colours.over : colours.undecided,
    );
  }
  const [a, b] = [x(windowM[0]), x(windowM[1])];
  surface.line([a, top, b, top, b, top + height, a, top + height, a, top], colours.accent, 1.5);
}

function niceStep(raw: number): number {
  const power = 10 ** Math.floor(Math.log10(Math.max(raw, 1e-6)));
  const lead = raw / power;
  return power * (lead <= 1 ? 1 : lead <= 2 ? 2 : lead <= 5 ? 5 : 10);
}
