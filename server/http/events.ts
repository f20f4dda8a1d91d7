import type { Request, Response } from 'express';
import { createSession } from 'better-sse';
import type { JobQueue } from '../jobs/queue.ts';

/** Server-sent events: `job`, `recording` and `removed`, as they happen. */
export async function streamEvents(request: Request, response: Response, queue: JobQueue): Promise<void> {
  const session = await createSession(request, response);
  const tell = (name: string) => (body: unknown) => {
    if (session.isConnected) session.push(body, name);
  };
  const [job, recording, removed] = [tell('job'), tell('recording'), tell('removed')];
  queue.on('job', job);
  queue.on('recording', recording);
  queue.on('removed', removed);
  const end = () => response.end();
  queue.on('closing', end);
  session.on('disconnected', () => {
    queue.off('job', job);
    queue.off('recording', recording);
    queue.off('removed', removed);
    queue.off('closing', end);
  });
}
