import type { RefObject } from 'preact';
import { useEffect, useState } from 'preact/hooks';
import { keep, readKept } from '../parts/kept.ts';

/** The three movable edges of the desk, as shares of its width or height. */
type Pane = 'column' | 'row' | 'sheet';
type Shares = Readonly<Record<Pane, number>>;

const FIRST: Shares = { column: 0.42, row: 0.46, sheet: 0.28 };
const BOUNDS: Readonly<Record<Pane, readonly [number, number]>> = {
  column: [0.2, 0.8],
  row: [0.2, 0.8],
  sheet: [0.22, 0.5],
};
const STEP = 0.02;

let shares: Shares = { ...FIRST, ...readKept<Partial<Shares>>('desk', {}) };

/** Lays the kept shares on the desk. The content policy forbids style attributes in markup; styles set from here are allowed. */
export function layOut(desk: HTMLElement): void {
  for (const pane of ['column', 'row', 'sheet'] as const) {
    desk.style.setProperty(`--${pane}-share`, String(shares[pane]));
  }
}

/** An edge to drag, or to move with the arrow keys; a double press puts it back. */
export function Splitter(props: {
  readonly desk: RefObject<HTMLElement | null>;
  readonly pane: Pane;
  readonly label: string;
}) {
  const { desk, pane, label } = props;
  const [share, setShare] = useState(shares[pane]);
  useEffect(() => setShare(shares[pane]), [pane]);
  const move = (wanted: number) => {
    const [least, most] = BOUNDS[pane];
    const next = Math.min(most, Math.max(least, wanted));
    shares = { ...shares, [pane]: next };
    setShare(next);
    keep('desk', shares);
    if (desk.current !== null) layOut(desk.current);
  };
  const drag = (event: PointerEvent) => {
    const box = desk.current?.getBoundingClientRect();
    if (box === undefined || !(event.currentTarget as HTMLElement).hasPointerCapture(event.pointerId)) return;
    if (pane === 'row') move((event.clientY - box.top) / box.height);
    else if (pane === 'sheet') move((box.right - event.clientX) / box.width);
    else {
      const sheet = desk.current!.classList.contains('with-sheet') ? shares.sheet : 0;
      move((event.clientX - box.left) / (box.width * (1 - sheet)));
    }
  };
  const key = (event: KeyboardEvent) => {
    const less = pane === 'row' ? 'ArrowUp' : pane === 'sheet' ? 'ArrowRight' : 'ArrowLeft';
    const more = pane === 'row' ? 'ArrowDown' : pane === 'sheet' ? 'ArrowLeft' : 'ArrowRight';
    if (event.key !== less && event.key !== more) return;
    event.preventDefault();
    move(share + (event.key === more ? STEP : -STEP));
  };
  return (
    <div
      class={`splitter splitter-${pane}`}
      role="separator"
      tabIndex={0}
      aria-label={label}
      aria-orientation={pane === 'row' ? 'horizontal' : 'vertical'}
      aria-valuemin={Math.round(100 * BOUNDS[pane][0])}
      aria-valuemax={Math.round(100 * BOUNDS[pane][1])}
      aria-valuenow={Math.round(100 * share)}
      onPointerDown={(e) => e.currentTarget.setPointerCapture(e.pointerId)}
      onPointerMove={drag}
      onKeyDown={key}
      onDblClick={() => move(FIRST[pane])}
    />
  );
}
