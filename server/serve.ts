import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import pino from 'pino';
import { BendbookError } from '../shared/model/fault.ts';
import { DEFAULT_PORT, type Configuration } from './configuration.ts';
import { createApp } from './http/app.ts';
import { Book } from './http/book.ts';
import { JobQueue } from './jobs/queue.ts';
import { Store } from './store/store.ts';

interface RunningServer {
  readonly address: string;
  readonly dataDir: string;
  close(): Promise<void>;
}

/** Connections still open this long after a stop was asked for are cut, ms. */
const GRACE_MS = 2000;
/** An upload may take this long as a whole, ms. */
const LONGEST_REQUEST_MS = 3_600_000;

/** Opens the store, listens, takes up interrupted work. */
async function serve(configuration: Configuration): Promise<RunningServer> {
  const store = await Store.open(configuration.dataDir, { recover: configuration.recover });
  const log = pino({ level: 'warn' }, pino.destination(2));
  const queue = new JobQueue(store, { onTrouble: (error) => log.error(error) });
  const onLoopback = /^(localhost|127\.[\d.]+|::1)$/i.test(configuration.host);
  const server = createServer(createApp(store, queue, new Book(store), { ...configuration, onLoopback, log }));
  server.requestTimeout = LONGEST_REQUEST_MS;
  try {
    await listen(server, configuration);
    await queue.start();
  } catch (error) {
    server.close();
    await queue.close();
    await store.close();
    throw error;
  }
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

/** Starts the server, says where it is, and ends it in order when asked to. */
export async function serveUntilStopped(configuration: Configuration): Promise<void> {
  const running = await serve(configuration);
  console.log(`Bendbook is ready at ${running.address} (data in ${running.dataDir})`);
  let stopping = false;
  const stop = () => {
    if (stopping) process.exit(1);
    stopping = true;
    running.close().then(
      () => process.exit(0),
      () => process.exit(1),
    );
  };
  process.on('SIGINT', stop);
  process.on('SIGTERM', stop);
}

/** Listens on the port asked for; without one, on the first free of ten from the usual one on. */
async function listen(server: Server, { host, port }: Configuration): Promise<void> {
  const ports = port === null ? Array.from({ length: 10 }, (_, i) => DEFAULT_PORT + i) : [port];
  for (const candidate of ports) {
    try {
      await listenOn(server, candidate, host);
      return;
    } catch (error) {
      const { code } = error as { code?: string };
      if (code === 'EADDRINUSE') continue;
      throw new BendbookError(
        'serve/not-listening',
        {
          cause: `cannot listen on ${host} port ${String(candidate)} (${code ?? String(error)})`,
          remedy: 'Choose another address or port with --host and --port',
        },
        { cause: error },
      );
    }
  }
  throw new BendbookError('serve/port-taken', {
    cause: `port ${ports.length === 1 ? String(ports[0]) : `${String(ports[0])} to ${String(ports.at(-1))}`} on ${host} is taken`,
    remedy: 'Choose another with --port N',
  });
}

function listenOn(server: Server, port: number, host: string): Promise<void> {
  return new Promise((resolve, reject) => {
    server.once('error', reject);
    server.listen(port, host, () => {
      server.off('error', reject);
      resolve();
    });
  });
}
