import { useEffect, useRef, useState } from 'preact/hooks';
import type { CantRule, SetupRef } from '../shared/schema/setup.ts';
import { Band } from './band/Band.tsx';
import { Ledger } from './ledger/Ledger.tsx';
import { Findings } from './parts/Findings.tsx';
import { byWorst, curveSentence, duration, figure } from './parts/text.ts';
import { Plan } from './plan/Plan.tsx';
import { FilePicker, JobProgress, Recordings } from './setup/Recordings.tsx';
import { LimitSets } from './setup/LimitSets.tsx';
import { Registers } from './setup/Registers.tsx';
import { Vehicles } from './setup/Vehicles.tsx';
import { Sheet } from './sheet/Sheet.tsx';
import { app, changeSetup, openRun, setTheme, type OpenRun, type Tab, type View } from './state/app-state.ts';
import { useSlice } from './state/observable.ts';
import { addFiles, loadDemo } from './state/uploads.ts';

const SCREENS: readonly (readonly [view: View, label: string])[] = [
  ['desk', 'Line'],
  ['recordings', 'Recordings'],
  ['limits', 'Limit sets'],
  ['vehicles', 'Vehicles'],
  ['registers', 'Cant registers'],
];

export function App() {
  const view = useSlice(app, (s) => s.view);
  const open = useSlice(app, (s) => s.open);
  const theme = useSlice(app, (s) => s.theme);
  const [dropping, setDropping] = useState(false);
  const help = useRef<HTMLDialogElement>(null);
  useEffect(() => {
    document.documentElement.dataset.theme = theme;
  }, [theme]);
  useEffect(() => {
    const key = (event: KeyboardEvent) => shortcut(event, help.current);
    addEventListener('keydown', key);
    return () => removeEventListener('keydown', key);
  }, []);
  return (
    <div
      class={`shell${dropping ? ' dropping' : ''}`}
      onDragOver={(e) => {
        e.preventDefault();
        setDropping(true);
      }}
      onDragLeave={(e) => {
        if (e.relatedTarget === null) setDropping(false);
      }}
      onDrop={(e) => {
        e.preventDefault();
        setDropping(false);
        addFiles([...(e.dataTransfer?.files ?? [])]);
      }}
    >
      <TopBar onHelp={() => help.current?.showModal()} />
      {view === 'desk' && open !== null ? <Headline open={open} /> : <div />}
      {view === 'desk' ? <Desk /> : <Screen view={view} />}
      <footer class="caution-line">
        Derived from GPS: not a track-geometry measurement. The operator's and the regulator's own limits govern; speed
        and cant are decided by the competent, authorised people of the line.
      </footer>
      <Toasts />
      <HelpCard dialog={help} />
    </div>
  );
}

function Screen({ view }: { readonly view: View }) {
  if (view === 'recordings') return <Recordings />;
  if (view === 'limits') return <LimitSets />;
  if (view === 'vehicles') return <Vehicles />;
  return <Registers />;
}

function TopBar({ onHelp }: { readonly onHelp: () => void }) {
  const view = useSlice(app, (s) => s.view);
  const theme = useSlice(app, (s) => s.theme);
  const runId = useSlice(app, (s) => s.runId);
  const recordings = useSlice(app, (s) => s.recordings);
  const jobs = useSlice(app, (s) => s.jobs);
  const withRuns = recordings.filter(({ runs }) => runs.length > 0);
  const busy = jobs.filter(({ state }) => state === 'running' || state === 'queued').length;
  return (
    <header class="topbar">
      <a class="brand" href="#/desk">
        <img src="/favicon.svg" alt="" />
        Bendbook
      </a>
      <nav class="row" aria-label="Screens">
        {SCREENS.map(([name, label]) => (
          <button
            key={name}
            type="button"
            class="quiet"
            aria-pressed={view === name}
            onClick={() => app.set({ view: name })}
          >
            {label}
          </button>
        ))}
      </nav>
      <span class="grow" />
      {busy > 0 && <span role="status">{busy} being analysed</span>}
      {withRuns.length > 0 && (
        <label>
          <span class="sr">Run</span>
          <select
            value={runId ?? ''}
            onChange={(e) => {
              app.set({ view: 'desk' });
              void openRun(e.currentTarget.value);
            }}
          >
            {runId === null && <option value="">Choose a run</option>}
            {withRuns.map(({ id, title, runs }) => (
              <optgroup key={id} label={title}>
                {runs.map((run) => (
                  <option key={run.id} value={run.id}>
                    {run.name} · {figure(run.lengthM / 1000, 1)} km · {run.curveCount} curves
                  </option>
                ))}
              </optgroup>
            ))}
          </select>
        </label>
      )}
      <FilePicker label="Add" />
      <button
        type="button"
        class="quiet"
        onClick={() => setTheme(theme === 'dark' ? 'light' : 'dark')}
        aria-label={`Switch to ${theme === 'dark' ? 'light' : 'dark'} colours`}
      >
        {theme === 'dark' ? '☀' : '☾'}
      </button>
      <button type="button" class="quiet" onClick={onHelp} aria-label="Keyboard help">
        ?
      </button>
    </header>
  );
}

