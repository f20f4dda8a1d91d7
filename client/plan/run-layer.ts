import L from 'leaflet';
import type { ProfileWindow } from '../../shared/schema/api.ts';
import { rampClass, rampColours, type Ramp } from '../ramp/ramp.ts';
import { decimate, type Polyline } from './decimate.ts';

/** Places of one curve to draw over the run: verdict decides how. */
export interface Marked {
  readonly fromM: number;
  readonly toM: number;
  readonly verdict: 'over' | 'undecided';
}

export interface RunDrawing {
  readonly window: ProfileWindow;
  readonly ramp: Ramp;
  readonly domain: readonly [number, number];
  readonly marked: readonly Marked[];
  readonly colours: {
    readonly casing: string;
    readonly over: string;
    readonly undecided: string;
    readonly accent: string;
    readonly ink: string;
  };
  readonly selected: readonly [number, number] | null;
}

/**
 * The run on the map: one canvas, Mercator coordinates computed once, one path a colour class. Places nearer than
 * two pixels are merged and the worst class wins, so that no hotspot vanishes at any zoom.
 */
export class RunLayer extends L.Layer {
  readonly canvas = L.DomUtil.create('canvas', 'leaflet-zoom-hide');
  #drawing: RunDrawing | null = null;
  #line: Polyline | null = null;
  #chainage: Float64Array = new Float64Array(0);

  override onAdd(map: L.Map): this {
    map.getPanes().overlayPane.appendChild(this.canvas);
    map.on('moveend zoomend resize viewreset', this.#draw, this);
    this.#draw();
    return this;
  }

  override onRemove(map: L.Map): this {
    this.canvas.remove();
    map.off('moveend zoomend resize viewreset', this.#draw, this);
    return this;
  }

  show(drawing: RunDrawing | null): void {
    const window = drawing?.window;
    if (window !== undefined && window !== this.#drawing?.window) this.#lay(window);
    this.#drawing = drawing;
    if (drawing === null) this.#line = null;
    else this.#classify(drawing);
    this.#draw();
  }

  /** Index of the place nearest to a point of the container, within 14 px; -1 when none is. */
  nearest(point: L.Point): number {
    const map = this.#map();
    const line = this.#line;
    if (map === null || line === null) return -1;
    const { scale, dx, dy } = viewOf(map);
    let best = 14 * 14;
    let found = -1;
    for (let i = 0; i < line.x.length; i++) {
      const x = line.x[i]! * scale - dx - point.x;
      const y = line.y[i]! * scale - dy - point.y;
      const d = x * x + y * y;
      if (d < best) {
        best = d;
        found = i;
      }
    }
    return found;
  }

  /** Map position of a chainage, for the cursor. */
  at(chainageM: number): L.LatLng | null {
    const window = this.#drawing?.window;
    if (window === undefined) return null;
    const i = lowerBound(this.#chainage, chainageM);
    const lat = window.columns.lat?.[i];
    const lon = window.columns.lon?.[i];
    return lat === null || lat === undefined || lon === null || lon === undefined
      ? null
      : L.latLng(lat, unwrapped(lon, window.columns.lon?.[0] ?? 0));
  }

  #map(): L.Map | null {
    return (this as unknown as { _map: L.Map | null })._map;
  }

  #lay(window: ProfileWindow): void {
    const { lat = [], lon = [], s_m: s = [] } = window.columns;
    const n = lat.length;
    const line = { x: new Float64Array(n), y: new Float64Array(n), rank: new Int8Array(n) };
    const lon0 = lon[0] ?? 0;
    for (let i = 0; i < n; i++) {
      const phi = ((lat[i] ?? NaN) * Math.PI) / 180;
      line.x[i] = (unwrapped(lon[i] ?? NaN, lon0) + 180) / 360;
      line.y[i] = 0.5 - Math.log(Math.tan(Math.PI / 4 + phi / 2)) / (2 * Math.PI);
    }
    this.#line = line;
    this.#chainage = Float64Array.from(s, (v) => v ?? NaN);
  }

  #classify({ window, ramp, domain }: RunDrawing): void {
    const values = window.columns[ramp.column] ?? [];
    const rank = this.#line!.rank;
    for (let i = 0; i < rank.length; i++) rank[i] = Math.max(0, rampClass(values[i] ?? null, ramp.factor, domain));
  }

  #draw(): void {
    const map = this.#map();
    if (map === null) return;
    const size = map.getSize();
    const ratio = devicePixelRatio || 1;
    const canvas = this.canvas;
    canvas.width = size.x * ratio;
    canvas.height = size.y * ratio;
    canvas.style.width = `${String(size.x)}px`;
    canvas.style.height = `${String(size.y)}px`;
    L.DomUtil.setPosition(canvas, map.containerPointToLayerPoint([0, 0]));
    const context = canvas.getContext('2d')!;
    context.setTransform(ratio, 0, 0, ratio, 0, 0);
    const drawing = this.#drawing;
    const line = this.#line;
    if (drawing === null || line === null) return;
    const view = { ...viewOf(map), width: size.x, height: size.y };
    const { colours, ramp } = drawing;
    const points = decimate(line, view);
    context.lineJoin = 'round';
    stroke(context, points, null, colours.casing, 6.5);
    rampColours(ramp).forEach((colour, k) => {
      stroke(context, points, k, colour, 3.6);
    });
    for (const mark of drawing.marked) this.#mark(context, view, mark, colours);
    if (drawing.selected !== null) this.#range(context, view, drawing.selected, colours.accent, 2, [], 9);
    this.#arrows(context, points, colours.ink);
  }

