import { createRequire } from 'node:module';
import { Worker } from 'node:worker_threads';

/** A track point as gpxparser gives it. */
interface ReferencePoint {
  readonly lat: number;
  readonly lon: number;
  readonly ele: number | null;
  readonly time: string | null;
}

export interface Reference {
  readonly points: ReferencePoint[];
  /** Waypoints with a valid place. */
  readonly waypoints: number;
  readonly routePoints: number;
}

/** Every text read by gpxparser on its own, in a thread because it needs a DOM; null where it fails. */
export async function readByGpxparser(texts: readonly string[]): Promise<(Reference | null)[]> {
  const source = `
    const { parentPort, workerData } = require('node:worker_threads');
    const load = require('node:module').createRequire(workerData.base);
    globalThis.window = new (load('jsdom').JSDOM)('').window;
    const Parser = load('gpxparser');
    parentPort.postMessage(workerData.texts.map((text) => {
      try {
        const gpx = new Parser();
        gpx.parse(text);
        const points = gpx.tracks.flatMap((track) => track.points).map(({ lat, lon, ele, time }) => ({
          lat, lon, ele, time: time === null || Number.isNaN(time.getTime()) ? null : time.toISOString() }));
        const placed = ({ lat, lon }) => Number.isFinite(lat) && Number.isFinite(lon);
        const routePoints = gpx.routes.flatMap((route) => route.points).filter(placed).length;
        return { points, waypoints: gpx.waypoints.filter(placed).length, routePoints };
      } catch { return null; }
    }));`;
  const base = createRequire(import.meta.url).resolve('saxes');
  return await new Promise((resolve, reject) => {
    const worker = new Worker(source, { eval: true, workerData: { base, texts } });
    worker.once('message', resolve);
    worker.once('error', reject);
  });
}
