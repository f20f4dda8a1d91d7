import { createRequire } from 'node:module';
import type * as workerThreads from 'node:worker_threads';
import { Worker } from 'node:worker_threads';
import type { Waypoint } from '../../shared/model/recording.ts';

/** What stands in a GPX file beside the track points. */
export interface GpxDetails {
  readonly title: string;
  /** Waypoints, then the points of routes in order, named by their route. */
  readonly waypoints: Waypoint[];
}

interface Answer {
  readonly id: number;
  readonly details: GpxDetails | null;
  readonly error: string;
}

/** Longest time the reader of the slim document may take before it is given up, ms. */
const TIMEOUT_MS = 30_000;

/**
 * Body of the worker thread. gpxparser needs a DOM and, loaded on Node, puts some 160 names of one
 * on the global object: nothing else may live in its thread. It is written as one self-contained
 * function, sent to the thread as text, so that it runs alike from sources and from the build.
 * Texts of gpxparser are inner XML: entities are decoded here.
 */
function gpxDetailsWorker(require: NodeJS.Require): void {
  interface Point {
    lat: number;
    lon: number;
    name?: string | null;
  }
  interface Parsed {
    metadata: { name?: string | null };
    waypoints: Point[];
    routes: { name: string | null; points: Point[] }[];
    parse(text: string): void;
  }
  const { parentPort } = require('node:worker_threads') as typeof workerThreads;
  const { JSDOM } = require('jsdom') as { JSDOM: new (html: string) => { window: { document: Document } } };
  interface Document {
    createElement(name: string): { innerHTML: string; value: string };
  }
  const dom = new JSDOM('');
  (globalThis as unknown as { window: unknown }).window = dom.window;
  const GpxParser = require('gpxparser') as new () => Parsed;
  const decoder = dom.window.document.createElement('textarea');
  const plain = (xml: string | null | undefined): string => {
    if (xml === null || xml === undefined) return '';
    decoder.innerHTML = xml.replace(/<!\[CDATA\[([\s\S]*?)\]\]>/g, (_, inner: string) => inner.replace(/&/g, '&amp;'));
    return decoder.value.trim().slice(0, 500);
  };
  parentPort!.on('message', ({ id, xml }: { id: number; xml: string }) => {
    try {
      const gpx = new GpxParser();
      gpx.parse(xml);
      const waypoints = gpx.waypoints.map(({ name, lat, lon }) => ({ name: plain(name), latDeg: lat, lonDeg: lon }));
      for (const route of gpx.routes) {
        const name = plain(route.name);
        route.points.forEach((point, i) => {
          waypoints.push({ name: `${name} ${String(i + 1)}`.trim(), latDeg: point.lat, lonDeg: point.lon });
        });
      }
      parentPort!.postMessage({ id, details: { title: plain(gpx.metadata.name), waypoints }, error: '' });
    } catch (error) {
      parentPort!.postMessage({ id, details: null, error: String(error) });
    }
  });
}

let worker: Worker | null = null;
let nextId = 1;
const waiting = new Map<number, (answer: Answer) => void>();

/** The one warm worker: loading the DOM costs most of a second. It does not keep the process alive. */
function warmWorker(): Worker {
  if (worker !== null) return worker;
  const source = `(${gpxDetailsWorker.toString()})(require('node:module').createRequire(require('node:worker_threads').workerData.base));`;
  const started = new Worker(source, {
    eval: true,
    workerData: { base: createRequire(import.meta.url).resolve('saxes') },
    resourceLimits: { maxOldGenerationSizeMb: 512 },
  });
  started.on('message', (answer: Answer) => waiting.get(answer.id)?.(answer));
  const fail = (reason: string) => {
    if (worker === started) worker = null;
    for (const [id, settle] of waiting) settle({ id, details: null, error: reason });
  };
  started.on('error', (error) => {
    fail(String(error));
  });
  started.on('exit', (code) => {
    fail(`the reader ended with code ${String(code)}`);
  });
  // After the listeners: adding one to the port would hold the process again.
  started.unref();
  worker = started;
  return started;
}

/**
 * Title, waypoints and routes of a GPX document without its track points, read by gpxparser in its own
 * thread. The result is null, with the reason, when it fails, runs out of memory or takes too long.
 */
export async function readGpxDetails(xml: string): Promise<{ details: GpxDetails | null; reason: string }> {
  const id = nextId++;
  const target = warmWorker();
  const answer = await new Promise<Answer>((resolve) => {
    const timer = setTimeout(() => {
      resolve({ id, details: null, error: 'it took too long' });
      void target.terminate();
    }, TIMEOUT_MS);
    waiting.set(id, (settled) => {
      clearTimeout(timer);
      resolve(settled);
    });
    target.ref();
    target.postMessage({ id, xml });
  });
  waiting.delete(id);
  if (waiting.size === 0) target.unref();
  return { details: answer.details, reason: answer.error };
}
