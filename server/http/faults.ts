import type { ErrorRequestHandler } from 'express';
import multer from 'multer';
import { ZodError } from 'zod';
import { BendbookError, type Fault } from '../../shared/model/fault.ts';
import { diskFull, isDiskFull } from '../store/disk.ts';

/** Status by code of the fault; any other is 422: the request was understood, its content cannot be used. */
const STATUS: Readonly<Record<string, number>> = {
  'http/not-found': 404,
  'http/bad-request': 400,
  'http/too-large': 413,
  'http/built-in': 409,
  'http/foreign': 403,
  'http/too-many-requests': 429,
  'http/internal': 500,
  'upload/too-large': 413,
  'upload/too-many': 413,
  'upload/cut-off': 400,
  'store/disk-full': 507,
  'store/damaged': 500,
  'store/raw-missing': 404,
  'store/result-missing': 404,
};

export function notFound(what: string): BendbookError {
  return new BendbookError('http/not-found', {
    cause: `${what} is not here`,
    remedy: 'It may have been deleted: load the list again',
  });
}

/** Every failure leaves as `{ fault }` with cause and remedy; what the user cannot mend is logged for the one who runs the server. */
export function faultHandler(maxUploadBytes: number, log: (error: unknown) => void): ErrorRequestHandler {
  return (error: unknown, _request, response, next) => {
    const fault = faultOf(error, maxUploadBytes);
    const status = STATUS[fault.code] ?? 422;
    if (status === 500) log(error);
    // A download that broke half way can only be cut off.
    if (response.headersSent) next(error);
    else response.status(status).json({ fault });
  };
}

function faultOf(error: unknown, maxUploadBytes: number): Fault {
  if (isDiskFull(error)) return diskFull('the disk is full').fault;
  if (error instanceof BendbookError) return error.fault;
  if (error instanceof multer.MulterError) return uploadFault(error, maxUploadBytes);
  if (error instanceof ZodError) {
    return badRequest(error.issues.map(({ path, message }) => `${path.join('.') || 'body'}: ${message}`).join('; '));
  }
  const { code, status } = error as { code?: string; status?: number };
  const message = error instanceof Error ? error.message : String(error);
  if (code === 'ECONNRESET' || code === 'ECONNABORTED' || /unexpected end of form|aborted/i.test(message)) {
    return {
      code: 'upload/cut-off',
      cause: 'the upload ended half way',
      place: {},
      remedy: 'Send the file again; nothing of it was kept',
    };
  }
  if (/malformed part header|boundary not found|multipart/i.test(message)) return badRequest(message);
  if (/database disk image is malformed|file is not a database/i.test(message)) {
    return {
      code: 'store/damaged',
      cause: `the database is damaged: ${message}`,
      place: {},
      remedy: 'Stop the server and start it with --recover; the uploaded recordings are safe',
    };
  }
  if (status === 404) return notFound('This address').fault;
  if (status === 413) {
    return { ...badRequest(message), code: 'http/too-large', remedy: 'Send less at once' };
  }
  if (status !== undefined && status >= 400 && status < 500) return badRequest(message);
  return {
    code: 'http/internal',
    cause: 'the server could not do this',
    place: {},
    remedy: 'Try again; if it happens again, the log of the server says more',
  };
}

function badRequest(cause: string): Fault {
  return { code: 'http/bad-request', cause, place: {}, remedy: '/api/openapi.json describes the request' };
}

function uploadFault({ code, message, field }: multer.MulterError, maxUploadBytes: number): Fault {
  switch (code) {
    case 'LIMIT_FILE_SIZE':
      return {
        code: 'upload/too-large',
        cause: `the file is larger than ${String(Math.round(maxUploadBytes / 1e6))} MB; nothing of the upload was kept`,
        place: {},
        remedy: 'Split the recording, compress it (zip or gzip), or start the server with a higher --max-upload-mb',
      };
    case 'LIMIT_FILE_COUNT':
    case 'LIMIT_PART_COUNT':
      return {
        code: 'upload/too-many',
        cause: 'too many files in one upload',
        place: {},
        remedy: 'Send at most 200 at once',
      };
    default:
      return { ...badRequest(`${message} ${field ?? ''}`.trim()), remedy: 'Send files in the field "file"' };
  }
}
