import { readFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { Catalogue, RegisterUpload } from '../../shared/schema/api.ts';
import { CantRegister } from '../../shared/schema/cant-register.ts';
import { LimitSet } from '../../shared/schema/limit-set.ts';
import { SetupRef } from '../../shared/schema/setup.ts';
import { Vehicle } from '../../shared/schema/vehicle.ts';
import { ROOT } from '../support/shared.ts';
import { call, faultOf, jsonBody, makeFolder, removeFolders, startServer, type TestServer } from '../support/server.ts';

let folder: string;
let server: TestServer;
beforeAll(async () => {
  folder = await makeFolder();
  server = await startServer(folder);
});
afterAll(async () => {
  await server.end();
  await removeFolders();
});

const catalogue = () => call(Catalogue, `${server.url}/api/catalogue`);

describe('limit sets and vehicles', () => {
  it('that come with the program are listed and cannot be changed, only copied', async () => {
    const { limitSets, vehicles } = await catalogue();
    expect(limitSets.length).toBeGreaterThanOrEqual(5);
    expect([...limitSets, ...vehicles].every(({ builtIn }) => builtIn)).toBe(true);
    for (const [path, item] of [
      [`limit-sets/${limitSets[0]!.id}`, limitSets[0]],
      [`vehicles/${vehicles[0]!.id}`, vehicles[0]],
    ] as const) {
      for (const init of [jsonBody('PUT', item), { method: 'DELETE' }]) {
        const fault = await faultOf(`${server.url}/api/${path}`, 409, init);
        expect(fault.remedy).toContain('Copy');
      }
    }
  });

  it('of the user are kept, survive a restart, are used by a setup and can be deleted', async () => {
    const { limitSets, vehicles, setup } = await catalogue();
    const set = LimitSet.parse({ ...limitSets.find(({ id }) => id === 'operator-blank'), id: 'ours', name: 'Ours' });
    const vehicle = Vehicle.parse({ ...vehicles.find(({ mode }) => mode === 'rail'), id: 'unit-7', name: 'Unit 7' });
    await call(LimitSet, `${server.url}/api/limit-sets/ours`, jsonBody('PUT', set));
    await call(Vehicle, `${server.url}/api/vehicles/unit-7`, jsonBody('PUT', vehicle));
    const ours = { ...setup, mode: 'rail', limitSetId: 'ours', vehicleId: 'unit-7' };
    await call(SetupRef, `${server.url}/api/setup`, jsonBody('PUT', ours));
    await server.end();
    server = await startServer(folder);
    const after = await catalogue();
    expect(after.limitSets.find(({ id }) => id === 'ours')).toEqual({ ...set, builtIn: false });
    expect(after.vehicles.find(({ id }) => id === 'unit-7')).toEqual({ ...vehicle, builtIn: false });
    expect(after.setup).toMatchObject(ours);
    expect((await fetch(`${server.url}/api/limit-sets/ours`, { method: 'DELETE' })).status).toBe(204);
    await faultOf(`${server.url}/api/limit-sets/ours`, 404, { method: 'DELETE' });
    // A setup that named it falls back to what a new user gets.
    expect((await catalogue()).setup.limitSetId).toBe('conventional-train');
  });

  it('are refused when they do not fit their schema or their address, or contradict themselves', async () => {
    const { limitSets } = await catalogue();
    const set = LimitSet.parse(limitSets[0]);
    expect(
      (await faultOf(`${server.url}/api/limit-sets/a`, 400, jsonBody('PUT', { ...set, id: 'b' }))).cause,
    ).toContain('"b"');
    expect(
      (await faultOf(`${server.url}/api/limit-sets/a`, 400, jsonBody('PUT', { ...set, id: 'a', mode: 'sea' }))).cause,
    ).toContain('mode');
  });
});

describe('cant registers', () => {
  it('are read from CSV, listed, replaced and deleted', async () => {
    const text = readFileSync(`${ROOT}data/cant/example.csv`, 'utf8');
    const init = { method: 'POST', body: text, headers: { 'content-type': 'text/csv' }, expect: 201 };
    const register = await call(RegisterUpload, `${server.url}/api/registers?name=Main%20line`, init);
    expect(register.name).toBe('Main line');
    expect(register.entries.length).toBeGreaterThan(2);
    const plain = CantRegister.parse(register);
    expect((await catalogue()).registers).toEqual([plain]);
    const moved = { ...plain, offsetM: 120 };
    await call(CantRegister, `${server.url}/api/registers/${plain.id}`, jsonBody('PUT', moved));
    expect((await catalogue()).registers).toEqual([moved]);
    expect((await fetch(`${server.url}/api/registers/${plain.id}`, { method: 'DELETE' })).status).toBe(204);
    expect((await catalogue()).registers).toEqual([]);
  });

  it('that are none are refused with the place', async () => {
    const init = { method: 'POST', body: 'hello\nworld\n', headers: { 'content-type': 'text/csv' } };
    const fault = await faultOf(`${server.url}/api/registers?name=x`, 422, init);
    expect(fault.remedy).not.toBe('');
    await faultOf(`${server.url}/api/registers`, 422, { ...init, body: '' });
  });
});
