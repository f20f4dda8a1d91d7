import type { Finding } from '../../shared/model/finding.ts';
import type { RunPassages } from '../../shared/model/passage.ts';
import type { Catalogue, Job, RecordingSummary, RunDetail } from '../../shared/schema/api.ts';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import type { Setup, SetupRef } from '../../shared/schema/setup.ts';
import { ApiError, type Fault } from '../api.ts';
import { NO_FILTER, WORST_FIRST, type Filter, type Sort } from '../ledger/filter.ts';
import { keep, readKept } from '../parts/kept.ts';
import { completeUnits, type ShownUnits } from '../parts/units.ts';
import { observable } from './observable.ts';

export type View = 'desk' | 'recordings' | 'limits' | 'vehicles' | 'registers' | 'units';
export type Quantity = 'utilisation' | 'lateral' | 'deficiency' | 'speed' | 'curvature' | 'jerk';
/** Which of the four is shown where there is room for one only. */
export type Tab = 'plan' | 'band' | 'ledger' | 'sheet';
export type Theme = 'light' | 'dark';

/** An open run: what the server sent, and its assessment made here by the same code. */
export interface OpenRun {
  readonly detail: RunDetail;
  readonly passages: RunPassages;
  readonly ref: SetupRef;
  readonly setup: Setup;
  readonly curves: readonly AssessedCurve[];
  readonly findings: readonly Finding[];
  readonly cautions: readonly string[];
  /** Counts every change of what the server's profile shows: windows are asked for anew. */
  readonly edition: number;
}

export interface AppState {
  readonly loaded: boolean;
  readonly recordings: readonly RecordingSummary[];
  readonly jobs: readonly Job[];
  readonly catalogue: Catalogue | null;
  readonly view: View;
  readonly tab: Tab;
  readonly runId: string | null;
  readonly open: OpenRun | null;
  readonly curve: number | null;
  readonly windowM: readonly [number, number] | null;
  readonly quantity: Quantity;
  readonly theme: Theme;
  readonly units: ShownUnits;
  /** Of copied tables; the page itself always writes a point. */
  readonly decimalSign: '.' | ',';
  /** What the ledger shows and in which order. */
  readonly filter: Filter;
  readonly sort: Sort;
  readonly faults: readonly Fault[];
  /** Said once and taken away by itself: what was copied, kept or deleted. */
  readonly notice: string | null;
  readonly uploading: { readonly share: number; readonly names: string; readonly cancel: () => void } | null;
}

export const app = observable<AppState>({
  loaded: false,
  recordings: [],
  jobs: [],
  catalogue: null,
  view: 'desk',
  tab: readKept<Tab>('tab', 'ledger'),
  runId: null,
  open: null,
  curve: null,
  windowM: null,
  quantity: readKept<Quantity>('quantity', 'utilisation'),
  theme: readKept<Theme | null>('theme', null) ?? systemTheme(),
  units: completeUnits(readKept<Partial<Record<string, string>>>('units', {})),
  decimalSign: readKept<'.' | ','>('decimalSign', '.'),
  filter: { ...NO_FILTER, ...readKept<Partial<Filter>>('filter', {}) },
  sort: readKept<Sort>('sort', WORST_FIRST),
  faults: [],
  notice: null,
  uploading: null,
});

/** Chainage under the cursor, m, or null: apart from the state, since it changes with every move of a mouse. */
export const cursor = observable<{ m: number | null }>({ m: null });

function systemTheme(): Theme {
  return matchMedia('(prefers-color-scheme: dark)').matches ? 'dark' : 'light';
}

/** Habits of the reader outlive a reload. */
export function keepHabits(): void {
  let before = app.get();
  app.listen(() => {
    const now = app.get();
    for (const key of ['tab', 'quantity', 'theme', 'units', 'decimalSign', 'filter', 'sort'] as const) {
      // The system's theme is followed until the reader chooses one.
      if (now[key] !== before[key]) keep(key, now[key]);
    }
    before = now;
  });
}

/** Shows a failure until the user puts it away; what is not a fault of the server is thrown on. */
export function report(error: unknown): void {
  if (!(error instanceof ApiError)) throw error;
  showFault(error.fault);
}

export function showFault(fault: Fault): void {
  const same = app.get().faults.filter((other) => other.code !== fault.code || other.cause !== fault.cause);
  app.set({ faults: [...same, fault].slice(-4) });
}

let noticeTimer: ReturnType<typeof setTimeout> | undefined;

/** Says that something was done. */
export function notify(text: string): void {
  clearTimeout(noticeTimer);
  app.set({ notice: text });
  noticeTimer = setTimeout(() => app.set({ notice: null }), 5000);
}

/** Opens the sheet of a curve. */
export function chooseCurve(curve: number): void {
  app.set({ view: 'desk', curve, tab: 'sheet' });
}
