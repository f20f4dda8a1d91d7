import type { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import type { Response } from 'express';
import type { z } from 'zod';
import { wire } from './wire.ts';

/** Sends a body that was checked against its schema: what the page relies on is what it gets. */
export function reply(response: Response, schema: z.ZodType, body: unknown, status = 200): void {
  const checked = schema.safeParse(wire(body));
  if (!checked.success) throw new Error(`the answer does not fit its schema: ${checked.error.message}`);
  response.status(status).json(checked.data);
}

/** Sends a stream; a client that goes away ends it without a fuss. */
export async function sendStream(stream: Readable, response: Response): Promise<void> {
  try {
    await pipeline(stream, response);
  } catch (error) {
    if ((error as { code?: string }).code !== 'ERR_STREAM_PREMATURE_CLOSE') throw error;
  }
}
