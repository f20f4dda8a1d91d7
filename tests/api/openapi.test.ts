import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { createApp } from '../../server/http/app.ts';
import { Book } from '../../server/http/book.ts';
import { JobQueue } from '../../server/jobs/queue.ts';
import { Store } from '../../server/store/store.ts';
import pino from 'pino';
import { BUILD, makeFolder, removeFolders, startServer, type TestServer } from '../support/server.ts';

interface Operation {
  parameters?: { name: string; in: string; required?: boolean }[];
  requestBody?: { content: Record<string, { schema: unknown }> };
  responses: Record<string, { description?: string; content?: Record<string, unknown> }>;
}
interface Document {
  openapi: string;
  info: { title: string; version: string };
  paths: Record<string, Record<string, Operation>>;
  components?: { schemas?: Record<string, unknown> };
}

let server: TestServer;
let document: Document;
beforeAll(async () => {
  server = await startServer(await makeFolder());
  document = (await (await fetch(`${server.url}/api/openapi.json`)).json()) as Document;
});
afterAll(async () => {
  await server.end();
  await removeFolders();
});

const operations = () =>
  Object.entries(document.paths).flatMap(([path, item]) =>
    Object.entries(item).map(([method, operation]) => ({ path, method, operation })),
  );

describe('OpenAPI document', () => {
  it('is of version 3.1 and every operation is whole (OpenAPI 3.1.0, 4.8.10 and 4.8.16)', () => {
    expect(document.openapi).toMatch(/^3\.1\.\d$/);
    expect(document.info.title).not.toBe('');
    expect(operations().length).toBeGreaterThan(25);
    for (const { path, method, operation } of operations()) {
      const place = `${method} ${path}`;
      expect(['get', 'put', 'post', 'delete'], place).toContain(method);
      const inPath = [...path.matchAll(/\{(\w+)\}/g)].map(([, name]) => name);
      const declared = (operation.parameters ?? []).filter((parameter) => parameter.in === 'path');
      expect(
        declared.map(({ name }) => name),
        place,
      ).toEqual(inPath);
      for (const parameter of declared) expect(parameter.required, place).toBe(true);
      expect(Object.keys(operation.responses).length, place).toBeGreaterThan(0);
      for (const response of Object.values(operation.responses)) expect(response.description, place).toBeTruthy();
    }
  });

  it('has no reference that leads nowhere', () => {
    const references = [...JSON.stringify(document).matchAll(/"\$ref":"([^"]+)"/g)].map(([, ref]) => ref!);
    for (const reference of references) {
      const found = reference
        .replace(/^#\//, '')
        .split('/')
        .reduce<unknown>((value, key) => (value as Record<string, unknown> | undefined)?.[key], document);
      expect(found, reference).toBeDefined();
    }
  });

  it('describes the routes that there are, no more and no fewer', async () => {
    const store = await Store.open(await makeFolder());
    const queue = new JobQueue(store, { workerFile: `${BUILD}/server/jobs/analysis-worker.js` });
    const options = { maxUploadBytes: 1, onLoopback: true, tileOrigin: null, log: pino({ level: 'silent' }) };
    const app = createApp(store, queue, new Book(store), options);
    const routes = listRoutes(app.router as unknown as RouterLike);
    await queue.close();
    await store.close();
    const described = operations().map(({ path, method }) => `${method} ${path.replace(/\{(\w+)\}/g, ':$1')}`);
    expect(described.sort()).toEqual(routes.filter((route) => route !== 'get /api/openapi.json').sort());
  });
});

interface RouterLike {
  stack: { name: string; handle: RouterLike; route?: { path: string; stack: { method: string }[] } }[];
}

/** "method /api/path" of every route under /api. */
function listRoutes(router: RouterLike): string[] {
  return router.stack.flatMap(({ name, handle, route }) => {
    if (name === 'router') return listRoutes(handle);
    if (route?.path.startsWith('/{*') !== false) return [];
    return [...new Set(route.stack.map(({ method }) => method))].map((method) => `${method} /api${route.path}`);
  });
}
