import { existsSync } from 'node:fs';
import { join } from 'node:path';
import express, { type Express } from 'express';
import { rateLimit } from 'express-rate-limit';
import helmet from 'helmet';
import type { Logger } from 'pino';
import { BendbookError } from '../../shared/model/fault.ts';
import type { JobQueue } from '../jobs/queue.ts';
import { PACKAGE_ROOT } from '../package-root.ts';
import type { Store } from '../store/store.ts';
import type { Book } from './book.ts';
import { faultHandler } from './faults.ts';
import { sameOrigin } from './same-origin.ts';
import { apiRoutes } from './routes.ts';

export interface AppOptions {
  readonly maxUploadBytes: number;
  /** The server listens on loopback only: then it answers to names of this machine alone. */
  readonly onLoopback: boolean;
  /** Origin of map tiles the page may load, or null for none. */
  readonly tileOrigin: string | null;
  readonly log: Logger;
}

/** Requests a minute from one address: far above what a page asks for, far below what a loop does. */
const REQUESTS_PER_MINUTE = { loopback: 60_000, network: 3000 };

/** The Express application: API under /api, the page elsewhere. */
export function createApp(store: Store, queue: JobQueue, book: Book, options: AppOptions): Express {
  const app = express();
  app.disable('x-powered-by');
  app.use(
    helmet({
      contentSecurityPolicy: {
        useDefaults: false,
        directives: {
          defaultSrc: ["'self'"],
          scriptSrc: ["'self'"],
          styleSrc: ["'self'"],
          imgSrc: ["'self'", 'data:', 'blob:', ...(options.tileOrigin === null ? [] : [options.tileOrigin])],
          connectSrc: ["'self'"],
          objectSrc: ["'none'"],
          baseUri: ["'none'"],
          formAction: ["'self'"],
          frameAncestors: ["'none'"],
        },
      },
      // Plain HTTP inside a company network: these two would leave the page blank there.
      strictTransportSecurity: false,
      crossOriginOpenerPolicy: false,
    }),
  );
  app.use(sameOrigin(options.onLoopback));
  app.use(
    '/api',
    rateLimit({
      windowMs: 60_000,
      limit: options.onLoopback ? REQUESTS_PER_MINUTE.loopback : REQUESTS_PER_MINUTE.network,
      standardHeaders: 'draft-8',
      legacyHeaders: false,
      handler(_request, _response, next) {
        next(
          new BendbookError('http/too-many-requests', {
            cause: 'too many requests from one address within a minute',
            remedy: 'Wait a minute and try again',
          }),
        );
      },
    }),
  );
  app.use('/api', (_request, response, next) => {
    response.set('Cache-Control', 'no-store');
    next();
  });
  // Results came or went: profiles made from the earlier ones are stale.
  queue.on('recording', () => book.forgetTables());
  queue.on('removed', () => book.forgetTables());
  app.use('/api', apiRoutes(store, queue, book, options.maxUploadBytes));
  servePage(app);
  app.use(faultHandler(options.maxUploadBytes, (error) => options.log.error(error)));
  return app;
}

/** The built page; every other address gives it too, since the page reads its place from the address. */
function servePage(app: Express): void {
  const folder = join(PACKAGE_ROOT, 'dist', 'client');
  const index = join(folder, 'index.html');
  if (!existsSync(index)) {
    app.get('/{*place}', (_request, response) => {
      response.status(503).type('text/plain').send('The page is not built yet: run "npm run build" and start again.');
    });
    return;
  }
  app.use('/assets', express.static(join(folder, 'assets'), { immutable: true, maxAge: '1y', fallthrough: false }));
  app.use(express.static(folder, { index: false }));
  app.get('/{*place}', (_request, response) => {
    response.set('Cache-Control', 'no-cache').sendFile(index);
  });
}
