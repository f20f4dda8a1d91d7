// Server, shared code, demo and bench to dist/ with the TypeScript compiler; the page to dist/client with Vite.
import { spawnSync } from 'node:child_process';

for (const args of [
  ['node_modules/typescript/bin/tsc', '-p', 'tsconfig.build.json'],
  ['node_modules/vite/bin/vite.js', 'build', '--logLevel', 'warn'],
]) {
  const result = spawnSync(process.execPath, args, { stdio: 'inherit' });
  if (result.status !== 0) process.exit(result.status ?? 1);
}
