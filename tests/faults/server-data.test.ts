import { spawnSync } from 'node:child_process';
import {
  closeSync,
  existsSync,
  openSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
  writeSync,
} from 'node:fs';
import { mkdir } from 'node:fs/promises';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { RecordingSummary } from '../../shared/schema/api.ts';
import { demoFile, smallCsv } from '../support/recordings.ts';
import {
  call,
  faultOf,
  makeFolder,
  multipart,
  removeFolders,
  settled,
  startServer,
  upload,
  type TestServer,
} from '../support/server.ts';

afterAll(removeFolders);

const DATABASE = 'bendbook.sqlite';
const listOf = (server: TestServer) => call(z.array(RecordingSummary), `${server.url}/api/recordings`);
const rawOf = async (server: TestServer, id: string) =>
  Buffer.from(await (await fetch(`${server.url}/api/recordings/${id}/raw`)).arrayBuffer()).toString();

/** A data folder with two analysed recordings; the server is ended. */
async function filledFolder(): Promise<{ folder: string; recordings: RecordingSummary[] }> {
  const folder = await makeFolder();
  const server = await startServer(folder);
  const files = [1, 2].map((seed) => ({ name: `log-${String(seed)}.csv`, content: smallCsv(seed) }));
  const recordings: RecordingSummary[] = [];
  for (const { id } of (await upload(server, files)).recordings) recordings.push(await settled(server, id));
  await server.end();
  return { folder, recordings };
}

describe('a damaged database', () => {
  it.each([
    ['overwritten at its beginning', (path: string) => overwrite(path, 0, 512)],
    ['overwritten in its middle', (path: string) => overwrite(path, 8192, statSync(path).size - 8192)],
    [
      'that is another file',
      (path: string) => writeFileSync(path, 'not a database at all, but some text\n'.repeat(200)),
    ],
    ['cut off', (path: string) => writeFileSync(path, readFileSync(path).subarray(0, statSync(path).size / 2))],
  ])('%s is told with its remedy; the recordings are recovered whole and analysed anew', async (_how, damage) => {
    const { folder, recordings } = await filledFolder();
    damage(join(folder, DATABASE));
    const told = await startServer(folder).then(
      () => 'it started',
      (error: unknown) => String(error),
    );
    expect(told).toContain('the database is damaged');
    expect(told).toContain(DATABASE);
    expect(told).toContain('--recover');
    expect(told).not.toMatch(/\n\s+at /);
    const server = await startServer(folder, ['--recover']);
    const list = await listOf(server);
    expect(list.map(({ id, name, sha256 }) => ({ id, name, sha256 }))).toEqual(
      recordings.map(({ id, name, sha256 }) => ({ id, name, sha256 })),
    );
    for (const { id, name, runs } of recordings) {
      const again = await settled(server, id);
      expect(again.state).toBe('ready');
      expect(again.runs.map(({ curveCount, lengthM }) => ({ curveCount, lengthM }))).toEqual(
        runs.map(({ curveCount, lengthM }) => ({ curveCount, lengthM })),
      );
      expect(await rawOf(server, id)).toBe(smallCsv(Number(/\d/.exec(name)![0])));
    }
    await server.end();
    expect(readdirSync(folder).some((name) => name.startsWith(`${DATABASE}.damaged-`))).toBe(true);
  });

  it('a database that was moved away is made anew from the recordings', async () => {
    const { folder, recordings } = await filledFolder();
    for (const name of readdirSync(folder)) if (name.startsWith(DATABASE)) rmSync(join(folder, name));
    const server = await startServer(folder);
    expect((await listOf(server)).map(({ id }) => id)).toEqual(recordings.map(({ id }) => id));
    for (const { id } of recordings) expect((await settled(server, id)).state).toBe('ready');
    await server.end();
  });
});

