import { counted, figure } from '../parts/text.ts';
import { FilePicker } from '../parts/FilePicker.tsx';
import { app } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { openRun } from '../state/open-run.ts';
import { groupRuns } from '../state/server.ts';
import { SCREENS } from './shortcuts.ts';

/** Name, run, screens, and what concerns the whole page. */
export function TopBar({ onHelp }: { readonly onHelp: () => void }) {
  const view = useSlice(app, (s) => s.view);
  const theme = useSlice(app, (s) => s.theme);
  const jobs = useSlice(app, (s) => s.jobs);
  const busy = jobs.filter(({ state }) => state === 'running' || state === 'queued');
  const share = busy.reduce((sum, job) => sum + job.progress, 0) / Math.max(1, busy.length);
  return (
    <header class="topbar">
      <a class="brand" href="#/desk" aria-label="Bendbook, to the line">
        <img src="/favicon.svg" alt="" width="24" height="24" />
        Bendbook
      </a>
      <RunChooser />
      <nav class="screens" aria-label="Screens">
        {SCREENS.map(([name, label]) => (
          <button
            key={name}
            type="button"
            class="screen-tab"
            aria-current={view === name ? 'page' : undefined}
            onClick={() => app.set({ view: name })}
          >
            {label}
          </button>
        ))}
      </nav>
      <div class="row page-tools">
        {busy.length > 0 && (
          <button type="button" class="quiet busy" onClick={() => app.set({ view: 'recordings' })}>
            <span>{counted(busy.length, 'log')} in work</span>
            <progress max={1} value={share} aria-label="Progress of the analysis" />
          </button>
        )}
        <FilePicker label="Add logs" />
        <button
          type="button"
          class="quiet icon"
          onClick={() => app.set({ theme: theme === 'dark' ? 'light' : 'dark' })}
          aria-label={`${theme === 'dark' ? 'Light' : 'Dark'} colours`}
          title={`${theme === 'dark' ? 'Light' : 'Dark'} colours`}
        >
          <svg viewBox="0 0 16 16" aria-hidden="true">
            <circle cx="8" cy="8" r="6.2" fill="none" stroke="currentColor" stroke-width="1.5" />
            <path d="M8 1.8a6.2 6.2 0 0 1 0 12.4Z" fill="currentColor" />
          </svg>
        </button>
        <button type="button" class="quiet icon" onClick={onHelp} aria-label="Keys" title="Keys">
          ?
        </button>
      </div>
    </header>
  );
}

/** Runs of one line stand together, whatever recording they came from. */
function RunChooser() {
  const runId = useSlice(app, (s) => s.runId);
  const recordings = useSlice(app, (s) => s.recordings);
  const runs = recordings.flatMap((recording) => recording.runs);
  if (runs.length === 0) return null;
  return (
    <label class="run-chooser">
      <span class="sr">Run</span>
      <select
        value={runId ?? ''}
        onChange={(e) => {
          app.set({ view: 'desk' });
          void openRun(e.currentTarget.value);
        }}
      >
        {runId === null && <option value="">Choose a run</option>}
        {groupRuns(runs).map((group) => (
          <optgroup key={group.runs[0]!.id} label={`Line of ${group.label}`}>
            {group.runs.map((run) => (
              <option key={run.id} value={run.id}>
                {run.name} · {figure(run.lengthM / 1000, 1)} km · {counted(run.curveCount, 'curve')}
              </option>
            ))}
          </optgroup>
        ))}
      </select>
    </label>
  );
}
