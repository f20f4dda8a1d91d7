import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import pino from 'pino';
import { BendbookError } from '../shared/model/fault.ts';
import { DEFAULT_PORT, type Configuration } from './configuration.ts';
import { createApp } from './http/app.ts';
import { Book } from './http/book.ts';
import { JobQueue } from './jobs/queue.ts';
import { Store } from './store/store.ts';

export interface RunningServer {
  readonly address: string;
  readonly dataDir: string;
  close(): Promise<void>;
}

/** Connections still open this long after a stop was asked for are cut, ms. */
const GRACE_MS = 2000;

/** Opens the store, takes up interrupted work, listens. */
export async function serve(configuration: Configuration): Promise<RunningServer> {
  const store = await Store.open(configuration.dataDir);
  const queue = new JobQueue(store);
  const log = pino({ level: 'warn' }, pino.destination(2));
  const app = createApp(store, queue, new Book(store), { ...configuration, log });
  const server = createServer(app);
  await listen(server, configuration);
  await queue.start();
  const { port } = server.address() as AddressInfo;
  const host = configuration.host.includes(':') ? `[${configuration.host}]` : configuration.host;
  return {
    address: `http://${host}:${String(port)}`,
    dataDir: configuration.dataDir,
    async close() {
      const closed = new Promise<void>((resolve) => server.close(() => resolve()));
      server.closeIdleConnections();
      const cut = setTimeout(() => server.closeAllConnections(), GRACE_MS);
      await queue.close();
      await closed;
      clearTimeout(cut);
      await store.close();
    },
  };
}

/** Listens on the port asked for; without one, on the first free of ten from the usual one on. */
async function listen(server: Server, { host, port }: Configuration): Promise<void> {
  const ports = port === null ? Array.from({ length: 10 }, (_, i) => DEFAULT_PORT + i) : [port];
  for (const candidate of ports) {
    try {
      await new Promise<void>((resolve, reject) => {
        server.once('error', reject);
        server.listen(candidate, host, () => {
          server.off('error', reject);
          resolve();
        });
      });
      return;
    } catch (error) {
      if ((error as { code?: string }).code !== 'EADDRINUSE') throw error;
    }
  }
  throw new BendbookError('serve/port-taken', {
    cause: `port ${ports.length === 1 ? String(ports[0]) : `${String(ports[0])} to ${String(ports.at(-1))}`} on ${host} is taken`,
    remedy: 'Choose another with --port N',
  });
}
