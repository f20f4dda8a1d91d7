import express, { Router, type Request } from 'express';
import { z } from 'zod';
import { BendbookError } from '../../shared/model/fault.ts';
import * as api from '../../shared/schema/api.ts';
import { previewFile } from '../ingest/index.ts';
import type { JobQueue } from '../jobs/queue.ts';
import type { Store } from '../store/store.ts';
import type { Book } from './book.ts';
import { loadDemo } from './demo.ts';
import { notFound } from './faults.ts';
import { reply, sendStream } from './reply.ts';
import { dropUploads, keepUploads, plainName, uploadReceiver } from './uploads.ts';

/** Uploads, what is known of them, their bytes, their analyses. */
export function recordingRoutes(store: Store, queue: JobQueue, book: Book, maxUploadBytes: number): Router {
  const routes = Router();
  const json = express.json({ limit: '100kb' });
  const receive = uploadReceiver(store, maxUploadBytes);

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

  routes.get('/jobs', async (_request, response) => {
    reply(response, z.array(api.Job), await queue.jobs());
  });
  routes.get('/jobs/:id', async (request, response) => {
    reply(response, api.Job, (await queue.job(request.params.id)) ?? missing(`Job ${request.params.id}`));
  });
  routes.delete('/jobs/:id', async (request, response) => {
    reply(response, api.Job, (await queue.cancel(request.params.id)) ?? missing(`Job ${request.params.id}`));
  });
  return routes;

  async function recordingOf(request: Request) {
    const id = String(request.params.id);
    return (await store.recording(id)) ?? missing(`Recording ${id}`);
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
