import { useState } from 'preact/hooks';
import type { Job, RecordingSummary } from '../../shared/schema/api.ts';
import { api } from '../api.ts';
import { confirmAction } from '../parts/confirm.tsx';
import { FilePicker } from '../parts/FilePicker.tsx';
import { Findings } from '../parts/Findings.tsx';
import { JobProgress } from '../parts/JobProgress.tsx';
import { bytes, clock, counted, duration, figure, quantity } from '../parts/text.ts';
import { inShown } from '../parts/units.ts';
import { sentence } from '../shell/Messages.tsx';
import { app, notify, report } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { openRun } from '../state/open-run.ts';
import { loadDemo } from '../state/uploads.ts';
import { NameColumns } from './NameColumns.tsx';

/** Recordings with what became of them: runs, findings, refusals and what can be done about these. */
export function Recordings() {
  const recordings = useSlice(app, (s) => s.recordings);
  const jobs = useSlice(app, (s) => s.jobs);
  const busy = jobs.filter(({ state }) => state === 'running' || state === 'queued');
  const bytesKept = recordings.reduce((sum, recording) => sum + recording.bytes, 0);
  return (
    <div class="column">
      <header class="page-head">
        <div>
          <h1>Recordings</h1>
          <p class="quiet-text">
            {recordings.length === 0
              ? 'No recording yet. Drop files anywhere on this page, or choose them.'
              : `${counted(recordings.length, 'file')}, ${bytes(bytesKept)}, kept byte for byte on this computer. They hold positions of people and vehicles: treat them as personal data.`}
          </p>
        </div>
        <div class="row">
          {!recordings.some(({ demo }) => demo) && (
            <button type="button" onClick={() => void loadDemo()}>
              Load the demonstration line
            </button>
          )}
          <FilePicker label="Add recordings" primary />
        </div>
      </header>
      {busy.length > 0 && (
        <section class="card" aria-label="Work in hand">
          <div class="row">
            <h2 class="grow">Work in hand</h2>
            {busy.length > 1 && (
              <button
                type="button"
                onClick={() => {
                  for (const { id } of busy) void api.cancel(id).catch(report);
                }}
              >
                Cancel all
              </button>
            )}
          </div>
          {busy.map((job) => (
            <div key={job.id}>
              <span>{recordings.find(({ id }) => id === job.recordingId)?.name}</span>
              <JobProgress job={job} />
            </div>
          ))}
        </section>
      )}
      {[...recordings].reverse().map((recording) => (
        <RecordingCard
          key={recording.id}
          recording={recording}
          job={jobs.find(({ id }) => id === recording.jobId) ?? null}
        />
      ))}
    </div>
  );
}

const STATE_WORDS: Readonly<Record<RecordingSummary['state'], string>> = {
  waiting: 'waiting',
  analysing: 'being analysed',
  ready: 'ready',
  refused: 'refused',
};

