import type { Job } from '../../shared/schema/api.ts';
import { api } from '../api.ts';
import { report } from '../state/app-state.ts';
import { counted, duration, figure } from './text.ts';

const STAGES: Readonly<Record<string, string>> = {
  ingest: 'reading',
  clean: 'cleaning',
  estimate: 'estimating the motion',
  alignment: 'fitting the curves',
  store: 'storing',
};

/** How far an analysis is, how long it will take, and a way out. */
export function JobProgress({ job }: { readonly job: Job }) {
  const isQueued = job.state === 'queued';
  const left =
    job.secondsLeft === null || isQueued
      ? ''
      : job.secondsLeft < 60
        ? `, about ${figure(Math.max(1, job.secondsLeft), 0)} s left`
        : `, about ${duration(job.secondsLeft)} left`;
  return (
    <div class="job">
      <progress max={1} value={job.progress} aria-label="Progress of the analysis" />
      <span class="job-word">
        {isQueued ? 'waiting' : `${STAGES[job.stage] ?? job.stage}, ${figure(100 * job.progress, 0)} %`}
        {left}
        {job.curvesFound > 0 ? `, ${counted(job.curvesFound, 'curve')}` : ''}
      </span>
      <button type="button" onClick={() => void api.cancel(job.id).catch(report)}>
        Cancel
      </button>
    </div>
  );
}
