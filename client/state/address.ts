import { app, type View } from './app-state.ts';
import { openRun } from './open-run.ts';

const VIEWS: readonly View[] = ['desk', 'recordings', 'limits', 'vehicles', 'registers', 'units'];

/**
 * The place in the address: #/desk?run=...&curve=7&from=1200&to=2400. A link opens the same run, curve and window;
 * choosing a run, a curve or a screen makes a step for the back button, panning does not.
 */
export function followAddress(): void {
  let reading = false;
  const follow = () => {
    reading = true;
    read();
    reading = false;
    before = place();
  };
  let before = place();
  follow();
  addEventListener('popstate', follow);
  addEventListener('hashchange', follow);
  app.listen(() => {
    const now = place();
    const address = write();
    if (reading || address === location.hash) return;
    // The run that the page opens by itself is no step of the reader's.
    const isStep = now.key !== before.key && before.runId !== null;
    if (isStep) history.pushState(null, '', address);
    else history.replaceState(null, '', address);
    before = now;
  });
}

function place(): { readonly key: string; readonly runId: string | null } {
  const { view, runId, curve } = app.get();
  return { key: `${view} ${runId ?? ''} ${String(curve)}`, runId };
}

function write(): string {
  const { view, runId, curve, windowM } = app.get();
  const query = new URLSearchParams();
  if (runId !== null) query.set('run', runId);
  if (curve !== null) query.set('curve', String(curve));
  if (windowM !== null) {
    query.set('from', windowM[0].toFixed(0));
    query.set('to', windowM[1].toFixed(0));
  }
  const text = query.toString();
  return `#/${view}${text === '' ? '' : `?${text}`}`;
}

function read(): void {
  const [path = '', text = ''] = location.hash.replace(/^#\//, '').split('?');
  const query = new URLSearchParams(text);
  const view = VIEWS.find((name) => name === path) ?? 'desk';
  const number = (name: string) => {
    const value = Number(query.get(name) ?? NaN);
    return Number.isFinite(value) ? value : null;
  };
  const [from, to] = [number('from'), number('to')];
  const windowM = from !== null && to !== null && to > from ? ([from, to] as const) : null;
  const runId = query.get('run');
  app.set({ view });
  if (runId !== null && runId !== app.get().runId) void openRun(runId, { curve: number('curve'), windowM });
  else app.set({ curve: number('curve'), windowM });
}
