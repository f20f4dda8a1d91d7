import type { ErrorRequestHandler, Response } from 'express';
import multer from 'multer';
import { ZodError } from 'zod';
import { BendbookError, type Fault } from '../../shared/model/fault.ts';

/** Status by the first part of a fault's code where it is not 422 (the request was understood, its content cannot be used). */
const STATUS: Readonly<Record<string, number>> = {
  'http/not-found': 404,
  'http/bad-request': 400,
  'http/built-in': 409,
  'upload/too-large': 413,
  'upload/too-many': 413,
  'upload/cut-off': 400,
  'store/disk-full': 507,
  'http/internal': 500,
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
    if (response.headersSent) {
      next(error);
      return;
    }
    const fault = faultOf(error, maxUploadBytes);
    if (fault.code === 'http/internal') log(error);
    sendFault(response, fault);
  };
}

export function sendFault(response: Response, fault: Fault): void {
  response.status(STATUS[fault.code] ?? 422).json({ fault });
}

function faultOf(error: unknown, maxUploadBytes: number): Fault {
  if (error instanceof BendbookError) return error.fault;
  if (error instanceof multer.MulterError) return uploadFault(error, maxUploadBytes);
  if (error instanceof ZodError) {
    return {
      code: 'http/bad-request',
      cause: error.issues.map(({ path, message }) => `${path.join('.') || 'body'}: ${message}`).join('; '),
      place: {},
      remedy: 'Correct the fields named; /api/openapi.json describes the request',
    };
  }
  const { code, type, status } = error as { code?: string; type?: string; status?: number };
  if (code === 'ENOSPC') {
    return {
      code: 'store/disk-full',
      cause: 'the disk is full',
      place: {},
      remedy: 'Free some space in the data folder and try again',
    };
  }
  if (code === 'ECONNRESET' || code === 'ECONNABORTED' || /Unexpected end of form|aborted/i.test(String(error))) {
    return {
      code: 'upload/cut-off',
      cause: 'the upload ended half way',
      place: {},
      remedy: 'Send the file again; nothing of it was kept',
    };
  }
  if (type?.startsWith('entity.') === true || (status !== undefined && status >= 400 && status < 500)) {
    return {
      code: 'http/bad-request',
      cause: error instanceof Error ? error.message : String(error),
      place: {},
      remedy: '/api/openapi.json describes the request',
    };
  }
  return {
    code: 'http/internal',
    cause: 'the server could not do this',
    place: {},
    remedy: 'Try again; if it happens again, the log of the server says more',
  };
}

function uploadFault(error: multer.MulterError, maxUploadBytes: number): Fault {
  const file = error.field ?? '';
  if (error.code === 'LIMIT_FILE_SIZE') {
    return {
      code: 'upload/too-large',
      cause: `the file is larger than ${String(Math.round(maxUploadBytes / 1e6))} MB`,
      place: {},
      remedy: 'Split the recording, compress it (zip or gzip), or start the server with a higher --max-upload-mb',
    };
  }
  if (error.code === 'LIMIT_FILE_COUNT' || error.code === 'LIMIT_PART_COUNT') {
    return {
      code: 'upload/too-many',
      cause: 'too many files in one upload',
      place: {},
      remedy: 'Send at most 200 at once',
    };
  }
  return {
    code: 'http/bad-request',
    cause: `${error.message} ${file}`.trim(),
    place: {},
    remedy: 'Send files in the field "file"',
  };
}
