import { z } from 'zod';
import { createDocument, type ZodOpenApiOperationObject, type ZodOpenApiPathsObject } from 'zod-openapi';
import * as api from '../../shared/schema/api.ts';
import { CantRegister } from '../../shared/schema/cant-register.ts';
import { LimitSet } from '../../shared/schema/limit-set.ts';
import { SetupRef } from '../../shared/schema/setup.ts';
import { Vehicle } from '../../shared/schema/vehicle.ts';

const id = { path: z.object({ id: z.string() }) };
const problem = {
  description: 'What is wrong, where, and what to do',
  content: { 'application/json': { schema: api.ErrorBody } },
};

function json(schema: z.ZodType, description = 'Done'): ZodOpenApiOperationObject['responses'] {
  return { 200: { description, content: { 'application/json': { schema } } }, default: problem };
}

function file(type: string): ZodOpenApiOperationObject {
  return {
    requestParams: id,
    responses: { 200: { description: 'The file', content: { [type]: {} } }, default: problem },
  };
}

function body(schema: z.ZodType) {
  return { content: { 'application/json': { schema } } };
}

const done = { 204: { description: 'Deleted' }, default: problem };

function documentPath(schema: z.ZodType): ZodOpenApiPathsObject[string] {
  return {
    put: { requestParams: id, requestBody: body(schema), responses: json(schema) },
    delete: { requestParams: id, responses: done },
  };
}

const PATHS: ZodOpenApiPathsObject = {
  '/api/health': { get: { responses: json(api.Health) } },
  '/api/events': {
    get: {
      responses: { 200: { description: 'Events job, recording, removed', content: { 'text/event-stream': {} } } },
    },
  },
  '/api/recordings': {
    get: { responses: json(z.array(api.RecordingSummary)) },
    post: {
      requestBody: {
        content: {
          'multipart/form-data': {
            schema: z.object({ file: z.array(z.string().meta({ format: 'binary' })), columns: z.string().optional() }),
          },
        },
      },
      responses: {
        201: {
          description: 'Each file stored whole or refused',
          content: { 'application/json': { schema: api.UploadResult } },
        },
        default: problem,
      },
    },
  },
  '/api/recordings/{id}': {
    get: { requestParams: id, responses: json(api.RecordingSummary) },
    delete: { requestParams: id, responses: done },
  },
  '/api/recordings/{id}/raw': { get: file('application/octet-stream') },
  '/api/recordings/{id}/preview': { get: { requestParams: id, responses: json(api.ColumnPreview) } },
  '/api/recordings/{id}/columns': {
    put: { requestParams: id, requestBody: body(api.ColumnNames), responses: json(api.Job) },
  },
  '/api/recordings/{id}/analyse': { post: { requestParams: id, responses: json(api.Job) } },
  '/api/demo': {
    post: {
      responses: {
        201: { description: 'Loaded', content: { 'application/json': { schema: api.UploadResult } } },
        default: problem,
      },
    },
  },
  '/api/jobs': { get: { responses: json(z.array(api.Job)) } },
  '/api/jobs/{id}': {
    get: { requestParams: id, responses: json(api.Job) },
    delete: { requestParams: id, responses: json(api.Job, 'Cancelled') },
  },
  '/api/runs': { get: { responses: json(z.array(api.RunSummary)) } },
  '/api/lines': { get: { responses: json(z.array(api.LineWire)) } },
  '/api/runs/{id}': { get: { requestParams: id, responses: json(api.RunDetail) } },
  '/api/runs/{id}/profile': {
    get: {
      requestParams: {
        ...id,
        query: z.object({
          from: z.number().optional(),
          to: z.number().optional(),
          points: z.number().int().optional(),
        }),
      },
      responses: json(api.ProfileWindow),
    },
  },
  '/api/runs/{id}/assessment': {
    get: { requestParams: id, responses: json(api.AssessmentBody) },
    post: { requestParams: id, requestBody: body(SetupRef), responses: json(api.AssessmentBody) },
  },
  '/api/runs/{id}/table.csv': { get: file('text/csv') },
  '/api/runs/{id}/table.json': { get: file('application/json') },
  '/api/runs/{id}/table.geojson': { get: file('application/geo+json') },
  '/api/runs/{id}/table.xlsx': { get: file('application/vnd.openxmlformats-officedocument.spreadsheetml.sheet') },
  '/api/runs/{id}/profile.csv': { get: file('text/csv') },
  '/api/runs/{id}/report.pdf': { get: file('application/pdf') },
  '/api/runs/{id}/report.html': { get: file('text/html') },
  '/api/catalogue': { get: { responses: json(api.Catalogue) } },
  '/api/setup': {
    put: {
      requestParams: { query: z.object({ run: z.string().optional() }) },
      requestBody: body(SetupRef),
      responses: json(SetupRef),
    },
  },
  '/api/limit-sets/{id}': documentPath(LimitSet),
  '/api/vehicles/{id}': documentPath(Vehicle),
  '/api/registers/{id}': documentPath(CantRegister),
  '/api/registers': {
    post: {
      requestParams: { query: z.object({ name: z.string().optional() }) },
      requestBody: { content: { 'text/csv': { schema: z.string() } } },
      responses: {
        201: { description: 'Read', content: { 'application/json': { schema: api.RegisterUpload } } },
        default: problem,
      },
    },
  },
};

let document: ReturnType<typeof createDocument> | null = null;

/** The OpenAPI 3.1 description, made from the schemas that requests are checked with. */
export function openApiDocument(): ReturnType<typeof createDocument> {
  document ??= createDocument({ openapi: '3.1.0', info: { title: 'Bendbook', version: '1' }, paths: PATHS });
  return document;
}
