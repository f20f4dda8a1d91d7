import { randomUUID } from 'node:crypto';
import express, { Router } from 'express';
import type { z } from 'zod';
import { parseCantRegister } from '../../shared/assess/index.ts';
import { parseLimitSet } from '../../shared/limits/index.ts';
import { BendbookError } from '../../shared/model/fault.ts';
import * as api from '../../shared/schema/api.ts';
import { CantRegister } from '../../shared/schema/cant-register.ts';
import { LimitSet } from '../../shared/schema/limit-set.ts';
import { SetupRef } from '../../shared/schema/setup.ts';
import { Vehicle } from '../../shared/schema/vehicle.ts';
import { BUILT_IN } from '../catalogue.ts';
import type { Store } from '../store/store.ts';
import type { DocumentKind } from '../store/tables.ts';
import type { Book } from './book.ts';
import { notFound } from './faults.ts';
import { reply } from './reply.ts';
import { plainName } from './uploads.ts';

/** What runs are judged by: setups, limit sets, vehicles, cant registers. */
export function setupRoutes(store: Store, book: Book): Router {
  const routes = Router();
  const json = express.json({ limit: '2mb' });

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
  return routes;

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
    routes.put<{ id: string }>(`/${path}/:id`, json, async (request, response) => {
      const { id } = request.params;
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
    routes.delete<{ id: string }>(`/${path}/:id`, async (request, response) => {
      const { id } = request.params;
      own(id);
      if (!(await store.documents.remove(kind, id))) throw notFound(id);
      book.forgetTables();
      response.status(204).end();
    });
  }
}
