import { spawnSync } from 'node:child_process';
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { parse } from 'csv-parse/sync';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { CURVE_COLUMNS } from '../../shared/schema/curve-row.ts';
import { demoFile, smallCsv } from '../support/recordings.ts';
import { ROOT } from '../support/shared.ts';
import { BUILD, makeFolder, removeFolders } from '../support/server.ts';

let folder: string;
beforeAll(async () => {
  folder = await makeFolder();
  writeFileSync(join(folder, 'log.csv'), smallCsv(1));
  writeFileSync(join(folder, 'letter.txt'), 'Dear colleague,\n\nplease find the log attached.\n');
  writeFileSync(join(folder, 'empty.gpx'), '');
  writeFileSync(join(folder, 'unnamed.csv'), smallCsv(2).replace('time,lat,lon,speed_ms,course', 'a,b,c,d,e'));
  writeFileSync(join(folder, 'cab.nmea'), demoFile('rail-cab-2025-03-11.nmea').content);
});
afterAll(removeFolders);

const SCRIPT = `import(${JSON.stringify(join(BUILD, 'server/cli.js'))}).then((m) => m.runCli(process.argv.slice(1))).then((code) => { process.exitCode = code; })`;
function bendbook(...args: string[]) {
  const { status, stdout, stderr } = spawnSync(process.execPath, ['-e', SCRIPT, '--', ...args], { cwd: folder });
  return { status, stdout: stdout.toString(), stderr: stderr.toString(), bytes: stdout };
}
const rowsOf = (csv: string) => parse<Record<string, string>>(csv, { columns: true, bom: true });

