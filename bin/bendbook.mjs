#!/usr/bin/env node
import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

const built = new URL('../dist/server/cli.js', import.meta.url);
if (!existsSync(fileURLToPath(built))) {
  console.error('Bendbook is not built yet. Run "npm start" or "npm run build" in its folder once.');
  process.exit(2);
}
const { runCli } = await import(built.href);
process.exitCode = await runCli(process.argv.slice(2));
