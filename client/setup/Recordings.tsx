import { useEffect, useState } from 'preact/hooks';
import type { ColumnNames, ColumnPreview, Job, RecordingSummary } from '../../shared/schema/api.ts';
import { api } from '../api.ts';
import { confirmAction } from '../parts/confirm.ts';
import { Findings } from '../parts/Findings.tsx';
import { bytes, clock, duration, figure } from '../parts/text.ts';
import { addFiles, loadDemo } from '../state/uploads.ts';
import { app, openRun, report } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

/** Recordings with what became of them: runs, findings, refusals and what can be done about these. */
export function Recordings() {
  const recordings = useSlice(app, (s) => s.recordings);
  const jobs = useSlice(app, (s) => s.jobs);
  return (
    <main class="page">
      <div class="column">
        <div class="row">
          <h1 class="grow">Recordings</h1>
          <FilePicker label="Add recordings" />
          <button type="button" onClick={() => void loadDemo()}>
            Load the demonstration line
          </button>
        </div>
        {recordings.length === 0 && <p>No recording yet. Drop files anywhere on this page.</p>}
        {[...recordings].reverse().map((recording) => (
          <Recording
            key={recording.id}
            recording={recording}
            job={jobs.find(({ id }) => id === recording.jobId) ?? null}
          />
        ))}
      </div>
    </main>
  );
}

export function FilePicker({ label, primary = false }: { readonly label: string; readonly primary?: boolean }) {
  return (
    <label class={`button${primary ? ' primary-label' : ''}`}>
      {label}
      <input
        class="sr"
        type="file"
        multiple
        onChange={(e) => {
          addFiles([...(e.currentTarget.files ?? [])]);
          e.currentTarget.value = '';
        }}
      />
    </label>
  );
}

