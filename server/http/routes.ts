import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { randomUUID } from 'node:crypto';
import express, { Router, type Request, type Response } from 'express';
import { z } from 'zod';
import { assessRun, parseCantRegister } from '../../shared/assess/index.ts';
import { parseLimitSet } from '../../shared/limits/index.ts';
import { BendbookError } from '../../shared/model/fault.ts';
import * as api from '../../shared/schema/api.ts';
import { CantRegister } from '../../shared/schema/cant-register.ts';
import { LimitSet } from '../../shared/schema/limit-set.ts';
import { SetupRef } from '../../shared/schema/setup.ts';
import { Vehicle } from '../../shared/schema/vehicle.ts';
import { BUILT_IN } from '../catalogue.ts';
import { previewFile } from '../ingest/index.ts';
import type { JobQueue } from '../jobs/queue.ts';
import { SOFTWARE } from '../package-root.ts';
import {
  curveTableCsv,
  curveTableGeoJson,
  curveTableJson,
  curveTableXlsx,
  profileCsv,
  reportHtml,
  reportPdf,
} from '../report/index.ts';
import type { Store } from '../store/store.ts';
import type { DocumentKind } from '../store/tables.ts';
import type { Book } from './book.ts';
import { loadDemo } from './demo.ts';
import { streamEvents } from './events.ts';
import { notFound } from './faults.ts';
import { openApiDocument } from './openapi.ts';
import { MOST_POINTS, profileWindow } from './profile-window.ts';
import { dropUploads, keepUploads, plainName, uploadReceiver } from './uploads.ts';
import { wire } from './wire.ts';

const WindowQuery = z.object({
  from: z.coerce.number().default(-Infinity),
  to: z.coerce.number().default(Infinity),
  points: z.coerce.number().int().min(2).max(MOST_POINTS).default(2000),
});

