import { createHash } from 'node:crypto';
import { readdir } from 'node:fs/promises';
import { connect } from 'node:net';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { ColumnPreview, Job, RecordingSummary } from '../../shared/schema/api.ts';
import { demoFile, smallCsv } from '../support/recordings.ts';
import {
  call,
  faultOf,
  jsonBody,
  makeFolder,
  multipart,
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

const list = () => call(z.array(RecordingSummary), `${server.url}/api/recordings`);
const filesIn = (folder: string) => readdir(join(server.dataDir, folder));

/** Sends the head of an upload of `announced` bytes and `sent` bytes of it, then cuts the line. */
async function cutOffUpload(announced: number, sent: number): Promise<void> {
  const { hostname, port } = new URL(server.url);
  const head = `--b\r\nContent-Disposition: form-data; name="file"; filename="cut.gpx"\r\n\r\n`;
  const socket = connect(Number(port), hostname);
  await new Promise((resolve) => socket.once('connect', resolve));
  socket.write(
    `POST /api/recordings HTTP/1.1\r\nHost: ${hostname}:${port}\r\nContent-Type: multipart/form-data; boundary=b\r\n` +
      `Content-Length: ${String(announced)}\r\n\r\n${head}`,
  );
  await new Promise((resolve) => socket.write(Buffer.alloc(sent, 0x20), resolve));
  // Received and on its way to the disk before the line is cut.
  await expect.poll(async () => (await filesIn('incoming')).length).toBeGreaterThan(0);
  socket.destroy();
}

describe('upload of recordings', () => {
  it('keeps the bytes as they came, with their sum, and gives them back', async () => {
    const file = demoFile('rail-return-2025-04-02.gpx');
    const { recordings, refused } = await upload(server, [file]);
    expect(refused).toEqual([]);
    const sha256 = createHash('sha256').update(file.content).digest('hex');
    expect(recordings).toMatchObject([{ name: file.name, bytes: file.content.length, sha256 }]);
    const { id } = recordings[0]!;
    const raw = new Uint8Array(await (await fetch(`${server.url}/api/recordings/${id}/raw`)).arrayBuffer());
    expect(createHash('sha256').update(raw).digest('hex')).toBe(sha256);
    const ready = await settled(server, id);
    expect(ready.state).toBe('ready');
    expect(ready.format).toBe('gpx');
    expect(ready.runs).toHaveLength(1);
    expect(ready.runs[0]!.curveCount).toBeGreaterThan(10);
  });

  it('takes several files at once; each comes to its own end', async () => {
    const { recordings, refused } = await upload(server, [
      { name: 'good.csv', content: smallCsv(1) },
      { name: 'empty.gpx', content: '' },
      { name: 'letter.txt', content: 'Dear colleague,\n\nplease find the log attached.\n' },
    ]);
    expect(recordings.map(({ name }) => name)).toEqual(['good.csv', 'letter.txt']);
    expect(refused).toMatchObject([
      { name: 'empty.gpx', fault: { code: 'ingest/empty', place: { file: 'empty.gpx' } } },
    ]);
    expect((await settled(server, recordings[0]!.id)).state).toBe('ready');
    const letter = await settled(server, recordings[1]!.id);
    expect(letter.state).toBe('refused');
    expect(letter.fault?.code).toMatch(/^ingest\//);
    expect(letter.fault?.remedy).not.toBe('');
  });

  it('refuses 300 MB over the limit with 413, keeps nothing of it and lives on', async () => {
    const before = await list();
    const megabyte = Buffer.alloc(1_000_000, 0x20);
    const body = new ReadableStream<Uint8Array>({
      start(controller) {
        controller.enqueue(
          Buffer.from('--b\r\nContent-Disposition: form-data; name="file"; filename="long.nmea"\r\n\r\n'),
        );
      },
      pull(controller) {
        controller.enqueue(megabyte);
        sent++;
        if (sent === 300) {
          controller.enqueue(Buffer.from('\r\n--b--\r\n'));
          controller.close();
        }
      },
    });
    let sent = 0;
    const fault = await faultOf(`${server.url}/api/recordings`, 413, {
      method: 'POST',
      body,
      headers: { 'content-type': 'multipart/form-data; boundary=b' },
      duplex: 'half',
    } as RequestInit);
    expect(fault.code).toBe('upload/too-large');
    expect(fault.cause).toContain('200 MB');
    expect(await filesIn('incoming')).toEqual([]);
    expect((await list()).map(({ id }) => id)).toEqual(before.map(({ id }) => id));
  });

  it('keeps nothing of an upload that is cut off half way', async () => {
    const before = await list();
    await cutOffUpload(5_000_000, 2_000_000);
    await expect.poll(() => filesIn('incoming'), { timeout: 10_000 }).toEqual([]);
    expect((await list()).map(({ id }) => id)).toEqual(before.map(({ id }) => id));
  });

  it.each([
    ['no file in the form', { body: multipart([]) }],
    ['no form', jsonBody('POST', { file: 'x' })],
    ['a form without boundary', { body: 'x', headers: { 'content-type': 'multipart/form-data' } }],
    [
      'a file in another field',
      {
        body: '--b\r\nContent-Disposition: form-data; name="f"; filename="a"\r\n\r\nx\r\n--b--\r\n',
        headers: { 'content-type': 'multipart/form-data; boundary=b' },
      },
    ],
  ])('answers 400 to %s', async (_what, init) => {
    const fault = await faultOf(`${server.url}/api/recordings`, 400, { ...init, method: 'POST' });
    expect(fault.remedy).not.toBe('');
    expect(await filesIn('incoming')).toEqual([]);
  });

  it('takes columns named by hand, refuses what is no such thing, and analyses anew when they change', async () => {
    const content = smallCsv(2).replace('time,lat,lon,speed_ms,course', 'a,b,c,d,e');
    const unnamed = (await upload(server, [{ name: 'unnamed.csv', content }])).recordings[0]!;
    expect(await settled(server, unnamed.id)).toMatchObject({ state: 'refused' });
    const names = { time: { header: 'a' }, latitude: { header: 'b' }, longitude: { header: 'c' } };
    const columns = { ...names, speed: { header: 'd', unit: 'm/s' } };
    const job = await call(Job, `${server.url}/api/recordings/${unnamed.id}/columns`, jsonBody('PUT', columns));
    expect(job.recordingId).toBe(unnamed.id);
    expect(await settled(server, unnamed.id)).toMatchObject({ state: 'ready', fault: null });
    const preview = await call(ColumnPreview, `${server.url}/api/recordings/${unnamed.id}/preview`);
    expect(preview.headers).toEqual(['a', 'b', 'c', 'd', 'e']);
    expect(preview.rows[0]).toHaveLength(5);
    expect(preview.columns.find(({ header }) => header === 'd')).toMatchObject({ unit: 'm/s' });
    const named = (await upload(server, [{ name: 'named.csv', content }], columns)).recordings[0]!;
    expect(await settled(server, named.id)).toMatchObject({ state: 'ready', fault: null });
    const bad = multipart([{ name: 'x.csv', content }], { time: 5 });
    expect((await faultOf(`${server.url}/api/recordings`, 400, { method: 'POST', body: bad })).code).toBe(
      'http/bad-request',
    );
    expect(await filesIn('incoming')).toEqual([]);
  });

  it('refuses a recording in which nothing moves, and says what was found', async () => {
    const rows = Array.from({ length: 60 }, (_, t) => `${new Date(Date.UTC(2025, 4, 6, 7, 0, t)).toISOString()},50,8`);
    const content = `time,lat,lon\n${rows.join('\n')}\n`;
    const { id } = (await upload(server, [{ name: 'parked.csv', content }])).recordings[0]!;
    const parked = await settled(server, id);
    expect(parked).toMatchObject({ state: 'refused', fault: { code: 'clean/no-run' }, runs: [], fixCount: 60 });
    expect(parked.fault!.remedy).toContain('some hundred metres');
  });

  it('shows names as text only: no folders, no control characters', async () => {
    // A form writes a line break within a name as %0A (HTML Standard, multipart/form-data encoding algorithm).
    const form = '--b\r\nContent-Disposition: form-data; name="file"; filename="../../etc/<b>ü%0A.csv"\r\n\r\n';
    const body = Buffer.from(`${form}${smallCsv(3)}\r\n--b--\r\n`, 'utf8');
    const headers = { 'content-type': 'multipart/form-data; boundary=b' };
    const response = await fetch(`${server.url}/api/recordings`, { method: 'POST', body, headers });
    expect(response.status).toBe(201);
    const { recordings } = (await response.json()) as { recordings: { name: string; id: string }[] };
    expect(recordings[0]!.name).toBe('<b>ü.csv');
    await settled(server, recordings[0]!.id);
  });

  it('deletes a recording with its file, its runs and its results', async () => {
    const { id } = (await upload(server, [{ name: 'short-lived.csv', content: smallCsv(4) }])).recordings[0]!;
    const { runs } = await settled(server, id);
    expect(runs).toHaveLength(1);
    expect(await filesIn('recordings')).toEqual(expect.arrayContaining([`${id}.raw`, `${id}.json`]));
    expect(await filesIn('profiles')).toContain(`${runs[0]!.id}.bin`);
    expect((await fetch(`${server.url}/api/recordings/${id}`, { method: 'DELETE' })).status).toBe(204);
    for (const folder of ['recordings', 'profiles']) {
      expect((await filesIn(folder)).filter((name) => name.startsWith(id))).toEqual([]);
    }
    for (const path of [
      `recordings/${id}`,
      `recordings/${id}/raw`,
      `runs/${runs[0]!.id}`,
      `runs/${runs[0]!.id}/profile`,
    ]) {
      expect((await faultOf(`${server.url}/api/${path}`, 404)).code).toBe('http/not-found');
    }
    await faultOf(`${server.url}/api/recordings/${id}`, 404, { method: 'DELETE' });
  });
});
