import type { RecordingSummary, RunSummary } from '../../shared/schema/api.ts';
import { api, followEvents } from '../api.ts';
import { app, report } from './app-state.ts';
import { openRun } from './open-run.ts';

/** First load, then whatever the server tells; after a break of the connection everything is asked for again. */
export async function start(): Promise<void> {
  await load();
  let first = true;
  followEvents({
    opened() {
      if (!first) void load();
      first = false;
    },
    job(job) {
      app.set({ jobs: [job, ...app.get().jobs.filter((other) => other.id !== job.id)] });
    },
    recording: takeRecording,
    removed(id) {
      const { runId } = app.get();
      if (runId?.startsWith(`${id}.`) === true) app.set({ runId: null, open: null, curve: null, windowM: null });
      app.set({ recordings: app.get().recordings.filter((recording) => recording.id !== id) });
    },
  });
  // What happened between the first answer and the first event is in nobody's hands yet.
  await load();
}

async function load(): Promise<void> {
  try {
    const [recordings, catalogue, jobs] = await Promise.all([api.recordings(), api.catalogue(), api.jobs()]);
    app.set({ recordings, catalogue, jobs, loaded: true });
  } catch (error) {
    app.set({ loaded: true });
    report(error);
  }
  const first = app.get().recordings.flatMap(({ runs }) => runs)[0];
  if (app.get().runId === null && first !== undefined) await openRun(first.id);
}

function takeRecording(recording: RecordingSummary): void {
  const before = app.get().recordings;
  const old = before.find(({ id }) => id === recording.id);
  app.set({
    recordings: old === undefined ? [...before, recording] : before.map((r) => (r === old ? recording : r)),
  });
  if (recording.state !== 'ready') return;
  const { runId, curve, windowM } = app.get();
  const first = recording.runs[0];
  if (runId === null && first !== undefined) void openRun(first.id);
  // Analysed again: what is open shows the old result.
  else if (runId?.startsWith(`${recording.id}.`) === true && old?.state !== 'ready') {
    void openRun(runId, { curve, windowM });
  }
}

export interface RunGroup {
  readonly label: string;
  readonly runs: readonly RunSummary[];
}

/** Least share of the common box in the joint box at which two runs are taken to be over the same line. */
const SAME_GROUND = 0.7;

/** Runs of one line together: by the line that the server found, else by the ground that they cover. */
export function groupRuns(runs: readonly RunSummary[]): RunGroup[] {
  const groups: RunSummary[][] = [];
  for (const run of runs) {
    const group = groups.find(([first]) =>
      run.lineId !== null || first!.lineId !== null
        ? run.lineId === first!.lineId
        : overlap(run.bounds, first!.bounds) >= SAME_GROUND,
    );
    if (group === undefined) groups.push([run]);
    else group.push(run);
  }
  return groups.map((group) => ({
    label: `${(Math.max(...group.map(({ lengthM }) => lengthM)) / 1000).toFixed(1)} km, ${String(group.length)} ${group.length === 1 ? 'run' : 'runs'}`,
    runs: group,
  }));
}

type Box = RunSummary['bounds'];

function overlap(a: Box, b: Box): number {
  const common =
    Math.max(0, Math.min(a[2], b[2]) - Math.max(a[0], b[0])) * Math.max(0, Math.min(a[3], b[3]) - Math.max(a[1], b[1]));
  const area = (box: Box) => (box[2] - box[0]) * (box[3] - box[1]);
  const joint = area(a) + area(b) - common;
  return joint > 0 ? common / joint : 0;
}
