import { useEffect, useRef, useState } from 'preact/hooks';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import { counted } from '../parts/text.ts';
import { app, chooseCurve, cursor, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

/** Utilisation at which a bar reaches the edge. */
const FULL = 1.6;
const NARROWEST_PX = 3;

/**
 * The whole run at a glance: one bar a curve at its chainage, upwards for left-hand curves and downwards for
 * right-hand ones, as high as its utilisation; the thin lines are the limit.
 */
export function Ribbon({ open }: { readonly open: OpenRun }) {
  const canvas = useRef<HTMLCanvasElement>(null);
  const [width, setWidth] = useState(0);
  const curve = useSlice(app, (s) => s.curve);
  const theme = useSlice(app, (s) => s.theme);
  const lengthM = Math.max(1, open.detail.summary.lengthM);
  useEffect(() => {
    const watch = new ResizeObserver(() => setWidth(canvas.current?.clientWidth ?? 0));
    watch.observe(canvas.current!);
    return () => watch.disconnect();
  }, []);
  useEffect(() => {
    const draw = () => {
      if (canvas.current !== null && width > 0) drawRibbon(canvas.current, open.curves, lengthM, curve);
    };
    draw();
    return cursor.listen(draw);
  }, [open, width, curve, theme]);
  const over = open.curves.filter(({ row }) => row.verdict === 'over').length;
  return (
    <canvas
      ref={canvas}
      class="ribbon"
      role="img"
      aria-label={`${counted(open.curves.length, 'curve')} along the run, left-hand ones above the line, right-hand ones below, height by utilisation; ${String(over)} over. The ledger holds the figures.`}
      title={`Every curve along the run: left above, right below, height by utilisation; the thin lines are the limit`}
      onPointerMove={(e) => cursor.set({ m: (e.offsetX / Math.max(1, width)) * lengthM })}
      onPointerLeave={() => cursor.set({ m: null })}
      onClick={(e) => {
        const near = nearest(open.curves, (e.offsetX / Math.max(1, width)) * lengthM);
        if (near !== null) chooseCurve(near);
      }}
    />
  );
}

function nearest(curves: readonly AssessedCurve[], m: number): number | null {
  let best: { curve: number; distance: number } | null = null;
  for (const { row } of curves) {
    const distance = Math.max(row.start_m - m, m - row.end_m, 0);
    if (best === null || distance < best.distance) best = { curve: row.curve, distance };
  }
  return best?.curve ?? null;
}

function drawRibbon(
  canvas: HTMLCanvasElement,
  curves: readonly AssessedCurve[],
  lengthM: number,
  selected: number | null,
): void {
  const [width, height] = [canvas.clientWidth, canvas.clientHeight];
  const ratio = devicePixelRatio || 1;
  canvas.width = Math.round(width * ratio);
  canvas.height = Math.round(height * ratio);
  const context = canvas.getContext('2d')!;
  context.setTransform(ratio, 0, 0, ratio, 0, 0);
  const style = getComputedStyle(canvas);
  const css = (name: string) => style.getPropertyValue(name).trim();
  const middle = height / 2;
  const unit = middle / FULL;
  context.fillStyle = css('--line');
  context.fillRect(0, Math.round(middle - unit), width, 1);
  context.fillRect(0, Math.round(middle + unit), width, 1);
  context.fillStyle = css('--line-strong');
  context.fillRect(0, Math.round(middle), width, 1);
  // Exceedances last: among thousands of curves they lie on top.
  const order = { within: 0, 'not assessed': 1, undecided: 2, over: 3 };
  for (const { row } of [...curves].sort((a, b) => order[a.row.verdict] - order[b.row.verdict])) {
    const x = (row.start_m / lengthM) * width;
    const w = Math.max(NARROWEST_PX, ((row.end_m - row.start_m) / lengthM) * width - 1);
    const h = Math.max(2, Math.min(FULL, row.utilisation ?? 0) * unit);
    const y = row.hand === 'left' ? middle - h : middle + 1;
    context.fillStyle = css(
      { over: '--over', undecided: '--undecided', within: '--bar', 'not assessed': '--bar' }[row.verdict],
    );
    if (row.verdict === 'over' || row.verdict === 'within') context.fillRect(x, y, w, h);
    else {
      // Open bars: not decided, or nothing to judge.
      for (let k = 0; k < h; k += 4) context.fillRect(x, row.hand === 'left' ? middle - k - 2 : y + k, w, 2);
    }
    if (row.curve === selected) {
      context.fillStyle = css('--ink');
      context.fillRect(x - 1, row.hand === 'left' ? middle + 3 : middle - 5, w + 2, 3);
    }
  }
  const { m } = cursor.get();
  if (m !== null) {
    context.fillStyle = css('--cursor');
    context.fillRect(Math.round((m / lengthM) * width), 0, 1, height);
  }
}
