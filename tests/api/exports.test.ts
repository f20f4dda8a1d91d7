import { spawnSync } from 'node:child_process';
import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { parse } from 'csv-parse/sync';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { AssessmentBody, Job, ProfileWindow, RunDetail } from '../../shared/schema/api.ts';
import { CURVE_COLUMNS } from '../../shared/schema/curve-row.ts';
import { roundRow } from '../../shared/schema/curve-columns.ts';
import { demoFile, smallCsv } from '../support/recordings.ts';
import { readZip } from '../support/zip.ts';
import {
  BUILD,
  call,
  jsonBody,
  makeFolder,
  removeFolders,
  settled,
  startServer,
  upload,
  type TestServer,
} from '../support/server.ts';

const FILE = 'rail-tracker-2025-04-02.csv';
let server: TestServer;
let id: string;
beforeAll(async () => {
  server = await startServer(await makeFolder());
  id = (await settled(server, (await upload(server, [demoFile(FILE)])).recordings[0]!.id)).runs[0]!.id;
});
afterAll(async () => {
  await server.end();
  await removeFolders();
});

const get = (path: string) => fetch(`${server.url}/api/runs/${id}/${path}`);
type Cells = Record<string, string>;
const rowsOf = (csv: string) => parse<Cells>(csv, { columns: true, bom: true });

/** Rows of the table without the name of the run and the free text. */
const figures = (rows: Cells[]) =>
  rows.map((row) => CURVE_COLUMNS.filter((key) => key !== 'run' && key !== 'notes').map((key) => row[key]));

