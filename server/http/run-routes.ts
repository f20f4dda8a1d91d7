import { Readable } from 'node:stream';
import express, { Router } from 'express';
import { z } from 'zod';
import { assessRun } from '../../shared/assess/index.ts';
import * as api from '../../shared/schema/api.ts';
import { SetupRef } from '../../shared/schema/setup.ts';
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
import type { Book } from './book.ts';
import { MOST_POINTS, profileWindow } from './profile-window.ts';
import { reply, sendStream } from './reply.ts';

const WindowQuery = z.object({
  from: z.coerce.number().default(-Infinity),
  to: z.coerce.number().default(Infinity),
  points: z.coerce.number().int().min(2).max(MOST_POINTS).default(2000),
});

/** Runs: their alignment, profile and assessment. */
export function runRoutes(store: Store, book: Book): Router {
  const routes = Router();
  const json = express.json({ limit: '100kb' });

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
  return routes;
}

/** Runs as files: tables, profile and reports. */
export function exportRoutes(book: Book): Router {
  const routes = Router();

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
  return routes;
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
