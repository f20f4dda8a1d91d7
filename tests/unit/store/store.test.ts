import { readdirSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { openSqlite, closeSqlite } from '../../../server/store/sqlite.ts';
import { Store, type NewRun, type RecordingFacts } from '../../../server/store/store.ts';
import type { Sidecar } from '../../../server/store/raw-files.ts';
import { makeFolder, removeFolders } from '../../support/server.ts';
import { anyProfile } from './any-profile.ts';

afterAll(removeFolders);

async function add(store: Store, id: string, other: Partial<Sidecar> = {}): Promise<void> {
  const temporary = join(store.raw.incoming, id);
  writeFileSync(temporary, `bytes of ${id}`);
  const sidecar: Sidecar = {
    id,
    name: `${id}.csv`,
    title: null,
    bytes: 10,
    sha256: 'sum',
    uploadedUtcS: 0,
    demo: false,
    mode: 'road',
    columns: { time: { header: 'T' } },
    ...other,
  };
  await store.addRecording(temporary, sidecar);
}

const FACTS: RecordingFacts = {
  title: 'Morning',
  format: 'csv',
  encoding: 'utf-8',
  fixCount: 3,
  columns: [],
  findings: [],
  waypoints: [{ name: 'Halt', latDeg: 1, lonDeg: 2 }],
};

/** A run whose numbers include those that JSON has no word for. */
function run(id: string): NewRun {
  return {
    summary: {
      id,
      name: 'Morning',
      startUtcS: 5,
      durationS: 6,
      lengthM: 7,
      fixCount: 3,
      curveCount: 0,
      topSpeedKmh: 8,
      bounds: [1, 2, 3, 4],
    },
    quality: { rateHz: Infinity } as NewRun['quality'],
    findings: [],
    alignment: { lengthM: NaN, elements: [], curves: [] },
    passages: { run: 'Morning', lengthM: -Infinity, durationS: 6, intervalS: 1, hasCourse: false, passages: [] },
    profile: anyProfile(4),
  };
}

describe('store', () => {
  it('keeps recordings, runs, profiles, documents and settings over a restart', async () => {
    const folder = await makeFolder();
    const first = await Store.open(folder);
    await add(first, 'a');
    await first.saveAnalysis('a', FACTS, [run('a.1'), run('a.2')]);
    await first.documents.put('vehicle', 'v', { id: 'v' });
    await first.documents.put('vehicle', 'v', { id: 'v', name: 'again' });
    await first.documents.putSetting('mode', 'road');
    await first.setRecordingSetup('a', { mode: 'rail' });
    const before = await first.recordings();
    await first.close();
    const second = await Store.open(folder);
    expect(await second.recordings()).toEqual(before);
    expect(before[0]).toMatchObject({ title: 'Morning', state: 'ready', runs: [{ id: 'a.1' }, { id: 'a.2' }] });
    expect(await second.run('a.1')).toMatchObject({
      quality: { rateHz: Infinity },
      alignment: { lengthM: NaN },
      passages: { lengthM: -Infinity },
    });
    expect(await second.profile('a.2')).toEqual(anyProfile(4));
    expect(await second.waypoints('a')).toEqual(FACTS.waypoints);
    expect(await second.columnNames('a')).toEqual({ time: { header: 'T' } });
    expect(await second.documents.list('vehicle')).toEqual([{ id: 'v', name: 'again' }]);
    expect(await second.documents.setting('mode')).toBe('road');
    expect(await second.recordingSetup('a')).toEqual({ setup: { mode: 'rail' }, mode: 'road' });
    await second.close();
  });

  it('replaces the runs of an earlier analysis, profiles included', async () => {
    const store = await Store.open(await makeFolder());
    await add(store, 'a');
    await store.saveAnalysis('a', FACTS, [run('a.1'), run('a.2')]);
    await store.saveAnalysis('a', FACTS, [run('a.1')]);
    expect((await store.runs()).map(({ id }) => id)).toEqual(['a.1']);
    await expect(store.profile('a.2')).rejects.toMatchObject({ fault: { code: 'store/result-missing' } });
    await store.close();
  });

  it('a result for a recording deleted meanwhile leaves nothing behind', async () => {
    const store = await Store.open(await makeFolder());
    await add(store, 'a');
    expect(await store.removeRecording('a')).toBe(true);
    await store.saveAnalysis('a', FACTS, [run('a.1')]);
    expect(await store.runs()).toEqual([]);
    await expect(store.profile('a.1')).rejects.toThrow();
    expect(await store.removeRecording('a')).toBe(false);
    await store.close();
  });

  it('a recording that cannot be listed is not kept either', async () => {
    const folder = await makeFolder();
    const store = await Store.open(folder);
    // A broken number of bytes is refused by the strict table, after the file was moved to its place.
    await expect(add(store, 'a', { bytes: 0.5 })).rejects.toThrow(/cannot store REAL value in INTEGER column/);
    expect(readdirSync(join(folder, 'recordings'))).toEqual([]);
    expect(await store.recordings()).toEqual([]);
    await store.close();
  });

  it('jobs go with their recording, the oldest waiting one comes first', async () => {
    const store = await Store.open(await makeFolder());
    await add(store, 'a');
    await add(store, 'b');
    await store.jobs.add('2', 'b', 20);
    await store.jobs.add('1', 'a', 10);
    expect((await store.jobs.nextQueued())!.id).toBe('1');
    await store.jobs.begin('1');
    expect((await store.jobs.nextQueued())!.id).toBe('2');
    expect(await store.jobs.requeueInterrupted(5)).toEqual({ givenUp: [], idle: [] });
    expect((await store.jobs.find('1'))!.state).toBe('queued');
    await store.removeRecording('a');
    expect(await store.jobs.find('1')).toBeNull();
    await store.close();
  });

  it('refuses a database of a later version and leaves its tables as they are', async () => {
    const folder = await makeFolder();
    await (await Store.open(folder)).close();
    const path = join(folder, 'bendbook.sqlite');
    const connection = await openSqlite(path);
    connection.exec('PRAGMA user_version = 999');
    closeSqlite(connection);
    await expect(Store.open(folder)).rejects.toMatchObject({ fault: { code: 'store/newer' } });
    const again = await openSqlite(path);
    expect(again.prepare('PRAGMA user_version').all()).toMatchObject([{ user_version: 999 }]);
    closeSqlite(again);
  });

  it('has the safeguards switched on: WAL, full synchronisation, foreign keys', async () => {
    const connection = await openSqlite(join(await makeFolder(), 'x.sqlite'));
    const pragma = (name: string) =>
      Object.values(connection.prepare(`PRAGMA ${name}`).all()[0] as object)[0] as unknown;
    // Values as the SQLite documentation gives them: synchronous 2 = FULL, foreign_keys 1 = on.
    expect([pragma('journal_mode'), pragma('synchronous'), pragma('foreign_keys')]).toEqual(['wal', 2, 1]);
    expect(pragma('locking_mode')).toBe('exclusive');
    closeSqlite(connection);
  });
});