function Recording({ recording, job }: { readonly recording: RecordingSummary; readonly job: Job | null }) {
  const [naming, setNaming] = useState(false);
  const { fault, state } = recording;
  const findings = recording.findings;
  return (
    <section class="card" aria-label={recording.name}>
      <div class="row">
        <h2 class="grow">{recording.title === '' ? recording.name : recording.title}</h2>
        {recording.demo && <span class="quiet-text">demonstration, invented</span>}
        <a class="button" href={`/api/recordings/${recording.id}/raw`} download>
          Original file
        </a>
        {recording.format === 'csv' || fault !== null ? (
          <button type="button" aria-expanded={naming} onClick={() => setNaming(!naming)}>
            Columns
          </button>
        ) : null}
        {(state === 'refused' || state === 'ready') && (
          <button type="button" onClick={() => void api.analyse(recording.id).catch(report)}>
            Analyse again
          </button>
        )}
        <button
          type="button"
          onClick={() => {
            if (confirmAction(`Delete "${recording.name}" with its runs and results? This cannot be undone.`))
              void api.removeRecording(recording.id).catch(report);
          }}
        >
          Delete
        </button>
      </div>
      <p class="quiet-text">
        {recording.name} · {bytes(recording.bytes)} ·{' '}
        {recording.format === '' ? 'not read yet' : recording.format.toUpperCase()}
        {recording.encoding === '' ? '' : `, ${recording.encoding}`} · {figure(recording.fixCount, 0)} fixes · added{' '}
        {clock(recording.uploadedUtcS)} · SHA-256 {recording.sha256.slice(0, 16)}…
      </p>
      {(state === 'waiting' || state === 'analysing') && job !== null && <JobProgress job={job} />}
      {fault !== null && (
        <p role="alert">
          <strong>Refused: {fault.cause}.</strong> {fault.remedy}.
        </p>
      )}
      {recording.runs.length > 0 && (
        <div class="scroll-x">
          <table class="plain">
            <thead>
              <tr>
                <th>Run</th>
                <th>Begins</th>
                <th class="num">Length km</th>
                <th class="num">Time</th>
                <th class="num">Top km/h</th>
                <th class="num">Curves</th>
                <th />
              </tr>
            </thead>
            <tbody>
              {recording.runs.map((run) => (
                <tr key={run.id}>
                  <td>{run.name}</td>
                  <td>{clock(run.startUtcS)}</td>
                  <td class="num">{figure(run.lengthM / 1000, 2)}</td>
                  <td class="num">{duration(run.durationS)}</td>
                  <td class="num">{figure(run.topSpeedKmh, 0)}</td>
                  <td class="num">{run.curveCount}</td>
                  <td>
                    <button
                      type="button"
                      onClick={() => {
                        app.set({ view: 'desk' });
                        void openRun(run.id);
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
      )}
      {state === 'ready' && (
        <details>
          <summary>Findings ({findings.length})</summary>
          <Findings findings={findings} />
        </details>
      )}
      {naming && <NameColumns recording={recording} onDone={() => setNaming(false)} />}
    </section>
  );
}

export function JobProgress({ job }: { readonly job: Job }) {
  const left =
    job.secondsLeft === null || job.state === 'queued'
      ? ''
      : `, about ${figure(Math.max(1, job.secondsLeft), 0)} s left`;
  return (
    <div class="row" role="status">
      <progress class="grow" max={1} value={job.progress} aria-label="Progress of the analysis" />
      <span>
        {job.state === 'queued' ? 'waiting' : job.stage} {figure(100 * job.progress, 0)} %{left}
        {job.curvesFound > 0 ? `, ${String(job.curvesFound)} curves` : ''}
      </span>
      <button type="button" onClick={() => void api.cancel(job.id).catch(report)}>
        Cancel
      </button>
    </div>
  );
}

const FIELDS: readonly (readonly [field: string, label: string, units: readonly string[]])[] = [
  ['latDeg', 'Latitude', []],
  ['lonDeg', 'Longitude', []],
  ['utcS', 'Time', ['', 's', 'ms']],
  ['speedMps', 'Speed', ['', 'm/s', 'km/h', 'mph', 'kn']],
  ['courseRad', 'Course', ['', 'deg', 'rad']],
  ['elevationM', 'Elevation', ['', 'm', 'ft']],
];

/** The columns as they were read, the first rows, and a choice for each field. */
function NameColumns({ recording, onDone }: { readonly recording: RecordingSummary; readonly onDone: () => void }) {
  const [preview, setPreview] = useState<ColumnPreview | null>(null);
  const [names, setNames] = useState<ColumnNames>({});
  useEffect(() => {
    api
      .preview(recording.id)
      .then((answer) => {
        setPreview(answer);
        const guessed = answer.columns.filter(({ field }) => field !== 'ignored');
        setNames(
          Object.fromEntries(
            guessed.map(({ field, header, unit }) => [field, unit === '' ? { header } : { header, unit }]),
          ),
        );
      })
      .catch(report);
  }, [recording.id]);
  if (preview === null) return <p class="quiet-text">Reading the first rows …</p>;
  if (preview.headers.length === 0)
    return <p>This file has no columns that could be named: it is not delimited text.</p>;
  return (
    <form
      onSubmit={(e) => {
        e.preventDefault();
        api.nameColumns(recording.id, names).then(onDone).catch(report);
      }}
    >
      {preview.fault !== null && (
        <p role="alert">
          <strong>{preview.fault.cause}.</strong> {preview.fault.remedy}.
        </p>
      )}
      <div class="row">
        {FIELDS.map(([field, label, units]) => (
          <label key={field} class="row">
            {label}
            <select
              value={names[field]?.header ?? ''}
              onChange={(e) => {
                const header = e.currentTarget.value;
                const { [field]: _gone, ...rest } = names;
                setNames(header === '' ? rest : { ...rest, [field]: { header } });
              }}
            >
              <option value="">none</option>
              {preview.headers.map((header) => (
                <option key={header} value={header}>
                  {header}
                </option>
              ))}
            </select>
            {units.length > 0 && names[field] !== undefined && (
              <select
                aria-label={`Unit of ${label.toLowerCase()}`}
                value={names[field].unit ?? ''}
                onChange={(e) => {
                  const unit = e.currentTarget.value;
                  const { header } = names[field]!;
                  setNames({ ...names, [field]: unit === '' ? { header } : { header, unit } });
                }}
              >
                {units.map((unit) => (
                  <option key={unit} value={unit}>
                    {unit === '' ? 'as recognised' : unit}
                  </option>
                ))}
              </select>
            )}
          </label>
        ))}
      </div>
      <div class="scroll-x">
        <table class="plain">
          <thead>
            <tr>
              {preview.headers.map((header) => (
                <th key={header}>{header}</th>
              ))}
            </tr>
          </thead>
          <tbody>
            {preview.rows.slice(0, 6).map((cells, i) => (
              <tr key={i}>
                {cells.map((cell, k) => (
                  <td key={k}>{cell}</td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
      <button type="submit" class="primary">
        Read with these columns
      </button>
    </form>
  );
}
