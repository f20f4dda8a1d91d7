import { createRequire } from 'node:module';
import { createReadStream } from 'node:fs';
import { mkdtemp, rm, stat, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { spawnSync } from 'node:child_process';
import { SaxesParser } from 'saxes';
import { ingestFile } from '../../server/ingest/index.ts';

/** A fix of an invented run, from its number: east along a gentle weave at 20 m/s, 1 Hz. */
function fixAt(i: number): { utc: Date; lat: number; lon: number; ele: number; speed: number; course: number } {
  return {
    utc: new Date(1_700_000_000_000 + 1000 * i),
    lat: 10 + 0.002 * Math.sin(i / 300),
    lon: -20 + i * 1.7e-4,
    ele: 100 + 20 * Math.sin(i / 500),
    speed: 20 + 2 * Math.sin(i / 60),
    course: 90 - 40 * Math.cos(i / 300),
  };
}

const iso = (utc: Date) => utc.toISOString().replace('.000', '');

export function gpxText(points: number): string {
  const parts = [
    '<?xml version="1.0" encoding="UTF-8"?>\n<gpx version="1.0" creator="bench"><trk><name>Bench</name><trkseg>\n',
  ];
  for (let i = 0; i < points; i++) {
    const { utc, lat, lon, ele, speed } = fixAt(i);
    parts.push(
      `<trkpt lat="${lat.toFixed(8)}" lon="${lon.toFixed(8)}"><ele>${ele.toFixed(1)}</ele><time>${iso(utc)}</time><speed>${speed.toFixed(2)}</speed></trkpt>\n`,
    );
  }
  parts.push('</trkseg></trk></gpx>\n');
  return parts.join('');
}

export function csvText(points: number): string {
  const parts = ['time,latitude,longitude,elevation (m),speed (km/h),course (deg),satellites\n'];
  for (let i = 0; i < points; i++) {
    const { utc, lat, lon, ele, speed, course } = fixAt(i);
    parts.push(
      `${iso(utc)},${lat.toFixed(7)},${lon.toFixed(7)},${ele.toFixed(1)},${(3.6 * speed).toFixed(2)},${course.toFixed(1)},9\n`,
    );
  }
  return parts.join('');
}

function sentence(body: string): string {
  let sum = 0;
  for (let i = 0; i < body.length; i++) sum ^= body.charCodeAt(i);
  return `$${body}*${sum.toString(16).toUpperCase().padStart(2, '0')}\r\n`;
}

function angle(degrees: number, width: number): string {
  // Rounded before it is split, so that no minute reads 60.
  const minutes = Math.round(Math.abs(degrees) * 60e5) / 1e5;
  const whole = Math.floor(minutes / 60);
  return `${String(whole).padStart(width, '0')}${(minutes - 60 * whole).toFixed(5).padStart(8, '0')}`;
}

export function nmeaText(points: number): string {
  const parts: string[] = [];
  for (let i = 0; i < points; i++) {
    const { utc, lat, lon, ele, speed, course } = fixAt(i);
    const text = utc.toISOString();
    const tod = `${text.slice(11, 13)}${text.slice(14, 16)}${text.slice(17, 19)}.00`;
    const place = `${angle(lat, 2)},${lat < 0 ? 'S' : 'N'},${angle(lon, 3)},${lon < 0 ? 'W' : 'E'}`;
    const date = `${text.slice(8, 10)}${text.slice(5, 7)}${text.slice(2, 4)}`;
    parts.push(
      sentence(`GPRMC,${tod},A,${place},${((speed * 3600) / 1852).toFixed(3)},${course.toFixed(2)},${date},,,A`),
    );
    parts.push(sentence(`GPGGA,${tod},${place},1,09,0.9,${ele.toFixed(1)},M,45.0,M,,`));
    parts.push(
      sentence(
        `GPVTG,${course.toFixed(2)},T,,M,${((speed * 3600) / 1852).toFixed(3)},N,${(3.6 * speed).toFixed(3)},K,A`,
      ),
    );
  }
  return parts.join('');
}

const megabytes = (bytes: number, ms: number) => bytes / 1e6 / (ms / 1000);

/** Processor time of the best of three, ms: unlike the time of the clock it does not count what others do meanwhile. */
async function best(run: () => Promise<void>): Promise<number> {
  let least = Infinity;
  for (let i = 0; i < 3; i++) {
    const start = process.cpuUsage();
    await run();
    const { user, system } = process.cpuUsage(start);
    least = Math.min(least, (user + system) / 1000);
  }
  return least;
}

let sink = 0;

/** The same XML parser with handlers that only count. */
async function bareXml(path: string): Promise<void> {
  const parser = new SaxesParser({ xmlns: false });
  parser.on('opentag', () => (sink += 1));
  parser.on('closetag', () => (sink += 1));
  parser.on('text', (text) => (sink += text.length));
  const decoder = new TextDecoder('utf-8', { fatal: true });
  for await (const chunk of createReadStream(path, { highWaterMark: 1 << 18 }) as AsyncIterable<Buffer>) {
    parser.write(decoder.decode(chunk, { stream: true }));
  }
  parser.close();
}

/** Text cut into lines, and nothing done with them. */
async function bareLines(path: string): Promise<void> {
  const decoder = new TextDecoder('utf-8', { fatal: true });
  let carry = '';
  for await (const chunk of createReadStream(path, { highWaterMark: 1 << 18 }) as AsyncIterable<Buffer>) {
    const lines = (carry + decoder.decode(chunk, { stream: true })).split('\n');
    carry = lines.pop() ?? '';
    for (const line of lines) sink += line.length;
  }
}

async function ingest(path: string): Promise<void> {
  const { recordings, refused } = await ingestFile(path, { name: path });
  if (refused.length > 0) throw new Error(refused[0]!.fault.cause);
  sink += recordings[0]!.fixes.count;
}

/** MB/s of gpxparser on a file that it can manage, in a process of its own. */
function gpxparserRate(path: string): number {
  const require = createRequire(import.meta.url);
  const code = `
    const { JSDOM } = require(${JSON.stringify(require.resolve('jsdom'))});
    globalThis.window = new JSDOM('').window;
    const Parser = require(${JSON.stringify(require.resolve('gpxparser'))});
    const text = require('node:fs').readFileSync(${JSON.stringify(path)}, 'utf8');
    const start = process.cpuUsage();
    new Parser().parse(text);
    const { user, system } = process.cpuUsage(start);
    console.log(text.length / (user + system));`;
  const { stdout, stderr } = spawnSync(process.execPath, ['-e', code], { encoding: 'utf8' });
  if (stdout === '') throw new Error(`gpxparser failed: ${stderr.slice(0, 500)}`);
  return Number(stdout);
}

/**
 * Reading speed of GPX, NMEA and CSV against the bare parser and the bare line splitter of the same run, and of
 * gpxparser on a small file; peak memory per fix. Prints a table.
 */
export async function benchIngest(points = 300_000): Promise<void> {
  const folder = await mkdtemp(join(tmpdir(), 'bendbook-bench-'));
  try {
    const files = {
      gpx: join(folder, 'bench.gpx'),
      small: join(folder, 'small.gpx'),
      nmea: join(folder, 'bench.nmea'),
      csv: join(folder, 'bench.csv'),
    };
    await writeFile(files.gpx, gpxText(points));
    await writeFile(files.small, gpxText(2500));
    await writeFile(files.nmea, nmeaText(points));
    await writeFile(files.csv, csvText(points));
    const rows: Record<string, string | number>[] = [];
    const rate = async (path: string, run: (path: string) => Promise<void>) => {
      const { size } = await stat(path);
      return megabytes(size, await best(() => run(path)));
    };
    for (const [format, path, bare, name] of [
      ['GPX', files.gpx, bareXml, 'XML events'],
      ['NMEA', files.nmea, bareLines, 'lines'],
      ['CSV', files.csv, bareLines, 'lines'],
    ] as const) {
      const base = await rate(path, bare);
      const ours = await rate(path, ingest);
      rows.push({
        format,
        points,
        'MB/s': ours.toFixed(1),
        against: name,
        'its MB/s': base.toFixed(1),
        ratio: (ours / base).toFixed(2),
      });
    }
    const slow = gpxparserRate(files.small);
    const gpx = Number(rows[0]!['MB/s']);
    rows.push({
      format: 'GPX',
      points: 2500,
      'MB/s': gpx,
      against: 'gpxparser',
      'its MB/s': slow.toFixed(2),
      ratio: (gpx / slow).toFixed(0),
    });
    console.table(rows);
    const before = process.memoryUsage.rss();
    await ingest(files.csv);
    const grown = Math.max(0, process.memoryUsage.rss() - before);
    console.log(
      `peak so far ${(process.resourceUsage().maxRSS / 1024).toFixed(0)} MB; one more CSV of ${points} fixes grew the process by ${(grown / points).toFixed(0)} bytes a fix (sink ${sink})`,
    );
  } finally {
    await rm(folder, { recursive: true });
  }
}
