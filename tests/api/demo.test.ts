import { readFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import {
  AssessmentBody,
  Catalogue,
  LineWire,
  ProfileWindow,
  RecordingSummary,
  RunDetail,
  UploadResult,
} from '../../shared/schema/api.ts';
import type { SetupRef } from '../../shared/schema/setup.ts';
import { SetupRef as SetupRefSchema } from '../../shared/schema/setup.ts';
import { ROOT } from '../support/shared.ts';
import {
  call,
  faultOf,
  jsonBody,
  makeFolder,
  removeFolders,
  settled,
  startServer,
  type TestServer,
} from '../support/server.ts';

let server: TestServer;
let recordings: RecordingSummary[];
beforeAll(async () => {
  server = await startServer(await makeFolder());
  const loaded = await call(UploadResult, `${server.url}/api/demo`, { method: 'POST', expect: 201 });
  recordings = [];
  for (const { id } of loaded.recordings) recordings.push(await settled(server, id));
});
afterAll(async () => {
  await server.end();
  await removeFolders();
});

const manifest = JSON.parse(readFileSync(`${ROOT}data/demo/demo.json`, 'utf8')) as {
  recordings: { file: string; mode: 'rail' | 'road'; title: string }[];
  register: { name: string };
};
const runOf = (mode: 'rail' | 'road') => {
  const { file } = manifest.recordings.find((recording) => recording.mode === mode)!;
  return recordings.find(({ name }) => name === file)!.runs[0]!;
};
const assessmentOf = (id: string) => call(AssessmentBody, `${server.url}/api/runs/${id}/assessment`);
const detailOf = (id: string) => call(RunDetail, `${server.url}/api/runs/${id}`);
const csvOf = async (id: string) => (await fetch(`${server.url}/api/runs/${id}/table.csv`)).text();

describe('demonstration', () => {
  it('lists every recording of its manifest under its title, ready and with curves', () => {
    expect(recordings.map(({ name, title }) => ({ file: name, title }))).toEqual(
      manifest.recordings.map(({ file, title }) => ({ file, title })),
    );
    for (const { state, fault, demo, runs } of recordings) {
      expect({ state, fault, demo, runs: runs.length }).toEqual({ state: 'ready', fault: null, demo: true, runs: 1 });
      expect(runs[0]!.curveCount).toBeGreaterThan(5);
    }
  });

  it('asked for twice is there once', async () => {
    await call(UploadResult, `${server.url}/api/demo`, { method: 'POST', expect: 201 });
    const all = await call(z.array(RecordingSummary), `${server.url}/api/recordings`);
    expect(all).toHaveLength(manifest.recordings.length);
    const { registers } = await call(Catalogue, `${server.url}/api/catalogue`);
    expect(registers.map(({ name }) => name)).toEqual([manifest.register.name]);
  });

  it('judges rail runs with the cant register and the bus by side friction', async () => {
    const rail = await assessmentOf(runOf('rail').id);
    expect(rail.setup).toMatchObject({ mode: 'rail' });
    expect(rail.curves.filter(({ row }) => row.cant_source === 'registered').length).toBeGreaterThan(5);
    expect(rail.curves.some(({ row }) => row.cant_source === 'unknown')).toBe(true);
    expect(rail.curves.some(({ row }) => row.verdict === 'over')).toBe(true);
    const road = await assessmentOf(runOf('road').id);
    expect(road.setup).toMatchObject({ mode: 'road', registerId: null });
    expect(road.curves.every(({ row }) => row.side_friction !== null)).toBe(true);
    for (const { cautions } of [rail, road]) expect(cautions.length).toBeGreaterThan(0);
  });
});

describe('lines', () => {
  it('the four rail runs lie on one line, one of them the other way; the bus has its own', async () => {
    const lines = await call(z.array(LineWire), `${server.url}/api/lines`);
    expect(lines.map(({ members }) => members.length).sort()).toEqual([1, 4]);
    const rail = lines.find(({ members }) => members.length === 4)!;
    const named = new Map(recordings.map(({ name, runs }) => [runs[0]!.id, name]));
    const opposite = rail.members.filter(({ direction }) => direction !== rail.members[0]!.direction);
    const returning = rail.members.length - opposite.length === 1 ? rail.members.slice(0, 1) : opposite;
    expect(returning.map(({ runId }) => named.get(runId))).toEqual(['rail-return-2025-04-02.gpx']);
    // Nearly every curve is seen by all four.
    const seenByAll = rail.curves.filter(({ seen }) => seen.length === 4);
    expect(seenByAll.length).toBeGreaterThan(0.7 * runOf('rail').curveCount);
    for (const { members, id } of lines) {
      for (const { runId } of members) {
        expect((await detailOf(runId)).summary.lineId).toBe(members.length > 1 ? id : null);
      }
    }
  });
});

describe('setup', () => {
  it('judged by another setup without keeping it', async () => {
    const { id } = runOf('rail');
    const before = await assessmentOf(id);
    const other: SetupRef = {
      ...before.setup,
      limitSetId: 'german-practice',
      cantRule: { kind: 'constant', value: 60 },
      registerId: null,
    };
    const tried = await call(AssessmentBody, `${server.url}/api/runs/${id}/assessment`, jsonBody('POST', other));
    expect(tried.setup).toEqual(other);
    expect(tried.curves.every(({ row }) => row.cant_source === 'assumed' && Math.abs(row.cant_mm!) === 60)).toBe(true);
    expect(await assessmentOf(id)).toEqual(before);
  });

  it('kept for one run changes its verdicts, its profile and its exports, and no other run', async () => {
    const { id } = runOf('rail');
    const other = recordings.find(({ runs }) => runs[0]!.id !== id && runs[0]!.id !== runOf('road').id)!.runs[0]!;
    const otherBefore = await csvOf(other.id);
    const { setup: before } = await detailOf(id);
    const csvBefore = await csvOf(id);
    const changed: SetupRef = { ...before, registerId: null, cantRule: { kind: 'constant', value: 100 } };
    expect(await call(SetupRefSchema, `${server.url}/api/setup?run=${id}`, jsonBody('PUT', changed))).toEqual(changed);
    expect((await detailOf(id)).setup).toEqual(changed);
    expect((await assessmentOf(id)).curves.every(({ row }) => Math.abs(row.cant_mm!) === 100)).toBe(true);
    const csvAfter = await csvOf(id);
    expect(csvAfter).not.toBe(csvBefore);
    const window = await call(ProfileWindow, `${server.url}/api/runs/${id}/profile?points=200`);
    expect(Math.max(...window.columns.cant_mm!.map((v) => Math.abs(v ?? 0)))).toBeCloseTo(100, 6);
    expect(await csvOf(other.id)).toBe(otherBefore);
    await call(SetupRefSchema, `${server.url}/api/setup?run=${id}`, jsonBody('PUT', before));
    expect(await csvOf(id)).toBe(csvBefore);
  });

  it('kept for a mode holds for all runs of that mode and leaves the other mode alone', async () => {
    const road = await assessmentOf(runOf('road').id);
    const { setup } = await detailOf(runOf('rail').id);
    const changed: SetupRef = { ...setup, tier: 'exceptional' };
    await call(SetupRefSchema, `${server.url}/api/setup`, jsonBody('PUT', changed));
    for (const { runs } of recordings) {
      const expected = runs[0]!.id === runOf('road').id ? road.setup : changed;
      expect((await detailOf(runs[0]!.id)).setup).toEqual(expected);
    }
    expect((await call(Catalogue, `${server.url}/api/catalogue`)).setup).toEqual(changed);
  });

  it('that names what is not there, or what is for the other mode, is refused with its remedy', async () => {
    const { setup } = await detailOf(runOf('rail').id);
    const put = (body: unknown, status: number) => faultOf(`${server.url}/api/setup`, status, jsonBody('PUT', body));
    expect(await put({ ...setup, limitSetId: 'none' }, 422)).toMatchObject({ code: 'setup/unknown-limit-set' });
    expect(await put({ ...setup, vehicleId: 'bus-city' }, 422)).toMatchObject({ code: 'setup/mode' });
    expect(await put({ ...setup, confidence: 2 }, 400)).toMatchObject({ code: 'http/bad-request' });
    expect((await put({ ...setup, confidence: 2 }, 400)).cause).toContain('confidence');
    await faultOf(`${server.url}/api/setup?run=none`, 404, jsonBody('PUT', setup));
    await faultOf(`${server.url}/api/setup`, 400, { ...jsonBody('PUT', {}), body: '{"mode":' });
  });
});