/** What the run says in one line, and by what it is judged. */
function Headline({ open }: { readonly open: OpenRun }) {
  const count = (verdict: string) => open.curves.filter(({ row }) => row.verdict === verdict).length;
  const worst = [...open.curves].sort(byWorst)[0];
  const { summary, quality } = open.detail;
  const parts = [
    `${String(count('over'))} of ${String(open.curves.length)} curves over`,
    `${String(count('undecided'))} undecided`,
    ...(count('not assessed') > 0 ? [`${String(count('not assessed'))} not assessed`] : []),
  ];
  return (
    <div class="headline">
      <strong>{parts.join(', ')}</strong>
      {worst !== undefined && worst.row.verdict !== 'within' ? (
        <button type="button" class="worst quiet" onClick={() => app.set({ curve: worst.row.curve, tab: 'sheet' })}>
          Worst: {curveSentence(worst)}
        </button>
      ) : (
        <span class="grow" />
      )}
      <span class="grow" />
      <details class="menu">
        <summary>Log and findings</summary>
        <div class="wide-menu">
          <p>
            {figure(summary.lengthM / 1000, 2)} km in {duration(summary.durationS)}; {figure(summary.fixCount, 0)} fixes
            at {figure(quality.rateHz, 1)} Hz; course on {figure(100 * quality.courseShare, 0)} %, speed on{' '}
            {figure(100 * quality.speedShare, 0)} % of the moving fixes.
          </p>
          <p>
            Position noise {figure(quality.noise.sigmaWhiteM, 2)} m white, wandering{' '}
            {figure(quality.noise.sigmaWanderM, 1)} m over {figure(quality.noise.wanderTimeS, 0)} s
            {quality.noise.sigmaDopplerWhiteMps > 0
              ? `; Doppler ${figure(quality.noise.sigmaDopplerWhiteMps, 3)} m/s white, ${figure(quality.noise.sigmaDopplerSlowMps, 3)} m/s over ${figure(quality.noise.dopplerTimeS, 1)} s`
              : ''}
            . About {figure(quality.effectiveFixes, 0)} independent fixes. Bends gentler than R{' '}
            {figure(1 / quality.smallestCurvaturePerM, 0)} m cannot be told from straight over 100 m.
          </p>
          <Findings findings={open.findings} />
        </div>
      </details>
      <SetupMenu open={open} />
    </div>
  );
}