describe('bendbook assess', () => {
  it('writes the table of a recording on standard output, status 0', () => {
    const { status, stdout, stderr } = bendbook('assess', 'log.csv');
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' });
    const rows = rowsOf(stdout);
    expect(Object.keys(rows[0]!).slice(0, CURVE_COLUMNS.length)).toEqual(CURVE_COLUMNS);
    // The log turns 60 degrees to the left on 300 m.
    expect(rows).toMatchObject([{ run: 'log.csv', curve: '1', hand: 'left' }]);
    expect(Number(rows[0]!.radius_low_m)).toBeLessThan(300);
    expect(Number(rows[0]!.radius_high_m)).toBeGreaterThan(300);
    expect(Number(rows[0]!.deflection_deg)).toBeCloseTo(60, -1);
  });

  it('puts several recordings in one table and one that cannot be used on standard error, status 1', () => {
    const { status, stdout, stderr } = bendbook(
      'assess',
      'log.csv',
      'letter.txt',
      'empty.gpx',
      'absent.gpx',
      'cab.nmea',
    );
    expect(status).toBe(1);
    expect(new Set(rowsOf(stdout).map(({ run }) => run))).toEqual(new Set(['log.csv', 'cab.nmea']));
    const lines = stderr.trim().split('\n');
    expect(lines.map((line) => /^[\w.]+/.exec(line)![0])).toEqual(['letter.txt', 'empty.gpx', 'absent.gpx']);
    expect(stderr).not.toMatch(/\bat .*:\d+:\d+/);
  });

  it('with nothing usable gives no table, status 1', () => {
    const { status, stdout, stderr } = bendbook('assess', 'letter.txt');
    expect({ status, stdout }).toEqual({ status: 1, stdout: '' });
    expect(stderr).toContain('letter.txt');
  });

  it('writes every format, to a file or to a pipe', () => {
    expect(JSON.parse(bendbook('assess', 'log.csv', '--format', 'json').stdout)).toBeTypeOf('object');
    expect(JSON.parse(bendbook('assess', 'log.csv', '--format', 'geojson').stdout)).toMatchObject({
      type: 'FeatureCollection',
    });
    expect(bendbook('assess', 'log.csv', '--format', 'xlsx').bytes.subarray(0, 2).toString()).toBe('PK');
    expect(bendbook('assess', 'log.csv', '--format', 'pdf', '--out', 'r.pdf').status).toBe(0);
    expect(readFileSync(join(folder, 'r.pdf'), 'latin1').slice(0, 5)).toBe('%PDF-');
  });

  it('takes columns by hand', () => {
    const without = bendbook('assess', 'unnamed.csv');
    expect(without.status).toBe(1);
    expect(without.stderr).toContain('"a", "b", "c"');
    const columns = ['time=a', 'latitude=b', 'longitude=c', 'speed=d:m/s'].flatMap((text) => ['--column', text]);
    const named = bendbook('assess', 'unnamed.csv', ...columns);
    expect({ status: named.status, stderr: named.stderr }).toEqual({ status: 0, stderr: '' });
    expect(rowsOf(named.stdout)).toHaveLength(1);
  });

  it('writes the profile at the spacing asked for; of several runs one file each', () => {
    expect(bendbook('assess', 'log.csv', '--profile', 'p.csv', '--spacing', '20', '--out', 't.csv').status).toBe(0);
    const steps = rowsOf(readFileSync(join(folder, 'p.csv'), 'utf8')).map(({ s_m }) => Number(s_m));
    expect(steps[1]! - steps[0]!).toBe(20);
    expect(bendbook('assess', 'log.csv', 'cab.nmea', '--profile', 'q.csv', '--out', 't.csv').status).toBe(0);
    expect(['q.csv', 'q-1.csv', 'q-2.csv'].map((name) => existsSync(join(folder, name)))).toEqual([false, true, true]);
  });

  it('takes mode, limits, vehicle and cant by name or file', () => {
    const road = bendbook('assess', 'log.csv', '--mode', 'road', '--assume-cant', '2.5');
    expect(rowsOf(road.stdout)).toMatchObject([{ superelevation_pct: '2.5', cant_source: 'assumed', cant_mm: '' }]);
    expect(rowsOf(road.stdout)[0]!.side_friction).not.toBe('');
    const limits = readFileSync(join(ROOT, 'data/limits/tram-metro.json'), 'utf8');
    mkdirSync(join(folder, 'own'));
    writeFileSync(join(folder, 'own/limits.json'), limits);
    const named = bendbook('assess', 'log.csv', '--limits', 'tram-metro', '--vehicle', 'tram');
    expect(named.status).toBe(0);
    expect(bendbook('assess', 'log.csv', '--limits', 'own/limits.json', '--vehicle', 'tram').stdout).toBe(named.stdout);
    writeFileSync(join(folder, 'cant.csv'), 'from_m,to_m,cant_mm\n0,100000,60\n');
    expect(rowsOf(bendbook('assess', 'log.csv', '--cant', 'cant.csv').stdout)).toMatchObject([
      { cant_source: 'registered', cant_mm: '60' },
    ]);
  });

  it.each([
    [['assess']],
    [['fly']],
    [['assess', 'log.csv', '--mode', 'sea']],
    [['assess', 'log.csv', '--format', 'doc']],
    [['assess', 'log.csv', '--limits', 'none']],
    [['assess', 'log.csv', '--limits', 'letter.txt']],
    [['assess', 'log.csv', '--vehicle', 'bus-city']],
    [['assess', 'log.csv', '--cant', 'absent.csv']],
    [['assess', 'log.csv', '--spacing', '0']],
    [['assess', 'log.csv', '--column', 'time']],
    [['assess', 'log.csv', '--unheard-of']],
    [['serve', '--port', 'high']],
    [[]],
  ])('%j is wrong: status 2, nothing on standard output', (args) => {
    const { status, stdout, stderr } = bendbook(...args);
    expect({ status, stdout }).toEqual({ status: 2, stdout: '' });
    expect(stderr).not.toBe('');
    expect(stderr).not.toMatch(/\bat .*:\d+:\d+/);
  });

  it('tells a file that cannot be written, status 1', () => {
    const { status, stderr } = bendbook('assess', 'log.csv', '--out', 'absent/t.csv');
    expect(status).toBe(1);
    expect(stderr).toContain('absent/t.csv');
  });

  it('--help shows the arguments, status 0', () => {
    const { status, stdout } = bendbook('--help');
    expect(status).toBe(0);
    for (const option of [
      '--mode',
      '--limits',
      '--vehicle',
      '--cant',
      '--format',
      '--out',
      '--profile',
      '--spacing',
      '--column',
      '--port',
      '--data',
    ]) {
      expect(stdout).toContain(option);
    }
  });
});