describe('a data folder', () => {
  it('with a damaged description of a recording still lists it whole', async () => {
    const { folder, recordings } = await filledFolder();
    const { id, sha256 } = recordings[0]!;
    writeFileSync(join(folder, 'recordings', `${id}.json`), '{"id":');
    for (const name of readdirSync(folder)) if (name.startsWith(DATABASE)) rmSync(join(folder, name));
    const server = await startServer(folder);
    expect((await listOf(server)).find((recording) => recording.id === id)).toMatchObject({ name: id, sha256 });
    await server.end();
  });

  it('from which a raw file was taken keeps the results and says so', async () => {
    const { folder, recordings } = await filledFolder();
    const { id, runs } = recordings[0]!;
    rmSync(join(folder, 'recordings', `${id}.raw`));
    const server = await startServer(folder);
    expect((await listOf(server)).find((recording) => recording.id === id)).toMatchObject({
      state: 'ready',
      fault: { code: 'store/raw-missing' },
      runs: [{ id: runs[0]!.id }],
    });
    await faultOf(`${server.url}/api/recordings/${id}/raw`, 404);
    await server.end();
  });

  it('in use by one server is refused to a second', async () => {
    const folder = await makeFolder();
    const first = await startServer(folder);
    await expect(startServer(folder)).rejects.toThrow('another Bendbook is using this data folder');
    await first.end('SIGKILL');
    const third = await startServer(folder);
    await third.end();
  });

  it('half-made files are swept at the start', async () => {
    const { folder, recordings } = await filledFolder();
    const half = [
      'incoming/half',
      'recordings/abc.raw',
      'recordings/abc.json.new',
      'profiles/abc.1.bin',
      'profiles/abc.1.bin.new',
    ];
    for (const path of half) writeFileSync(join(folder, path), 'half');
    const server = await startServer(folder);
    for (const path of half) expect(existsSync(join(folder, path)), path).toBe(false);
    expect((await listOf(server)).map(({ id }) => id)).toEqual(recordings.map(({ id }) => id));
    await server.end();
  });

  it('that cannot be made is told', async () => {
    const folder = await makeFolder();
    writeFileSync(join(folder, 'file'), '');
    await expect(startServer(join(folder, 'file', 'data'))).rejects.toThrow('the data folder cannot be made');
  });
});

describe('a full disk', () => {
  it('refuses what does not fit, keeps what was acknowledged, and goes on when there is room', async ({ skip }) => {
    const folder = join(await makeFolder(), 'small');
    await mkdir(folder);
    const mounted = spawnSync('mount', ['-t', 'tmpfs', '-o', 'size=28m', 'tmpfs', folder]);
    if (mounted.status !== 0) skip('a small file system can be mounted by root on Linux only');
    try {
      const server = await startServer(folder);
      const kept: RecordingSummary[] = [];
      for (let seed = 0; seed < 3; seed++) {
        kept.push(
          (await upload(server, [{ name: `log-${String(seed)}.csv`, content: smallCsv(seed) }])).recordings[0]!,
        );
      }
      for (const { id } of kept) expect((await settled(server, id)).state).toBe('ready');
      const post = (content: Uint8Array<ArrayBuffer>) =>
        faultOf(`${server.url}/api/recordings`, 507, {
          method: 'POST',
          body: multipart([{ name: 'big.gpx', content }]),
        });
      // Told before a byte is sent, from the length announced.
      expect((await post(new Uint8Array(30e6))).code).toBe('store/disk-full');
      // Length not announced: found when the disk is full.
      const fault = await faultOf(`${server.url}/api/recordings`, 507, {
        method: 'POST',
        headers: { 'content-type': 'multipart/form-data; boundary=b' },
        body: unannounced(40),
        duplex: 'half',
      } as RequestInit);
      expect(fault.code).toBe('store/disk-full');
      expect(fault.remedy).toContain('Free some space');
      expect(readdirSync(join(folder, 'incoming'))).toEqual([]);
      // Filled to the last byte by something else: results cannot be kept, and that is told too.
      fill(join(folder, 'ballast'));
      expect((await post(new Uint8Array(demoFile('rail-return-2025-04-02.gpx').content))).code).toBe('store/disk-full');
      expect((await listOf(server)).map(({ id }) => id)).toEqual(kept.map(({ id }) => id));
      rmSync(join(folder, 'ballast'));
      const { id } = (await upload(server, [{ name: 'after.csv', content: smallCsv(9) }])).recordings[0]!;
      expect((await settled(server, id)).state).toBe('ready');
      await server.end('SIGKILL');
      const again = await startServer(folder);
      expect((await listOf(again)).map((recording) => recording.id)).toEqual([
        ...kept.map((recording) => recording.id),
        id,
      ]);
      await again.end();
    } finally {
      spawnSync('umount', ['-l', folder]);
    }
  });
});

function overwrite(path: string, offset: number, length: number): void {
  const file = openSync(path, 'r+');
  writeSync(file, Buffer.alloc(length, 0x5a), 0, length, offset);
  closeSync(file);
}

/** A multipart body of so many megabytes whose length is not announced. */
function unannounced(megabytes: number): ReadableStream<Uint8Array> {
  let left = megabytes;
  return new ReadableStream({
    start: (controller) =>
      controller.enqueue(Buffer.from('--b\r\nContent-Disposition: form-data; name="file"; filename="long"\r\n\r\n')),
    pull(controller) {
      controller.enqueue(new Uint8Array(1_000_000).fill(0x20));
      if (--left > 0) return;
      controller.enqueue(Buffer.from('\r\n--b--\r\n'));
      controller.close();
    },
  });
}

/** Writes until the file system is full. */
function fill(path: string): void {
  const file = openSync(path, 'w');
  for (const size of [1 << 20, 1 << 12]) {
    try {
      for (;;) writeSync(file, Buffer.alloc(size));
    } catch (error) {
      if ((error as { code?: string }).code !== 'ENOSPC') throw error;
    }
  }
  closeSync(file);
}
