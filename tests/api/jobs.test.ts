import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { Job, RecordingSummary } from '../../shared/schema/api.ts';
import { demoFile, smallCsv } from '../support/recordings.ts';
import { readEvents } from '../support/events.ts';
import {
  call,
  faultOf,
  makeFolder,
  removeFolders,
  settled,
  startServer,
  upload,
  type TestServer,
} from '../support/server.ts';

let server: TestServer;
beforeAll(async () => {
  server = await startServer(await makeFolder());
});
afterAll(async () => {
  await server.end();
  await removeFolders();
});

describe('analysis in the background', () => {
  it('tells its progress and its end as events', async () => {
    const events = await readEvents(`${server.url}/api/events`);
    const { id, jobId } = (await upload(server, [demoFile('rail-cab-2025-03-11.nmea')])).recordings[0]!;
    await settled(server, id);
    await fetch(`${server.url}/api/recordings/${id}`, { method: 'DELETE' });
    await expect.poll(() => events.of('removed')).toEqual([{ id }]);
    const jobs = events.of('job').map((body) => Job.parse(body));
    expect(new Set(jobs.map((job) => job.id))).toEqual(new Set([jobId]));
    expect(jobs[0]!.state).toBe('queued');
    expect(jobs.at(-1)).toMatchObject({ state: 'done', progress: 1, fault: null });
    expect(jobs.at(-1)!.curvesFound).toBeGreaterThan(10);
    const stages = new Set(jobs.filter(({ state }) => state === 'running').map(({ stage }) => stage));
    expect([...stages]).toEqual(expect.arrayContaining(['ingest', 'estimate', 'alignment']));
    const progress = jobs.map((job) => job.progress);
    expect(progress).toEqual([...progress].sort((a, b) => a - b));
    expect(Math.max(...jobs.map(({ bytesRead }) => bytesRead))).toBe(
      demoFile('rail-cab-2025-03-11.nmea').content.length,
    );
    const states = events.of('recording').map((body) => RecordingSummary.parse(body).state);
    expect(states[0]).toBe('waiting');
    expect(states).toContain('analysing');
    expect(states.at(-1)).toBe('ready');
    events.close();
  });

  it('stops when asked to; the recording stays and can be analysed again', async () => {
    const { recordings } = await upload(server, [
      demoFile('rail-cab-2025-03-11.nmea'),
      { name: 'behind.csv', content: smallCsv(1) },
    ]);
    for (const { jobId } of recordings) {
      const job = await call(Job, `${server.url}/api/jobs/${jobId!}`, { method: 'DELETE' });
      expect(job).toMatchObject({ state: 'cancelled', fault: { code: 'jobs/cancelled' } });
    }
    for (const { id } of recordings) {
      const recording = await settled(server, id);
      expect(recording).toMatchObject({ state: 'refused', fault: { code: 'jobs/cancelled' } });
      const again = await call(Job, `${server.url}/api/recordings/${id}/analyse`, { method: 'POST' });
      expect(again.state).toBe('queued');
      expect(await settled(server, id)).toMatchObject({ state: 'ready', fault: null });
    }
    const jobs = await call(z.array(Job), `${server.url}/api/jobs`);
    expect(jobs.filter(({ state }) => state === 'cancelled')).toHaveLength(2);
  });

  it('a job that was asked for again while it ran is replaced, not doubled', async () => {
    const { id } = (await upload(server, [demoFile('rail-cab-2025-03-11.nmea')])).recordings[0]!;
    for (let i = 0; i < 3; i++) await call(Job, `${server.url}/api/recordings/${id}/analyse`, { method: 'POST' });
    const recording = await settled(server, id);
    expect(recording.state).toBe('ready');
    const jobs = (await call(z.array(Job), `${server.url}/api/jobs`)).filter((job) => job.recordingId === id);
    expect(jobs.filter(({ state }) => state === 'done')).toHaveLength(1);
    expect(jobs.filter(({ state }) => state === 'cancelled')).toHaveLength(3);
    expect(jobs.find(({ state }) => state === 'done')!.id).toBe(recording.jobId);
  });

  it('answers 404 to a job or a recording that is not there', async () => {
    await faultOf(`${server.url}/api/jobs/none`, 404);
    await faultOf(`${server.url}/api/jobs/none`, 404, { method: 'DELETE' });
    await faultOf(`${server.url}/api/recordings/none/analyse`, 404, { method: 'POST' });
  });

  it('ends in order when asked to, open event streams notwithstanding, and takes up its work at the next start', async () => {
    const folder = await makeFolder();
    const first = await startServer(folder);
    const events = await readEvents(`${first.url}/api/events`);
    const { id } = (await upload(first, [demoFile('rail-cab-2025-03-11.nmea')])).recordings[0]!;
    expect(await first.end('SIGTERM')).toBe(0);
    events.close();
    const second = await startServer(folder);
    expect(await settled(second, id)).toMatchObject({ state: 'ready', fault: null });
    await second.end();
  });
});
