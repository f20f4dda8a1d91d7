// Static checks: types, lint, format, import boundaries, unused code. Runs all, fails if one fails.
import { spawnSync } from 'node:child_process';

const node = process.execPath;
const checks = [
  ['types: server, tests, data', ['node_modules/typescript/bin/tsc', '-p', 'tsconfig.json', '--noEmit']],
  ['types: shared', ['node_modules/typescript/bin/tsc', '-p', 'shared/tsconfig.json']],
  ['types: client', ['node_modules/typescript/bin/tsc', '-p', 'client/tsconfig.json']],
  ['lint', ['node_modules/eslint/bin/eslint.js', '.', '--max-warnings', '0']],
  ['format', ['node_modules/prettier/bin/prettier.cjs', '--check', '.', '--log-level', 'warn']],
  [
    'import boundaries',
    [
      'node_modules/dependency-cruiser/bin/dependency-cruise.mjs',
      'server',
      'shared',
      'client',
      'data',
      'tests',
      '--config',
      '.dependency-cruiser.cjs',
      '--output-type',
      'err',
    ],
  ],
  ['unused code', ['node_modules/knip/bin/knip.js', '--no-progress']],
];
const failed = [];
for (const [name, args] of checks) {
  console.log(`== ${name}`);
  if (spawnSync(node, args, { stdio: 'inherit' }).status !== 0) failed.push(name);
}
if (failed.length > 0) {
  console.error(`Failed: ${failed.join('; ')}`);
  process.exit(1);
}
console.log('All static checks passed.');
