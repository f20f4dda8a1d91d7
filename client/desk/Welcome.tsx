import { Findings } from '../parts/Findings.tsx';
import { FilePicker } from '../parts/FilePicker.tsx';
import { JobProgress } from '../parts/JobProgress.tsx';
import { sentence } from '../shell/Messages.tsx';
import { app } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { loadDemo } from '../state/uploads.ts';

/** The first thing a newcomer sees, and what is on its way while nothing can be shown yet. */
export function Welcome() {
  const recordings = useSlice(app, (s) => s.recordings);
  const jobs = useSlice(app, (s) => s.jobs);
  const running = jobs.filter(({ state }) => state === 'running' || state === 'queued');
  const isBusy = running.length > 0;
  return (
    <div class="welcome">
      <Motif />
      <h1>Where does this line push its passengers harder than it may?</h1>
      {isBusy ? (
        <section class="work" aria-label="Work in hand">
          <h2>Finding the curves</h2>
          <p class="quiet-text">The first run opens by itself as soon as it is ready.</p>
          {running
            .slice()
            .sort((a, b) => b.progress - a.progress)
            .map((job) => (
              <div key={job.id}>
                <span>{recordings.find(({ id }) => id === job.recordingId)?.name}</span>
                <JobProgress job={job} />
              </div>
            ))}
        </section>
      ) : (
        <>
          <ol class="steps">
            <li>
              <strong>Give it a log</strong> recorded aboard a train, tram, bus, coach or car: from a telephone, a
              logger or the vehicle’s own tracker.
            </li>
            <li>
              <strong>It finds every curve</strong> and how hard each pushes sideways, with an interval that says how
              sure that is.
            </li>
            <li>
              <strong>It holds each against your limits</strong> and says which speed, cant or transition would bring it
              within, and what that costs in running time.
            </li>
          </ol>
          <div class="drop">
            <p class="drop-word">Drop logs here</p>
            <div class="row">
              <FilePicker label="Choose files" />
              <button type="button" class="primary" onClick={() => void loadDemo()}>
                Load the demonstration line
              </button>
            </div>
            <p class="quiet-text">
              GPX, NMEA, CSV, FIT, TCX, KML, GeoJSON and IGC, also zipped. Nothing leaves this computer. The
              demonstration’s operator, line and data are invented; it takes a few seconds.
            </p>
          </div>
        </>
      )}
      {recordings
        .filter(({ state }) => state === 'refused')
        .map(({ id, name, fault }) => (
          <div key={id} class="notice" role="alert">
            <p>
              <strong>
                {name} was refused. {sentence(fault?.cause ?? '')}
              </strong>{' '}
              {sentence(fault?.remedy ?? '')}
            </p>
            <button type="button" onClick={() => app.set({ view: 'recordings' })}>
              To the recordings
            </button>
          </div>
        ))}
      {recordings
        .filter(({ state, runs }) => state === 'ready' && runs.length === 0)
        .map(({ id, name, findings }) => (
          <div key={id} class="notice">
            <strong>{name}: no run could be taken from it.</strong>
            <Findings findings={findings} />
          </div>
        ))}
    </div>
  );
}

/** A curve with its tangent points: the sign of the house. */
function Motif() {
  return (
    <svg class="motif" viewBox="0 0 320 72" aria-hidden="true" fill="none">
      <path class="motif-line" d="M2 62 H96 C140 62 176 54 214 34 C246 17 276 10 318 10" />
      <path class="motif-over" d="M132 59.6 C160 56 186 48.6 214 34" />
      <circle cx="96" cy="62" r="4" />
      <circle cx="132" cy="59.6" r="4" />
      <circle cx="214" cy="34" r="4" />
      <circle cx="262" cy="15.2" r="4" />
    </svg>
  );
}