/** Mode, limits, vehicle, cant: whatever a verdict depends on besides the run. */
function SetupMenu({ open }: { readonly open: OpenRun }) {
  const catalogue = useSlice(app, (s) => s.catalogue);
  if (catalogue === null) return null;
  const { ref } = open;
  const set = (change: Partial<SetupRef>) => void changeSetup(change);
  const ruleValue = ref.cantRule.kind === 'constant' ? ref.cantRule.value : 0;
  const rule = (kind: string): CantRule =>
    kind === 'constant'
      ? { kind, value: ruleValue }
      : kind === 'share'
        ? { kind, share: 0.66, speedKmh: 100, capMm: 160 }
        : { kind: 'unknown' };
  return (
    <details class="menu">
      <summary>
        {open.setup.limits.name}, {ref.tier}
      </summary>
      <div class="wide-menu">
        <label>
          <span class="grow">Mode</span>
          <select
            value={ref.mode}
            onChange={(e) =>
              set({
                mode: e.currentTarget.value as SetupRef['mode'],
                registerId: null,
                cantRule: e.currentTarget.value === 'road' ? { kind: 'constant', value: 0 } : { kind: 'unknown' },
              })
            }
          >
            <option value="rail">rail</option>
            <option value="road">road</option>
          </select>
        </label>
        <label>
          <span class="grow">Limits</span>
          <select value={open.setup.limits.id} onChange={(e) => set({ limitSetId: e.currentTarget.value })}>
            {catalogue.limitSets
              .filter(({ mode }) => mode === ref.mode)
              .map(({ id, name }) => (
                <option key={id} value={id}>
                  {name}
                </option>
              ))}
          </select>
        </label>
        <label>
          <span class="grow">Tier</span>
          <select value={ref.tier} onChange={(e) => set({ tier: e.currentTarget.value as SetupRef['tier'] })}>
            <option value="normal">normal</option>
            <option value="exceptional">exceptional</option>
          </select>
        </label>
        <label>
          <span class="grow">Vehicle</span>
          <select value={open.setup.vehicle.id} onChange={(e) => set({ vehicleId: e.currentTarget.value })}>
            {catalogue.vehicles
              .filter(({ mode }) => mode === ref.mode)
              .map(({ id, name }) => (
                <option key={id} value={id}>
                  {name}
                </option>
              ))}
          </select>
        </label>
        <label>
          <span class="grow">Cant register</span>
          <select
            value={ref.registerId ?? ''}
            onChange={(e) => set({ registerId: e.currentTarget.value === '' ? null : e.currentTarget.value })}
          >
            <option value="">none</option>
            {catalogue.registers.map(({ id, name }) => (
              <option key={id} value={id}>
                {name}
              </option>
            ))}
          </select>
        </label>
        <label>
          <span class="grow">Where it says nothing</span>
          <select value={ref.cantRule.kind} onChange={(e) => set({ cantRule: rule(e.currentTarget.value) })}>
            <option value="unknown">unknown</option>
            <option value="constant">assume a value</option>
            {ref.mode === 'rail' && <option value="share">assume two thirds of equilibrium at 100 km/h</option>}
          </select>
        </label>
        {ref.cantRule.kind === 'constant' && (
          <label>
            <span class="grow">Assumed {ref.mode === 'rail' ? 'cant, mm' : 'superelevation, %'}</span>
            <input
              type="number"
              class="num"
              value={ruleValue}
              onChange={(e) => set({ cantRule: { kind: 'constant', value: Number(e.currentTarget.value) || 0 } })}
            />
          </label>
        )}
      </div>
    </details>
  );
}

function Desk() {
  const open = useSlice(app, (s) => s.open);
  const curve = useSlice(app, (s) => s.curve);
  const tab = useSlice(app, (s) => s.tab);
  const runId = useSlice(app, (s) => s.runId);
  const loaded = useSlice(app, (s) => s.loaded);
  if (open === null)
    return loaded && runId === null ? <Welcome /> : <main class="page quiet-text">Opening the run …</main>;
  const area = (name: Tab) => `area area-${name}${tab === name ? ' shown' : ''}`;
  return (
    <main class={`desk${curve === null ? '' : ' with-sheet'}`}>
      <div class="tabs" role="tablist">
        {(['plan', 'band', 'ledger', 'sheet'] as const).map((name) => (
          <button
            key={name}
            type="button"
            role="tab"
            aria-selected={tab === name}
            aria-pressed={tab === name}
            disabled={name === 'sheet' && curve === null}
            onClick={() => app.set({ tab: name })}
          >
            {{ plan: 'Plan', band: 'Band', ledger: 'Ledger', sheet: 'Curve' }[name]}
          </button>
        ))}
      </div>
      <div class={area('plan')}>
        <Plan open={open} />
      </div>
      <div class={area('band')}>
        <Band open={open} />
      </div>
      <div class={area('ledger')}>
        <Ledger open={open} />
      </div>
      {curve !== null && (
        <aside class={area('sheet')} aria-label="Curve sheet">
          <Sheet open={open} number={curve} />
        </aside>
      )}
    </main>
  );
}

