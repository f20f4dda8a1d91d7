// The server: what `npm start` runs.
import { BendbookError, describeFault } from '../shared/model/fault.ts';
import { readConfiguration } from './configuration.ts';
import { serveUntilStopped } from './serve.ts';

try {
  await serveUntilStopped(readConfiguration(process.argv.slice(2), process.env));
} catch (error) {
  const ours = error instanceof BendbookError;
  console.error(ours ? describeFault(error.fault) : `Bendbook could not start: ${String(error)}`);
  process.exit(ours && error.fault.code === 'arguments/wrong' ? 2 : 1);
}
