import { Router } from 'express';
import { z } from 'zod';
import * as api from '../../shared/schema/api.ts';
import type { JobQueue } from '../jobs/queue.ts';
import { Lines } from '../lines.ts';
import { SOFTWARE } from '../package-root.ts';
import type { Store } from '../store/store.ts';
import type { Book } from './book.ts';
import { streamEvents } from './events.ts';
import { notFound } from './faults.ts';
import { openApiDocument } from './openapi.ts';
import { recordingRoutes } from './recording-routes.ts';
import { reply } from './reply.ts';
import { exportRoutes, runRoutes } from './run-routes.ts';
import { setupRoutes } from './setup-routes.ts';

/** All routes under /api. */
export function apiRoutes(store: Store, queue: JobQueue, book: Book, maxUploadBytes: number): Router {
  const routes = Router();
  routes.get('/health', (_request, response) => {
    reply(response, api.Health, { ok: true, version: SOFTWARE });
  });
  routes.get('/openapi.json', (_request, response) => void response.json(openApiDocument()));
  routes.get('/events', async (request, response) => {
    await streamEvents(request, response, queue);
  });
  routes.use(recordingRoutes(store, queue, book, maxUploadBytes));
  const lines = new Lines(store, queue);
  routes.get('/lines', async (_request, response) => {
    reply(response, z.array(api.LineWire), await lines.all());
  });
  routes.use(runRoutes(store, book));
  routes.use(exportRoutes(book));
  routes.use(setupRoutes(store, book));
  routes.use((request) => {
    throw notFound(`${request.method} /api${request.path}`);
  });
  return routes;
}
