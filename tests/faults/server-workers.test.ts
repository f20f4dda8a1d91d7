import { createHash } from 'node:crypto';
import { writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { afterAll, describe, expect, it } from 'vitest';
import { JobQueue } from '../../server/jobs/queue.ts';
import { Store } from '../../server/store/store.ts';
import type { Job } from '../../shared/schema/api.ts';
import { makeFolder, removeFolders } from '../support/server.ts';

afterAll(removeFolders);

const workerFile = fileURLToPath(new URL('workers/misbehaving-worker.mjs', import.meta.url));

async function openQueue(
  folder: string,
  heapMb?: number,
): Promise<{ store: Store; queue: JobQueue; close: () => Promise<void> }> {
  const store = await Store.open(folder);
  const queue = new JobQueue(store, { workerFile, threads: 1, ...(heapMb === undefined ? {} : { heapMb }) });
  return {
    store,
    queue,
    async close() {
      await queue.close();
      await store.close();
    },
  };
}

/** Lists a recording; its bytes do not matter, its name tells the thread how to fail. */
async function addRecording(store: Store, name: string): Promise<string> {
  const id = createHash('sha256').update(name).digest('hex').slice(0, 12);
  const temporary = `${store.raw.incoming}/${id}`;
  writeFileSync(temporary, 'x');
  const facts = { title: null, bytes: 1, sha256: '', demo: false, mode: null, columns: {} };
  await store.addRecording(temporary, { id, name, uploadedUtcS: 0, ...facts });
  return id;
}

async function outcome(queue: JobQueue, id: string): Promise<Job> {
  await expect.poll(async () => (await queue.job(id))!.state, { timeout: 30_000 }).toMatch(/done|failed|cancelled/);
  return (await queue.job(id))!;
}

describe('analysis threads that fail', () => {
  it.each([
    ['exits', 'jobs/ended'],
    ['throws', 'jobs/ended'],
    ['hoards', 'jobs/out-of-memory'],
    ['refuses', 'ingest/not-a-log'],
  ])('one that %s fails its job with %s, and the next job is done', async (name, code) => {
    const { store, queue, close } = await openQueue(await makeFolder(), 64);
    const bad = await queue.add(await addRecording(store, name));
    const next = await queue.add(await addRecording(store, 'next'));
    const failed = await outcome(queue, bad.id);
    expect(failed).toMatchObject({ state: 'failed', fault: { code, place: { file: name } } });
    expect(failed.fault!.remedy).not.toBe('');
    expect(failed.fault!.cause).not.toMatch(/\n\s+at /);
    expect((await store.recording(bad.recordingId))!).toMatchObject({ state: 'refused', fault: { code } });
    expect((await outcome(queue, next.id)).fault!.code).toBe('ingest/not-a-log');
    await close();
  });

  it('one in an endless loop ends when its job is cancelled, and the next job is done', async () => {
    const { store, queue, close } = await openQueue(await makeFolder());
    const endless = await queue.add(await addRecording(store, 'loops'));
    const next = await queue.add(await addRecording(store, 'next'));
    await expect.poll(async () => (await queue.job(endless.id))!.progress).toBe(0.1);
    expect(await queue.cancel(endless.id)).toMatchObject({ state: 'cancelled', fault: { code: 'jobs/cancelled' } });
    expect((await outcome(queue, next.id)).state).toBe('failed');
    await close();
  });

  it('a deleted recording takes its running job with it', async () => {
    const { store, queue, close } = await openQueue(await makeFolder());
    const endless = await queue.add(await addRecording(store, 'loops'));
    await expect.poll(async () => (await queue.job(endless.id))!.progress).toBe(0.1);
    const removed: unknown[] = [];
    queue.on('removed', (body) => removed.push(body));
    await queue.remove(endless.recordingId);
    expect(removed).toEqual([{ id: endless.recordingId }]);
    expect(await queue.jobs()).toEqual([]);
    expect(await store.recordings()).toEqual([]);
    await close();
  });
});

describe('jobs that a server left behind', () => {
  it('running ones are done again at the next start', async () => {
    const folder = await makeFolder();
    const first = await openQueue(folder);
    const endless = await first.queue.add(await addRecording(first.store, 'loops'));
    await expect.poll(async () => (await first.queue.job(endless.id))!.progress).toBe(0.1);
    await first.close();
    const second = await openQueue(folder);
    expect((await second.store.jobs.find(endless.id))!.state).toBe('running');
    await second.queue.start();
    await expect.poll(async () => (await second.queue.job(endless.id))!.progress).toBe(0.1);
    await second.close();
  });

  it('one that ended the server again and again is given up, told, and can be asked for by hand', async () => {
    const folder = await makeFolder();
    const first = await openQueue(folder);
    const { id, recordingId } = await first.queue.add(await addRecording(first.store, 'loops'));
    await expect.poll(async () => (await first.queue.job(id))!.progress).toBe(0.1);
    let last = first;
    for (let start = 0; start < 4; start++) {
      await last.close();
      last = await openQueue(folder);
      await last.queue.start();
      await expect.poll(async () => (await last.queue.job(id))!.progress).toBe(0.1);
    }
    await last.close();
    const { store, queue, close } = await openQueue(folder);
    await queue.start();
    const code = 'jobs/interrupted';
    expect(await queue.job(id)).toMatchObject({ state: 'failed', fault: { code, place: { file: 'loops' } } });
    expect(await store.recording(recordingId)).toMatchObject({ state: 'refused', fault: { code } });
    const again = await queue.add(recordingId);
    await expect.poll(async () => (await queue.job(again.id))!.progress).toBe(0.1);
    await close();
  });

  it('a recording without a job, as a kill between the two leaves it, gets one', async () => {
    const folder = await makeFolder();
    const { store, queue, close } = await openQueue(folder);
    const id = await addRecording(store, 'lonely');
    expect(await queue.jobs()).toEqual([]);
    await queue.start();
    await expect
      .poll(async () => (await queue.jobs()).map((job) => [job.recordingId, job.state]))
      .toEqual([[id, 'failed']]);
    await close();
  });
});
