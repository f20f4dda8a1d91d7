import { assessRun, passagesFromWire } from '../../shared/assess/index.ts';
import type { Finding } from '../../shared/model/finding.ts';
import type { RunPassages } from '../../shared/model/passage.ts';
import type { Catalogue, Job, RecordingSummary, RunDetail, RunSummary } from '../../shared/schema/api.ts';
import type { AssessedCurve } from '../../shared/schema/curve-row.ts';
import type { Setup, SetupRef } from '../../shared/schema/setup.ts';
import { api, ApiError, followEvents, type Fault } from '../api.ts';
import { observable } from './observable.ts';

export type View = 'desk' | 'recordings' | 'limits' | 'vehicles' | 'registers';
export type Quantity = 'utilisation' | 'lateral' | 'deficiency' | 'speed' | 'curvature' | 'jerk';
/** Which of the four is shown where there is room for one only. */
export type Tab = 'plan' | 'band' | 'ledger' | 'sheet';

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
  readonly theme: 'light' | 'dark';
  readonly faults: readonly Fault[];
  readonly uploading: { readonly share: number; readonly names: string; readonly cancel: () => void } | null;
}

const THEME_KEY = 'bendbook.theme';

export const app = observable<AppState>({
  loaded: false,
  recordings: [],
  jobs: [],
  catalogue: null,
  view: 'desk',
  tab: 'plan',
  runId: null,
  open: null,
  curve: null,
  windowM: null,
  quantity: 'utilisation',
  theme: preferredTheme(),
  faults: [],
  uploading: null,
});

/** Chainage under the cursor, m, or null: apart from the state, since it changes with every move of a mouse. */
export const cursor = observable<{ m: number | null }>({ m: null });

function preferredTheme(): 'light' | 'dark' {
  const kept = localStorage.getItem(THEME_KEY);
  if (kept === 'light' || kept === 'dark') return kept;
  return matchMedia('(prefers-color-scheme: dark)').matches ? 'dark' : 'light';
}

export function setTheme(theme: 'light' | 'dark'): void {
  localStorage.setItem(THEME_KEY, theme);
  app.set({ theme });
}

export function runsOf(recordings: readonly RecordingSummary[]): RunSummary[] {
  return recordings.flatMap(({ runs }) => runs);
}

/** Shows a failure until the user puts it away; what is not a fault of the server is thrown on. */
export function report(error: unknown): void {
  if (!(error instanceof ApiError)) throw error;
  app.set({ faults: [...app.get().faults, error.fault].slice(-4) });
}

/** First load, then whatever the server tells. */
export async function start(): Promise<void> {
  try {
    const [recordings, catalogue, jobs] = await Promise.all([api.recordings(), api.catalogue(), api.jobs()]);
    app.set({ recordings, catalogue, jobs, loaded: true });
  } catch (error) {
    app.set({ loaded: true });
    report(error);
  }
  followEvents({
    job(job) {
      const jobs = app.get().jobs.filter((other) => other.id !== job.id);
      app.set({ jobs: [job, ...jobs] });
    },
    recording(recording) {
      const before = app.get().recordings;
      const known = before.some(({ id }) => id === recording.id);
      app.set({
        recordings: known ? before.map((r) => (r.id === recording.id ? recording : r)) : [...before, recording],
      });
      const first = recording.runs[0];
      if (recording.state === 'ready' && first !== undefined && app.get().runId === null) void openRun(first.id);
    },
    removed(id) {
      const { runId } = app.get();
      if (runId?.startsWith(`${id}.`) === true) app.set({ runId: null, open: null, curve: null, windowM: null });
      app.set({ recordings: app.get().recordings.filter((recording) => recording.id !== id) });
    },
  });
  if (app.get().runId === null) {
    const first = runsOf(app.get().recordings)[0];
    if (first !== undefined && app.get().view === 'desk') await openRun(first.id);
  }
}

let edition = 0;

/** Opens a run: its geometry and passages once, its assessment at once and after every change of setup. */
export async function openRun(
  runId: string,
  keep: { curve?: number | null; windowM?: readonly [number, number] | null } = {},
): Promise<void> {
  const same = app.get().runId === runId && app.get().open !== null;
  app.set({ runId, curve: keep.curve ?? null, windowM: keep.windowM ?? null, ...(same ? {} : { open: null }) });
  try {
    const detail = await api.run(runId);
    const catalogue = app.get().catalogue ?? (await api.catalogue());
    if (app.get().runId !== runId) return;
    app.set({ catalogue, open: assess(detail, passagesFromWire(detail.passages), detail.setup, catalogue) });
  } catch (error) {
    if (error instanceof ApiError && error.fault.code === 'http/not-found') app.set({ runId: null, open: null });
    report(error);
  }
}

function assess(detail: RunDetail, passages: RunPassages, ref: SetupRef, catalogue: Catalogue): OpenRun {
  const setup = resolve(ref, catalogue);
  const { curves, findings, cautions } = assessRun(passages, setup, { working: false });
  edition++;
  return {
    detail,
    passages,
    ref,
    setup,
    curves,
    findings: [...(detail.findings as Finding[]), ...findings],
    cautions,
    edition,
  };
}

/** A setup by reference made whole from the catalogue; ids that are gone fall back to the first of their mode. */
export function resolve(ref: SetupRef, catalogue: Catalogue): Setup {
  const pick = <T extends { id: string; mode: string }>(items: readonly T[], wanted: string): T =>
    items.find((item) => item.id === wanted && item.mode === ref.mode) ?? items.find((item) => item.mode === ref.mode)!;
  return {
    mode: ref.mode,
    limits: pick(catalogue.limitSets, ref.limitSetId),
    vehicle: pick(catalogue.vehicles, ref.vehicleId),
    register: catalogue.registers.find(({ id }) => id === ref.registerId) ?? null,
    cantRule: ref.cantRule,
    tier: ref.tier,
    confidence: ref.confidence,
  };
}

/** Changes the setup of the open run: verdicts change here at once, the server keeps it and draws its columns by it. */
export async function changeSetup(change: Partial<SetupRef>): Promise<void> {
  const { open, catalogue, runId } = app.get();
  if (open === null || catalogue === null || runId === null) return;
  const wanted = { ...open.ref, ...change };
  const setup = resolve(wanted, catalogue);
  const ref: SetupRef = {
    ...wanted,
    limitSetId: setup.limits.id,
    vehicleId: setup.vehicle.id,
    registerId: setup.register?.id ?? null,
  };
  app.set({ open: assess(open.detail, open.passages, ref, catalogue) });
  try {
    await api.putSetup(ref, runId);
    const now = app.get().open;
    if (now !== null && app.get().runId === runId) {
      edition++;
      app.set({ open: { ...now, edition } });
    }
  } catch (error) {
    report(error);
  }
}

/** Limit sets, vehicles or registers changed: read them again and judge the open run by them. */
export async function refreshCatalogue(): Promise<void> {
  try {
    const catalogue = await api.catalogue();
    const { open } = app.get();
    app.set({ catalogue, ...(open === null ? {} : { open: assess(open.detail, open.passages, open.ref, catalogue) }) });
  } catch (error) {
    report(error);
  }
}
