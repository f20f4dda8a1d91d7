import { useEffect, useRef, useState } from 'preact/hooks';
import type { ProfileWindow } from '../../shared/schema/api.ts';
import { api } from '../api.ts';
import { figure } from '../parts/text.ts';
import { saveBlob, saveText } from '../parts/save.ts';
import { app, cursor, report, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { drawBand, layout, LEFT, OVERVIEW, RIGHT, type BandColours, type BandDrawing } from './draw-band.ts';
import { SHOWN_FIRST, stripsOf, type Strip } from './strips.ts';
import { CanvasSurface, SvgSurface } from './surface.ts';

const STRIPS_KEY = 'bendbook.strips';
/** No closer than this, m. */
const CLOSEST_M = 40;
/** A window is asked for this much wider than shown, so that a small pan needs no answer. */
const MARGIN = 0.5;

/** Strips over chainage with one cursor, limits as lines with their values, and an overview of the whole run. */
export function Band({ open }: { readonly open: OpenRun }) {
  const canvas = useRef<HTMLCanvasElement>(null);
  const overlay = useRef<HTMLCanvasElement>(null);
  const runId = open.detail.summary.id;
  const lengthM = Math.max(1, open.detail.summary.lengthM);
  const windowState = useSlice(app, (s) => s.windowM);
  const windowM: readonly [number, number] = windowState ?? [0, lengthM];
  const curve = useSlice(app, (s) => s.curve);
  const theme = useSlice(app, (s) => s.theme);
  const [size, setSize] = useState<readonly [number, number]>([0, 0]);
  const [overview, setOverview] = useState<ProfileWindow | null>(null);
  const [data, setData] = useState<ProfileWindow | null>(null);
  const [shown, setShown] = useState<readonly string[]>(() => keptStrips(open.ref.mode));
  const drawing = useRef<BandDrawing | null>(null);
  const strips = stripsOf(open.ref.mode).filter(({ id }) => shown.includes(id));

  useEffect(() => {
    setShown(keptStrips(open.ref.mode));
  }, [open.ref.mode]);

  useEffect(() => {
    const target = canvas.current!;
    const watch = new ResizeObserver(() => setSize([target.clientWidth, target.clientHeight]));
    watch.observe(target);
    return () => watch.disconnect();
  }, []);

  useEffect(() => {
    const abort = new AbortController();
    api
      .profile(runId, 0, lengthM, 1500, abort.signal)
      .then(setOverview)
      .catch((error: unknown) => {
        if (!abort.signal.aborted) report(error);
      });
    return () => abort.abort();
  }, [runId, open.edition]);

  useEffect(() => {
    if (size[0] === 0) return;
    const abort = new AbortController();
    const span = windowM[1] - windowM[0];
    const [from, to] = [windowM[0] - MARGIN * span, windowM[1] + MARGIN * span];
    const wait = setTimeout(
      () => {
        api
          .profile(runId, from, to, size[0] * 2 * (1 + 2 * MARGIN), abort.signal)
          .then(setData)
          .catch((error: unknown) => {
            if (!abort.signal.aborted) report(error);
          });
      },
      data === null ? 0 : 90,
    );
    return () => {
      clearTimeout(wait);
      abort.abort();
    };
  }, [runId, open.edition, windowM[0], windowM[1], size[0]]);

  useEffect(() => {
    if (size[0] === 0) return;
    const next: BandDrawing = {
      width: size[0],
      height: size[1],
      windowM,
      lengthM,
      strips,
      data: data ?? overview,
      overview,
      curves: open.curves,
      selected: curve,
      colours: bandColours(),
    };
    drawing.current = next;
    const context = prepare(canvas.current!, size);
    drawBand(new CanvasSurface(context, 'system-ui, sans-serif'), next);
    drawCursor(overlay.current!, next);
  }, [size, windowM[0], windowM[1], data, overview, open, curve, theme, shown.join()]);

  useEffect(
    () =>
      cursor.listen(() => {
        if (drawing.current !== null) drawCursor(overlay.current!, drawing.current);
      }),
    [],
  );

  useEffect(() => {
    const row = open.curves.find((c) => c.row.curve === curve)?.row;
    if (row === undefined) return;
    const now = app.get().windowM ?? [0, lengthM];
    const span = row.end_m - row.start_m;
    const inside = row.start_m >= now[0] && row.end_m <= now[1] && span > 0.04 * (now[1] - now[0]);
    if (!inside) setWindow([row.start_m - 1.5 * span, row.end_m + 1.5 * span], lengthM);
  }, [curve]);

  useEffect(() => {
    // Not passive: the wheel zooms the strips instead of scrolling the page.
    const target = overlay.current!;
    const wheel = (event: WheelEvent) => {
      event.preventDefault();
      const now = drawing.current;
      if (now === null) return;
      const at = layout(now).chainage(event.offsetX);
      if (Math.abs(event.deltaX) > Math.abs(event.deltaY))
        pan((event.deltaX / 600) * (now.windowM[1] - now.windowM[0]), lengthM);
      else zoom(1.0018 ** event.deltaY, at, lengthM);
    };
    target.addEventListener('wheel', wheel, { passive: false });
    return () => target.removeEventListener('wheel', wheel);
  }, [lengthM]);

  return (
    <section class="band" aria-label="Band">
      <div class="band-tools">
        <strong class="grow">Over chainage</strong>
        <button type="button" onClick={() => zoom(1 / 1.6, null, lengthM)} aria-label="Zoom in">
          +
        </button>
        <button type="button" onClick={() => zoom(1.6, null, lengthM)} aria-label="Zoom out">
          −
        </button>
        <button type="button" onClick={() => app.set({ windowM: null })}>
          Whole run
        </button>
        <details class="menu">
          <summary>Strips</summary>
          <div>
            {stripsOf(open.ref.mode).map((strip) => (
              <label key={strip.id}>
                <input
                  type="checkbox"
                  checked={shown.includes(strip.id)}
                  onChange={() => setShown(toggle(shown, strip, open.ref.mode))}
                />
                {strip.title}
              </label>
            ))}
          </div>
        </details>
        <details class="menu">
          <summary>Picture</summary>
          <div>
            <button type="button" class="quiet" onClick={() => savePicture(drawing.current, 'svg')}>
              Save as SVG
            </button>
            <button type="button" class="quiet" onClick={() => savePicture(drawing.current, 'png')}>
              Save as PNG
            </button>
          </div>
        </details>
      </div>
      <div class="band-canvas">
        <canvas ref={canvas} aria-hidden="true" />
        <canvas
          ref={overlay}
          tabIndex={0}
          role="img"
          aria-label={describeBand(open, strips)}
          onPointerMove={(event) => pointerMoved(event, drawing.current, lengthM)}
          onPointerDown={(event) => pointerDown(event, drawing.current, lengthM)}
          onPointerUp={(event) => pointerUp(event, drawing.current)}
          onPointerCancel={(event) => drags.delete(event.pointerId)}
          onPointerLeave={() => cursor.set({ m: null })}
          onKeyDown={(event) => keyDown(event, lengthM)}
        />
      </div>
    </section>
  );
}

function describeBand(open: OpenRun, strips: readonly Strip[]): string {
  return (
    `Strips over chainage: ${strips.map(({ title }) => title).join(', ')}. ${String(open.curves.length)} curves. ` +
    'Arrow keys pan, plus and minus zoom, Home shows the whole run. The ledger holds the figures as a table.'
  );
}

function prepare(canvas: HTMLCanvasElement, [width, height]: readonly [number, number]): CanvasRenderingContext2D {
  const ratio = devicePixelRatio || 1;
  canvas.width = Math.round(width * ratio);
  canvas.height = Math.round(height * ratio);
  const context = canvas.getContext('2d')!;
  context.setTransform(ratio, 0, 0, ratio, 0, 0);
  return context;
}

function bandColours(): BandColours {
  const style = getComputedStyle(document.documentElement);
  const css = (name: string) => style.getPropertyValue(name).trim();
  return {
    panel: css('--panel'),
    line: css('--line'),
    ink: css('--ink'),
    ink2: css('--ink-2'),
    ink3: css('--ink-3'),
    fitted: css('--fitted'),
    estimate: css('--estimate'),
    interval: css('--interval'),
    limit: css('--limit'),
    over: css('--over'),
    overSoft: css('--over-soft'),
    undecided: css('--undecided'),
    undecidedSoft: css('--undecided-soft'),
    sunken: css('--sunken'),
    accent: css('--accent'),
  };
}

/** The cursor line and, right of the strips, what each strip says there. */
function drawCursor(canvas: HTMLCanvasElement, drawing: BandDrawing): void {
  const context = prepare(canvas, [drawing.width, drawing.height]);
  context.clearRect(0, 0, drawing.width, drawing.height);
  const { m } = cursor.get();
  const place = layout(drawing);
  const { colours, strips, data } = drawing;
  const surface = new CanvasSurface(context, 'system-ui, sans-serif');
  const right = LEFT + place.inner + 8;
  const i = m === null || data === null ? -1 : nearestPlace(data, m);
  if (m !== null) {
    const x = place.x(m);
    if (x >= LEFT && x <= LEFT + place.inner) surface.line([x, 0, x, place.top(strips.length)], colours.ink2, 1);
    surface.text(right, 12, `${figure(m / 1000, 3)} km`, colours.ink, 11, 'start', true);
  }
  strips.forEach((strip, k) => {
    let y = place.top(k) + 10;
    for (const trace of [...strip.traces].reverse()) {
      const values = data?.columns[trace.column];
      if (values === undefined) continue;
      const v = i < 0 ? null : (values[i] ?? null);
      const text = i < 0 ? '' : ` ${figure(v === null ? null : v * trace.factor, strip.decimals)}`;
      const colour =
        trace.style === 'main' ? colours.fitted : trace.style === 'measured' ? colours.undecided : colours.ink2;
      surface.text(right, y, `${trace.label}${text}`, colour, 10.5);
      y += 13;
    }
  });
}

function nearestPlace(data: ProfileWindow, m: number): number {
  const s = data.columns.s_m ?? [];
  let low = 0;
  let high = s.length - 1;
  while (low < high) {
    const middle = (low + high) >> 1;
    if ((s[middle] ?? 0) < m) low = middle + 1;
    else high = middle;
  }
  return low > 0 && m - (s[low - 1] ?? 0) < (s[low] ?? 0) - m ? low - 1 : low;
}

/** Keeps the window inside the run and not too close; the whole run is no window at all. */
function setWindow([from, to]: readonly [number, number], lengthM: number): void {
  const span = Math.min(lengthM, Math.max(CLOSEST_M, to - from));
  const start = Math.min(Math.max(0, from), lengthM - span);
  app.set({ windowM: span >= lengthM * 0.999 ? null : [start, start + span] });
}

function zoom(factor: number, atM: number | null, lengthM: number): void {
  const now = app.get().windowM ?? [0, lengthM];
  const at = atM ?? (now[0] + now[1]) / 2;
  setWindow([at - (at - now[0]) * factor, at + (now[1] - at) * factor], lengthM);
}

function pan(byM: number, lengthM: number): void {
  const now = app.get().windowM ?? [0, lengthM];
  setWindow([now[0] + byM, now[1] + byM], lengthM);
}

interface Drag {
  x: number;
  readonly startX: number;
  readonly overview: boolean;
}

/** Pointers that are down: one drags, two pinch. */
const drags = new Map<number, Drag>();

type CanvasPointer = PointerEvent & { readonly currentTarget: HTMLCanvasElement };

function pointerDown(event: CanvasPointer, drawing: BandDrawing | null, lengthM: number): void {
  if (drawing === null) return;
  event.currentTarget.setPointerCapture(event.pointerId);
  const overview = event.offsetY > drawing.height - OVERVIEW;
  drags.set(event.pointerId, { x: event.offsetX, startX: event.offsetX, overview });
  if (overview) centreOn(event.offsetX, drawing, lengthM);
}

function centreOn(x: number, drawing: BandDrawing, lengthM: number): void {
  const at = ((x - LEFT) / Math.max(60, drawing.width - LEFT - RIGHT)) * lengthM;
  const half = (drawing.windowM[1] - drawing.windowM[0]) / 2;
  setWindow([at - half, at + half], lengthM);
}

function pointerMoved(event: CanvasPointer, drawing: BandDrawing | null, lengthM: number): void {
  if (drawing === null) return;
  const place = layout(drawing);
  const drag = drags.get(event.pointerId);
  if (drag === undefined) {
    const m = place.chainage(event.offsetX);
    cursor.set({ m: m >= drawing.windowM[0] && m <= drawing.windowM[1] ? m : null });
    return;
  }
  if (drag.overview) {
    centreOn(event.offsetX, drawing, lengthM);
    return;
  }
  const perPixel = (drawing.windowM[1] - drawing.windowM[0]) / place.inner;
  const others = [...drags.entries()].filter(([id]) => id !== event.pointerId);
  const other = others[0]?.[1];
  if (other !== undefined) {
    const before = Math.abs(drag.x - other.x);
    const after = Math.abs(event.offsetX - other.x);
    if (before > 4 && after > 4) zoom(before / after, place.chainage((event.offsetX + other.x) / 2), lengthM);
  } else pan((drag.x - event.offsetX) * perPixel, lengthM);
  drag.x = event.offsetX;
}

function pointerUp(event: CanvasPointer, drawing: BandDrawing | null): void {
  const drag = drags.get(event.pointerId);
  drags.delete(event.pointerId);
  if (drawing === null || drag === undefined || drag.overview || Math.abs(event.offsetX - drag.startX) > 4) return;
  const m = layout(drawing).chainage(event.offsetX);
  const hit = drawing.curves.find(({ row }) => m >= row.start_m && m <= row.end_m);
  if (hit !== undefined) app.set({ curve: hit.row.curve, tab: 'sheet' });
}

function keyDown(event: KeyboardEvent, lengthM: number): void {
  const now = app.get().windowM ?? [0, lengthM];
  const span = now[1] - now[0];
  const act: Record<string, () => void> = {
    ArrowLeft: () => pan(-0.15 * span, lengthM),
    ArrowRight: () => pan(0.15 * span, lengthM),
    '+': () => zoom(1 / 1.4, null, lengthM),
    '=': () => zoom(1 / 1.4, null, lengthM),
    '-': () => zoom(1.4, null, lengthM),
    Home: () => app.set({ windowM: null }),
  };
  const action = act[event.key];
  if (action === undefined) return;
  event.preventDefault();
  action();
}

function keptStrips(mode: 'rail' | 'road'): readonly string[] {
  const kept = localStorage.getItem(`${STRIPS_KEY}.${mode}`);
  return kept === null ? SHOWN_FIRST[mode] : kept.split(',');
}

function toggle(shown: readonly string[], strip: Strip, mode: 'rail' | 'road'): readonly string[] {
  const next = shown.includes(strip.id) ? shown.filter((id) => id !== strip.id) : [...shown, strip.id];
  const kept = next.length === 0 ? [strip.id] : next;
  localStorage.setItem(`${STRIPS_KEY}.${mode}`, kept.join(','));
  return kept;
}

/** Print quality: vectors, or pixels three times as fine. */
function savePicture(drawing: BandDrawing | null, kind: 'svg' | 'png'): void {
  if (drawing === null) return;
  if (kind === 'svg') {
    const surface = new SvgSurface(drawing.width, drawing.height);
    drawBand(surface, drawing);
    saveText('band.svg', surface.toString(), 'image/svg+xml');
    return;
  }
  const canvas = document.createElement('canvas');
  canvas.width = drawing.width * 3;
  canvas.height = drawing.height * 3;
  const context = canvas.getContext('2d')!;
  context.scale(3, 3);
  drawBand(new CanvasSurface(context, 'system-ui, sans-serif'), drawing);
  canvas.toBlob((blob) => {
    if (blob !== null) saveBlob('band.png', blob);
  });
}