/** The first thing a newcomer sees, and what is on its way while nothing can be shown yet. */
function Welcome() {
  const recordings = useSlice(app, (s) => s.recordings);
  const jobs = useSlice(app, (s) => s.jobs);
  const uploading = useSlice(app, (s) => s.uploading);
  const running = jobs.filter(({ state }) => state === 'running' || state === 'queued');
  return (
    <main class="page">
      <div class="empty">
        <h2>Where is the line harder on passengers than it may be?</h2>
        <p>
          Add a log recorded aboard a train, tram, bus, coach or car. Bendbook finds its curves, says how hard each
          pushes sideways and how sure that is, holds it against a limit set, and tells what speed, cant or transition
          would cure it.
        </p>
        <div class="drop">
          <strong>Drop recordings here</strong>
          <span class="quiet-text">GPX, NMEA, CSV, FIT, TCX, KML, GeoJSON, IGC; zip and gzip of these</span>
          <div class="row">
            <FilePicker label="Choose files" primary />
            <button type="button" class="primary" onClick={() => void loadDemo()}>
              Load the demonstration line
            </button>
          </div>
          <span class="quiet-text">
            The demonstration is an invented operator, line and data. Nothing leaves this computer.
          </span>
        </div>
        {uploading !== null && (
          <div class="row" role="status">
            <span>Receiving {uploading.names}</span>
            <progress class="grow" max={1} value={uploading.share} aria-label="Upload" />
            <button type="button" onClick={uploading.cancel}>
              Cancel
            </button>
          </div>
        )}
        {running.map((job) => (
          <div key={job.id}>
            <span>{recordings.find(({ id }) => id === job.recordingId)?.name}</span>
            <JobProgress job={job} />
          </div>
        ))}
        {recordings
          .filter(({ state }) => state === 'refused')
          .map(({ id, name, fault }) => (
            <p key={id} role="alert">
              <strong>
                {name}: {fault?.cause}.
              </strong>{' '}
              {fault?.remedy}.{' '}
              <button type="button" class="quiet" onClick={() => app.set({ view: 'recordings' })}>
                Recordings
              </button>
            </p>
          ))}
        {recordings
          .filter(({ state, runs }) => state === 'ready' && runs.length === 0)
          .map(({ id, name, findings }) => (
            <div key={id}>
              <strong>{name}: no run could be taken from it.</strong>
              <Findings findings={findings} />
            </div>
          ))}
      </div>
    </main>
  );
}

function Toasts() {
  const faults = useSlice(app, (s) => s.faults);
  const uploading = useSlice(app, (s) => s.uploading);
  const runId = useSlice(app, (s) => s.runId);
  return (
    <div class="toast" aria-live="polite">
      {uploading !== null && runId !== null && (
        <div>
          Receiving {uploading.names}: {figure(100 * uploading.share, 0)} %{' '}
          <button type="button" onClick={uploading.cancel}>
            Cancel
          </button>
        </div>
      )}
      {faults.map((fault, i) => (
        <div key={i} role="alert">
          <strong>
            {fault.place.file === undefined ? '' : `${fault.place.file}: `}
            {fault.cause}.
          </strong>{' '}
          {fault.remedy}.{' '}
          <button
            type="button"
            class="quiet"
            aria-label="Put this message away"
            onClick={() => app.set({ faults: faults.filter((_, k) => k !== i) })}
          >
            ✕
          </button>
        </div>
      ))}
    </div>
  );
}

const KEYS: readonly (readonly [keys: string, what: string])[] = [
  ['j k', 'next and previous curve along the run'],
  ['w', 'the worst curve'],
  ['Esc', 'close the curve sheet'],
  ['1 to 5', 'the five screens'],
  ['← → + −', 'pan and zoom the strips (when they have the focus)'],
  ['Home', 'the whole run'],
  ['↑ ↓', 'through the ledger (when it has the focus)'],
  ['?', 'this card'],
];

function HelpCard({ dialog }: { readonly dialog: { current: HTMLDialogElement | null } }) {
  return (
    <dialog ref={dialog} aria-label="Keyboard">
      <h2>Keyboard</h2>
      <table class="plain">
        <tbody>
          {KEYS.map(([keys, what]) => (
            <tr key={keys}>
              <th scope="row">
                <kbd>{keys}</kbd>
              </th>
              <td>{what}</td>
            </tr>
          ))}
        </tbody>
      </table>
      <form method="dialog">
        <button type="submit">Close</button>
      </form>
    </dialog>
  );
}

function shortcut(event: KeyboardEvent, help: HTMLDialogElement | null): void {
  const target = event.target as HTMLElement;
  if (event.ctrlKey || event.metaKey || event.altKey || /^(INPUT|SELECT|TEXTAREA)$/.test(target.tagName)) return;
  const { open, curve, view } = app.get();
  const curves = open?.curves ?? [];
  const step = (by: number) => {
    const now = curves.findIndex(({ row }) => row.curve === curve);
    const next = curves[Math.min(curves.length - 1, Math.max(0, now + by))];
    if (next !== undefined) app.set({ curve: next.row.curve });
  };
  if (event.key === '?') help?.showModal();
  else if (/^[1-5]$/.test(event.key)) app.set({ view: SCREENS[Number(event.key) - 1]![0] });
  else if (view !== 'desk') return;
  else if (event.key === 'j') step(1);
  else if (event.key === 'k') step(-1);
  else if (event.key === 'w') {
    const worst = [...curves].sort(byWorst)[0];
    if (worst !== undefined) app.set({ curve: worst.row.curve, tab: 'sheet' });
  } else if (event.key === 'Escape' && help?.open !== true) app.set({ curve: null });
}
