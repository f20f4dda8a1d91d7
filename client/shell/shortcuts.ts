import { byWorst } from '../parts/text.ts';
import { app, chooseCurve, type View } from '../state/app-state.ts';

export const SCREENS: readonly (readonly [view: View, label: string])[] = [
  ['desk', 'Line'],
  ['recordings', 'Recordings'],
  ['limits', 'Limit sets'],
  ['vehicles', 'Vehicles'],
  ['registers', 'Cant registers'],
  ['units', 'Units'],
];

/** Every key with its meaning, for the help card. */
export const KEYS: readonly (readonly [keys: readonly string[], what: string])[] = [
  [['j', 'k'], 'next and previous curve along the run'],
  [['n', 'p'], 'next and previous curve, worst first'],
  [['w'], 'the worst curve'],
  [['Esc'], 'close the curve sheet'],
  [['1', '…', '6'], 'the six screens'],
  [['←', '→', '+', '−'], 'pan and zoom the strips, when they have the focus'],
  [['Home'], 'the whole run in the strips'],
  [['↑', '↓', 'Enter'], 'through the ledger and into the sheet, when the ledger has the focus'],
  [['?'], 'this card'],
];

/** Listens to the keys of the whole page; returns how to stop. */
export function followKeys(showHelp: () => void): () => void {
  const listener = (event: KeyboardEvent) => {
    if (event.ctrlKey || event.metaKey || event.altKey || event.defaultPrevented) return;
    const target = event.target as HTMLElement;
    if (/^(INPUT|SELECT|TEXTAREA)$/.test(target.tagName) || document.querySelector('dialog[open]') !== null) return;
    if (event.key === '?') showHelp();
    else if (/^[1-6]$/.test(event.key)) app.set({ view: SCREENS[Number(event.key) - 1]![0] });
    else if (app.get().view === 'desk') deskKey(event.key);
  };
  addEventListener('keydown', listener);
  return () => removeEventListener('keydown', listener);
}

function deskKey(key: string): void {
  const { open, curve } = app.get();
  if (open === null) return;
  const step = (curves: typeof open.curves, by: number) => {
    const now = curves.findIndex(({ row }) => row.curve === curve);
    const next = curves[now < 0 ? 0 : Math.min(curves.length - 1, Math.max(0, now + by))];
    if (next !== undefined) chooseCurve(next.row.curve);
  };
  const worstFirst = () => [...open.curves].sort(byWorst);
  if (key === 'j') step(open.curves, 1);
  else if (key === 'k') step(open.curves, -1);
  else if (key === 'n') step(worstFirst(), 1);
  else if (key === 'p') step(worstFirst(), -1);
  else if (key === 'w') {
    const worst = worstFirst()[0];
    if (worst !== undefined) chooseCurve(worst.row.curve);
  } else if (key === 'Escape') app.set({ curve: null });
}