describe('exports', () => {
  it('the table in CSV, JSON, GeoJSON and XLSX gives the figures of the assessment', async () => {
    const assessment = await call(AssessmentBody, `${server.url}/api/runs/${id}/assessment`);
    const rows = assessment.curves.map(({ row }) => roundRow(row));
    expect(rows.length).toBeGreaterThan(10);
    const csv = rowsOf(await (await get('table.csv')).text());
    expect(csv).toHaveLength(rows.length);
    const json = (await (await get('table.json')).json()) as { curves: Record<string, unknown>[] };
    const geo = (await (await get('table.geojson')).json()) as { features: { properties: Record<string, unknown> }[] };
    rows.forEach((row, i) => {
      for (const key of CURVE_COLUMNS) {
        const value = row[key];
        if (key === 'notes') continue;
        expect(csv[i]![key], `CSV ${key}`).toBe(value === null ? '' : String(value));
        expect(geo.features[i]!.properties[key], `GeoJSON ${key}`).toEqual(value);
      }
    });
    expect(JSON.stringify(json)).toContain(String(rows[0]!.radius_m));
    const xlsx = await readZip(Buffer.from(await (await get('table.xlsx')).arrayBuffer()));
    const sheet = [...xlsx].find(([name]) => /sheet1\.xml$/.test(name))![1];
    for (const { radius_m } of rows) expect(sheet).toContain(`<v>${String(radius_m)}</v>`);
  });

  it('the command line gives the same figures for the same file', async () => {
    const folder = await makeFolder();
    const path = join(folder, FILE);
    writeFileSync(path, demoFile(FILE).content);
    const out = join(folder, 'table.csv');
    const profile = join(folder, 'profile.csv');
    const script = `import(${JSON.stringify(join(BUILD, 'server/cli.js'))}).then((m) => m.runCli(process.argv.slice(1))).then((code) => { process.exitCode = code; })`;
    const run = spawnSync(process.execPath, ['-e', script, '--', 'assess', path, '--out', out, '--profile', profile], {
      encoding: 'utf8',
    });
    expect({ status: run.status, stderr: run.stderr }).toEqual({ status: 0, stderr: '' });
    expect(figures(rowsOf(readFileSync(out, 'utf8')))).toEqual(figures(rowsOf(await (await get('table.csv')).text())));
    const drop = (cells: Cells) => ({ ...cells, caution: '' });
    expect(rowsOf(readFileSync(profile, 'utf8')).map(drop)).toEqual(
      rowsOf(await (await get('profile.csv')).text()).map(drop),
    );
  });

  it('come as attachments with their type', async () => {
    for (const [path, type] of [
      ['table.csv', 'text/csv'],
      ['table.json', 'application/json'],
      ['table.geojson', 'application/geo+json'],
      ['table.xlsx', 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet'],
      ['profile.csv', 'text/csv'],
      ['report.pdf', 'application/pdf'],
      ['report.html', 'text/html'],
    ] as const) {
      const response = await get(path);
      expect({ path, status: response.status }).toEqual({ path, status: 200 });
      expect(response.headers.get('content-type')).toContain(type);
      expect(response.headers.get('content-disposition')).toMatch(/^attachment; filename=/);
      const bytes = Buffer.from(await response.arrayBuffer());
      expect(bytes.length).toBeGreaterThan(500);
      if (path === 'report.pdf') expect(bytes.toString('latin1', 0, 5)).toBe('%PDF-');
    }
  });
});

describe('profile by window', () => {
  const window = (query: string) => call(ProfileWindow, `${server.url}/api/runs/${id}/profile?${query}`);

  it('whole when it fits, with the columns of the CSV', async () => {
    const whole = await window('points=20000');
    const csv = rowsOf(await (await get('profile.csv')).text());
    expect(whole.columns.s_m).toHaveLength(csv.length);
    expect(whole.stepM).toBeCloseTo(5, 6);
    for (const name of Object.keys(csv[0]!)) if (name !== 'caution') expect(Object.keys(whole.columns)).toContain(name);
  });

  it('thinned, keeps the worst utilisation, the tightest curvature and the top speed', async () => {
    const whole = await window('points=20000');
    const thin = await window('points=100');
    expect(thin.columns.s_m!.length).toBeLessThanOrEqual(102);
    expect(thin.columns.s_m).toEqual([...thin.columns.s_m!].sort((a, b) => a! - b!));
    const most = (values: (number | null)[]) => Math.max(...values.map((v) => Math.abs(v ?? 0)));
    for (const name of ['utilisation', 'curvature_1_m', 'speed_ms']) {
      expect(most(thin.columns[name]!), name).toBe(most(whole.columns[name]!));
    }
  });

  it('of a stretch covers it and little more', async () => {
    const { columns, fromM, toM } = await window('from=2000&to=3000');
    const s = columns.s_m as number[];
    expect([fromM, toM]).toEqual([2000, 3000]);
    expect(s[0]).toBeGreaterThan(1990);
    expect(s[0]).toBeLessThanOrEqual(2000);
    expect(s.at(-1)).toBeGreaterThanOrEqual(3000);
    expect(s.at(-1)).toBeLessThan(3010);
    expect((await window('from=1e9&to=2e9')).columns.s_m!.length).toBeLessThanOrEqual(1);
  });

  it('is that of the latest analysis', async () => {
    const content = smallCsv(5);
    const { id: recording } = (await upload(server, [{ name: 'twice.csv', content }])).recordings[0]!;
    const run = (await settled(server, recording)).runs[0]!.id;
    const profile = () => call(ProfileWindow, `${server.url}/api/runs/${run}/profile`);
    const before = await profile();
    // The speed said to be in km/h is no longer the speed of the positions.
    const columns = { speed: { header: 'speed_ms', unit: 'km/h' } };
    await call(Job, `${server.url}/api/recordings/${recording}/columns`, jsonBody('PUT', columns));
    await settled(server, recording);
    expect((await profile()).columns.speed_sd_ms).not.toEqual(before.columns.speed_sd_ms);
  });

  it('refuses a window that is none', async () => {
    for (const query of ['points=1', 'points=x', 'from=abc']) expect((await get(`profile?${query}`)).status).toBe(400);
  });
});

it('the detail of a run carries what its page needs', async () => {
  const detail = await call(RunDetail, `${server.url}/api/runs/${id}`);
  expect(detail.passages.passages).toHaveLength(detail.summary.curveCount);
  expect(detail.elements[0]!.startM).toBe(0);
  expect(detail.elements.at(-1)!.endM).toBeCloseTo(detail.summary.lengthM, 6);
  expect(detail.quality.fixCount).toBe(detail.summary.fixCount);
});