  #mark(context: CanvasRenderingContext2D, view: View, mark: Marked, colours: RunDrawing['colours']): void {
    const range = [mark.fromM, mark.toM] as const;
    if (mark.verdict === 'over') {
      this.#range(context, view, range, colours.ink, 10, [], 0);
      this.#range(context, view, range, colours.casing, 8, [], 0);
      this.#range(context, view, range, colours.over, 6, [], 0);
    } else {
      this.#range(context, view, range, colours.casing, 8, [], 0);
      this.#range(context, view, range, colours.undecided, 6, [6, 4], 0);
    }
  }

  /** Part of the run as one line, or as two parallel ones `offset` px to either side. */
  #range(
    context: CanvasRenderingContext2D,
    view: View,
    [from, to]: readonly [number, number],
    colour: string,
    width: number,
    dash: number[],
    offset: number,
  ): void {
    const line = this.#line!;
    const a = Math.max(0, lowerBound(this.#chainage, from) - 1);
    const b = Math.min(line.x.length - 1, lowerBound(this.#chainage, to));
    context.strokeStyle = colour;
    context.lineWidth = width;
    context.setLineDash(dash);
    for (const side of offset === 0 ? [0] : [-offset, offset]) {
      context.beginPath();
      for (let i = a; i <= b; i++) {
        const j = Math.min(b, i + 1) === i ? i - 1 : i + 1;
        const sign = j > i ? 1 : -1;
        const x = line.x[i]! * view.scale - view.dx;
        const y = line.y[i]! * view.scale - view.dy;
        const ex = (line.x[Math.max(0, j)]! * view.scale - view.dx - x) * sign;
        const ey = (line.y[Math.max(0, j)]! * view.scale - view.dy - y) * sign;
        const length = Math.hypot(ex, ey) || 1;
        context.lineTo(x - (ey / length) * side, y + (ex / length) * side);
      }
      context.stroke();
    }
    context.setLineDash([]);
  }

  /** Arrows of the direction of travel, far enough apart to stay quiet. */
  #arrows(context: CanvasRenderingContext2D, points: ReturnType<typeof decimate>, colour: string): void {
    context.fillStyle = colour;
    let since = 60;
    for (let k = 1; k < points.count; k++) {
      if (points.pen[k] === 0) continue;
      const [x0, y0, x, y] = [points.x[k - 1]!, points.y[k - 1]!, points.x[k]!, points.y[k]!];
      const d = Math.hypot(x - x0, y - y0);
      since += d;
      if (since < 150 || d < 1) continue;
      since = 0;
      const angle = Math.atan2(y - y0, x - x0);
      context.save();
      context.translate(x - Math.sin(angle) * 10, y + Math.cos(angle) * 10);
      context.rotate(angle);
      context.beginPath();
      context.moveTo(5, 0);
      context.lineTo(-4, -3.4);
      context.lineTo(-4, 3.4);
      context.fill();
      context.restore();
    }
  }
}

interface View {
  readonly scale: number;
  readonly dx: number;
  readonly dy: number;
  readonly width: number;
  readonly height: number;
}

/** World pixels at the present zoom, and how far the container's corner lies from the world's. */
function viewOf(map: L.Map): { scale: number; dx: number; dy: number } {
  const scale = 256 * 2 ** map.getZoom();
  const corner = map.project(map.containerPointToLatLng([0, 0]), map.getZoom());
  return { scale, dx: corner.x, dy: corner.y };
}

function stroke(
  context: CanvasRenderingContext2D,
  points: ReturnType<typeof decimate>,
  rank: number | null,
  colour: string,
  width: number,
): void {
  context.strokeStyle = colour;
  context.lineWidth = width;
  context.lineCap = rank === null ? 'round' : 'butt';
  context.beginPath();
  let open = false;
  for (let k = 1; k < points.count; k++) {
    const draws = points.pen[k] === 1 && (rank === null || points.rank[k] === rank);
    if (draws && !open) context.moveTo(points.x[k - 1]!, points.y[k - 1]!);
    if (draws) context.lineTo(points.x[k]!, points.y[k]!);
    open = draws;
  }
  context.stroke();
}

/** Longitude within 180 degrees of a reference: a run across the antimeridian stays in one piece. */
export function unwrapped(lon: number, reference: number): number {
  const d = lon - reference;
  return d > 180 ? lon - 360 : d < -180 ? lon + 360 : lon;
}

function lowerBound(ascending: ArrayLike<number>, value: number): number {
  let low = 0;
  let high = ascending.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (ascending[middle]! < value) low = middle + 1;
    else high = middle;
  }
  return Math.min(low, Math.max(0, ascending.length - 1));
}
