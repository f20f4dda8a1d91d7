import { BendbookError, describeFault } from '../shared/model/fault.ts';
import { readConfiguration } from './configuration.ts';
import { serve } from './serve.ts';

/** Starts the server, says where it is, and ends it in order when asked to. */
export async function main(args: readonly string[]): Promise<void> {
  const running = await serve(readConfiguration(args));
  console.log(`Bendbook is ready at ${running.address} (data in ${running.dataDir})`);
  let stopping = false;
  const stop = () => {
    if (stopping) process.exit(1);
    stopping = true;
    void running.close().then(() => process.exit(0));
  };
  process.on('SIGINT', stop);
  process.on('SIGTERM', stop);
}

if (process.argv[1] !== undefined && import.meta.filename === process.argv[1]) {
  main(process.argv.slice(2)).catch((error: unknown) => {
    console.error(
      error instanceof BendbookError ? describeFault(error.fault) : `Bendbook could not start: ${String(error)}`,
    );
    process.exit(error instanceof BendbookError && error.fault.code === 'arguments/wrong' ? 2 : 1);
  });
}