function RecordingCard({ recording, job }: { readonly recording: RecordingSummary; readonly job: Job | null }) {
  const [naming, setNaming] = useState(false);
  const { fault, state, findings } = recording;
  const isIdle = state === 'refused' || state === 'ready';
  const wasCancelled = job?.state === 'cancelled' && !isIdle;
  const canName = recording.format === 'csv' || (fault !== null && recording.format === '');
  const title = recording.title === '' ? recording.name : recording.title;
  const remove = async () => {
    const question = `Delete “${title}” (${recording.name}) with its ${counted(recording.runs.length, 'run')} and results? The file is erased from this computer and cannot be brought back.`;
    if (!(await confirmAction(question, 'Delete it'))) return;
    try {
      await api.removeRecording(recording.id);
      notify(`“${title}” is deleted`);
    } catch (error) {
      report(error);
    }
  };
  return (
    <section class={`card recording ${state}`} aria-label={recording.name}>
      <div class="row">
        <h2 class="grow">{title}</h2>
        <span class={`state ${state}`}>{wasCancelled ? 'cancelled' : STATE_WORDS[state]}</span>
        <a class="button" href={`/api/recordings/${encodeURIComponent(recording.id)}/raw`} download={recording.name}>
          Original file
        </a>
        {canName && (
          <button type="button" aria-expanded={naming} onClick={() => setNaming(!naming)}>
            Columns
          </button>
        )}
        {(isIdle || wasCancelled) && (
          <button type="button" onClick={() => void api.analyse(recording.id).catch(report)}>
            Analyse again
          </button>
        )}
        <button type="button" onClick={() => void remove()}>
          Delete
        </button>
      </div>
      <p class="quiet-text meta">
        <span>{recording.name}</span>
        <span>{bytes(recording.bytes)}</span>
        {recording.format !== '' && (
          <span>
            {recording.format.toUpperCase()}
            {recording.encoding === '' ? '' : `, ${recording.encoding}`}
          </span>
        )}
        {recording.fixCount > 0 && <span>{figure(recording.fixCount, 0)} fixes</span>}
        <span>added {clock(recording.uploadedUtcS)}</span>
        <span title={recording.sha256}>SHA-256 {recording.sha256.slice(0, 12)}…</span>
        {recording.demo && <span>demonstration: invented</span>}
      </p>
      {!isIdle && !wasCancelled && job !== null && <JobProgress job={job} />}
      {fault !== null && (
        <div class="notice" role="alert">
          <p>
            <strong>{sentence(fault.cause)}</strong> {placeText(fault.place)}
            {sentence(fault.remedy)}
          </p>
          {canName && !naming && (
            <button type="button" class="primary" onClick={() => setNaming(true)}>
              Name the columns by hand
            </button>
          )}
        </div>
      )}
      {naming && <NameColumns recording={recording} onDone={() => setNaming(false)} />}
      {recording.runs.length > 0 && <RunTable recording={recording} />}
      {state === 'ready' && (
        <details>
          <summary>{findings.length === 0 ? 'No findings' : counted(findings.length, 'finding')}</summary>
          <Findings findings={findings} />
        </details>
      )}
      {recording.columns.length > 0 && (
        <details>
          <summary>What the columns were taken for</summary>
          <ul class="column-uses">
            {recording.columns.map(({ header, field, unit, guessed }) => (
              <li key={header}>
                <code>{header}</code> {field === 'ignored' ? 'not used' : field}
                {unit === '' ? '' : `, ${unit}`}
                {guessed ? ', guessed' : ''}
              </li>
            ))}
          </ul>
        </details>
      )}
    </section>
  );
}

function placeText(place: NonNullable<RecordingSummary['fault']>['place']): string {
  const parts = [];
  if (place.line !== undefined) parts.push(`line ${String(place.line)}`);
  if (place.byte !== undefined) parts.push(`byte ${String(place.byte)}`);
  if (place.column !== undefined) parts.push(`column “${place.column}”`);
  return parts.length === 0 ? '' : `At ${parts.join(', ')}. `;
}

function RunTable({ recording }: { readonly recording: RecordingSummary }) {
  const units = useSlice(app, (s) => s.units);
  const runId = useSlice(app, (s) => s.runId);
  const lengthUnit = inShown(0, 'm', 1, units, true).unit;
  const isLong = lengthUnit === 'm' || lengthUnit === 'km';
  return (
    <div class="scroll-x">
      <table class="plain figures">
        <thead>
          <tr>
            <th scope="col">Run</th>
            <th scope="col">Begins</th>
            <th scope="col" class="num">
              Length
            </th>
            <th scope="col" class="num">
              Time
            </th>
            <th scope="col" class="num">
              Top speed
            </th>
            <th scope="col" class="num">
              Curves
            </th>
            <th scope="col">
              <span class="sr">Open</span>
            </th>
          </tr>
        </thead>
        <tbody>
          {recording.runs.map((run) => (
            <tr key={run.id}>
              <th scope="row">{run.name}</th>
              <td>{clock(run.startUtcS)}</td>
              <td class="num">
                {isLong ? `${figure(run.lengthM / 1000, 2)} km` : quantity(run.lengthM, 'm', 0, units, true)}
              </td>
              <td class="num">{duration(run.durationS)}</td>
              <td class="num">{quantity(run.topSpeedKmh, 'km/h', 0, units)}</td>
              <td class="num">{run.curveCount}</td>
              <td class="num">
                <button
                  type="button"
                  class="small"
                  aria-label={`Open ${run.name}`}
                  onClick={() => {
                    app.set({ view: 'desk' });
                    if (runId !== run.id) void openRun(run.id);
                  }}
                >
                  Open
                </button>
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