/** All routes under /api. */
export function apiRoutes(store: Store, queue: JobQueue, book: Book, maxUploadBytes: number): Router {
  const routes = Router();
  const json = express.json({ limit: '2mb' });
  const receive = uploadReceiver(store, maxUploadBytes);

  routes.get('/health', (_request, response) => {
    reply(response, api.Health, { ok: true, version: SOFTWARE });
  });
  routes.get('/openapi.json', (_request, response) => void response.json(openApiDocument()));
  routes.get('/events', async (request, response) => {
    await streamEvents(request, response, queue);
  });

  // Recordings.
  routes.get('/recordings', async (_request, response) => {
    reply(response, z.array(api.RecordingSummary), await store.recordings());
  });
  routes.post('/recordings', async (request, response) => {
    await receive(request, response);
    try {
      const text = (request.body as { columns?: unknown } | undefined)?.columns;
      const columns = typeof text === 'string' && text !== '' ? api.ColumnNames.parse(parseJson(text)) : {};
      reply(response, api.UploadResult, await keepUploads(request, columns, store, queue), 201);
    } catch (error) {
      await dropUploads(request);
      throw error;
    }
  });
  routes.get('/recordings/:id', async (request, response) => {
    reply(response, api.RecordingSummary, await recordingOf(request));
  });
  routes.delete('/recordings/:id', async (request, response) => {
    const { id } = await recordingOf(request);
    await queue.remove(id);
    book.forgetTables();
    response.status(204).end();
  });
  routes.get('/recordings/:id/raw', async (request, response) => {
    const { id, name, bytes } = await recordingOf(request);
    const stream = await store.raw.read(id);
    response.attachment(plainName(name)).type('application/octet-stream').set('Content-Length', String(bytes));
    await sendStream(stream, response);
  });
  routes.get('/recordings/:id/preview', async (request, response) => {
    const { id, name } = await recordingOf(request);
    const preview = await previewFile(store.raw.path(id), name, await store.columnNames(id));
    if (preview === null) {
      throw new BendbookError('http/no-columns', {
        cause: 'this recording is not a delimited text: there are no columns to choose',
        place: { file: name },
        remedy: 'Nothing has to be chosen for it',
      });
    }
    reply(response, api.ColumnPreview, preview);
  });
  routes.put('/recordings/:id/columns', json, async (request, response) => {
    const { id } = await recordingOf(request);
    await store.setColumnNames(id, api.ColumnNames.parse(request.body));
    reply(response, api.Job, await queue.add(id));
  });
  routes.post('/recordings/:id/analyse', async (request, response) => {
    const { id } = await recordingOf(request);
    reply(response, api.Job, await queue.add(id));
  });
  routes.post('/demo', async (_request, response) => {
    reply(response, api.UploadResult, { recordings: await loadDemo(store, queue, book), refused: [] }, 201);
  });

  // Jobs.
  routes.get('/jobs', async (_request, response) => {
    reply(response, z.array(api.Job), await queue.jobs());
  });
  routes.get('/jobs/:id', async (request, response) => {
    reply(response, api.Job, (await queue.job(request.params.id)) ?? missing(`Job ${request.params.id}`));
  });
  routes.delete('/jobs/:id', async (request, response) => {
    reply(response, api.Job, (await queue.cancel(request.params.id)) ?? missing(`Job ${request.params.id}`));
  });

  // Runs.
  routes.get('/runs', async (_request, response) => {
    reply(response, z.array(api.RunSummary), await store.runs());
  });
  routes.get('/runs/:id', async (request, response) => {
    const run = await book.run(request.params.id);
    const { summary, quality, findings, alignment, passages } = run;
    const waypoints = await store.waypoints(summary.recordingId);
    const { ref } = await book.setupFor(run);
    reply(response, api.RunDetail, {
      summary,
      quality,
      findings,
      elements: alignment.elements,
      passages,
      waypoints,
      setup: ref,
    });
  });
  routes.get('/runs/:id/profile', async (request, response) => {
    const { from, to, points } = WindowQuery.parse(request.query);
    const table = await book.table(request.params.id);
    const s = table.s_m ?? [];
    const fromM = Number.isFinite(from) ? from : (s[0] ?? 0);
    const toM = Number.isFinite(to) ? to : (s[s.length - 1] ?? 0);
    reply(response, api.ProfileWindow, profileWindow(table, fromM, toM, points));
  });
  routes.get('/runs/:id/assessment', async (request, response) => {
    const run = await book.run(request.params.id);
    const { ref, setup } = await book.setupFor(run);
    reply(response, api.AssessmentBody, { run: run.summary.id, setup: ref, ...assessRun(run.passages, setup) });
  });
  routes.post('/runs/:id/assessment', json, async (request, response) => {
    const run = await book.run(request.params.id);
    const ref = SetupRef.parse(request.body);
    reply(response, api.AssessmentBody, {
      run: run.summary.id,
      setup: ref,
      ...assessRun(run.passages, await book.resolve(ref)),
    });
  });

  // Exports.
  routes.get('/runs/:id/table.csv', async (request, response) => {
    const context = await book.report(request.params.id);
    response
      .attachment(`${exportName(context.title)}-curves.csv`)
      .type('text/csv')
      .send(curveTableCsv(context));
  });
  routes.get('/runs/:id/table.json', async (request, response) => {
    const context = await book.report(request.params.id);
    response.attachment(`${exportName(context.title)}-curves.json`).json(curveTableJson(context));
  });
  routes.get('/runs/:id/table.geojson', async (request, response) => {
    const context = await book.report(request.params.id);
    response
      .attachment(`${exportName(context.title)}-curves.geojson`)
      .type('application/geo+json')
      .send(JSON.stringify(curveTableGeoJson(context)));
  });
  routes.get('/runs/:id/table.xlsx', async (request, response) => {
    const context = await book.report(request.params.id);
    response
      .attachment(`${exportName(context.title)}-curves.xlsx`)
      .type('application/vnd.openxmlformats-officedocument.spreadsheetml.sheet')
      .send(await curveTableXlsx(context));
  });
  routes.get('/runs/:id/profile.csv', async (request, response) => {
    const context = await book.report(request.params.id);
    const table = await book.table(request.params.id);
    response.attachment(`${exportName(context.title)}-profile.csv`).type('text/csv');
    await sendStream(Readable.from(profileCsv(table, context.cautions[0] ?? '')), response);
  });
  routes.get('/runs/:id/report.pdf', async (request, response) => {
    const context = await book.report(request.params.id);
    const table = await book.table(request.params.id);
    response
      .attachment(`${exportName(context.title)}-report.pdf`)
      .type('application/pdf')
      .send(await reportPdf(context, () => table));
  });
  routes.get('/runs/:id/report.html', async (request, response) => {
    const context = await book.report(request.params.id);
    const table = await book.table(request.params.id);
    response
      .attachment(`${exportName(context.title)}-report.html`)
      .type('text/html')
      .send(reportHtml(context, () => table));
  });

  // Setup and documents.
  routes.get('/catalogue', async (_request, response) => {
    const { limitSets, vehicles, registers } = await book.documents();
    const mark = <T extends { readonly id: string }>(
      items: readonly T[],
      shipped: readonly { readonly id: string }[],
    ) => items.map((item) => ({ ...item, builtIn: shipped.some(({ id }) => id === item.id) }));
    reply(response, api.Catalogue, {
      limitSets: mark(limitSets, BUILT_IN.limitSets),
      vehicles: mark(vehicles, BUILT_IN.vehicles),
      registers,
      setup: await book.defaultSetup(),
    });
  });
  routes.put('/setup', json, async (request, response) => {
    const ref = SetupRef.parse(request.body);
    const runId = typeof request.query.run === 'string' ? request.query.run : null;
    await book.putSetup(ref, runId === null ? null : (await book.run(runId)).summary.recordingId);
    reply(response, SetupRef, ref);
  });
  // A set that contradicts itself is refused as one read from a file would be.
  const whole = (body: unknown) => void parseLimitSet(JSON.stringify(body));
  documentRoutes('limit-sets', 'limit-set', LimitSet, BUILT_IN.limitSets, whole);
  documentRoutes('vehicles', 'vehicle', Vehicle, BUILT_IN.vehicles);
  documentRoutes('registers', 'register', CantRegister, []);
  routes.post('/registers', express.text({ type: () => true, limit: '10mb' }), async (request, response) => {
    const name = typeof request.query.name === 'string' ? plainName(request.query.name) : 'cant register';
    const id = randomUUID();
    const { register, findings } = parseCantRegister(typeof request.body === 'string' ? request.body : '', {
      id,
      name,
    });
    await store.documents.put('register', id, register);
    reply(response, api.RegisterUpload, { ...register, findings }, 201);
  });

  routes.use((request) => {
    throw notFound(`${request.method} /api${request.path}`);
  });
  return routes;

  async function recordingOf(request: Request) {
    const id = String(request.params.id);
    return (await store.recording(id)) ?? missing(`Recording ${id}`);
  }

  function documentRoutes(
    path: string,
    kind: DocumentKind,
    schema: z.ZodType<{ id: string }>,
    shipped: readonly { readonly id: string }[],
    check: (body: unknown) => void = () => undefined,
  ): void {
    const own = (id: string) => {
      if (!shipped.some((item) => item.id === id)) return;
      throw new BendbookError('http/built-in', {
        cause: `"${id}" comes with the program and is not changed`,
        remedy: 'Copy it under a name of your own and change the copy',
      });
    };
    routes.put(`/${path}/:id`, json, async (request, response) => {
      const id = String(request.params.id);
      own(id);
      const body = schema.parse(request.body);
      if (body.id !== id) {
        throw new BendbookError('http/bad-request', {
          cause: `the body is "${body.id}", the address says "${id}"`,
          remedy: 'Use one id in both',
        });
      }
      check(body);
      await store.documents.put(kind, id, body);
      book.forgetTables();
      reply(response, schema, body);
    });
    routes.delete(`/${path}/:id`, async (request, response) => {
      const id = String(request.params.id);
      own(id);
      if (!(await store.documents.remove(kind, id))) throw notFound(id);
      book.forgetTables();
      response.status(204).end();
    });
  }
}

/** Sends a body that was checked against its schema: what the page relies on is what it gets. */
function reply<T extends z.ZodType>(response: Response, schema: T, body: unknown, status = 200): void {
  const checked = schema.safeParse(wire(body));
  if (!checked.success) throw new Error(`the answer does not fit its schema: ${checked.error.message}`);
  response.status(status).json(checked.data);
}

/** Sends a stream; a client that goes away ends it without a fuss. */
async function sendStream(stream: Readable, response: Response): Promise<void> {
  try {
    await pipeline(stream, response);
  } catch (error) {
    if ((error as { code?: string }).code !== 'ERR_STREAM_PREMATURE_CLOSE') throw error;
  }
}

function missing(what: string): never {
  throw notFound(what);
}

function parseJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch (error) {
    throw new BendbookError(
      'http/bad-request',
      { cause: 'the field "columns" is not JSON', remedy: 'Send an object of field to { header, unit }' },
      { cause: error },
    );
  }
}

/** A title as a file name that every system takes. */
function exportName(title: string): string {
  return (
    title
      .replace(/[^\p{L}\p{N}._-]+/gu, '-')
      .replace(/^-+|-+$/g, '')
      .slice(0, 80) || 'bendbook'
  );
}
