// Makes a fresh clone ready: packages, build, browser for tests. Node built-ins only, so that it
// runs before anything is installed. Each step is skipped when a stamp says that nothing changed.
import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, mkdirSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = join(dirname(fileURLToPath(import.meta.url)), '..');
process.chdir(root);
const wanted = new Set(process.argv.slice(2));

const [major = 0, minor = 0] = process.versions.node.split('.').map(Number);
if (major < 20 || (major === 20 && minor < 19)) {
  console.error(
    `Bendbook needs Node 20.19 or later; this is ${process.version}. Install a current Node and try again.`,
  );
  process.exit(1);
}

installPackages();
if (wanted.has('--build')) build();
if (wanted.has('--browser')) await prepareBrowser();

function installPackages() {
  const stamp = 'node_modules/.bendbook-installed';
  const key = hash([readFileSync('package-lock.json'), process.version, process.platform, process.arch]);
  if (read(stamp) === key) return;
  console.log('Installing packages (once; about half a minute) ...');
  // --include=dev: the build needs the compiler even where NODE_ENV=production is set.
  run('npm', ['ci', '--include=dev', '--no-audit', '--no-fund', '--loglevel=error']);
  writeFileSync(stamp, key);
}

function build() {
  const stamp = 'dist/.bendbook-built';
  const files = [
    ...['shared', 'server', 'client', 'data', 'tests/truth', 'tests/bench'].flatMap((folder) => listFiles(folder)),
    'package-lock.json',
    'tsconfig.base.json',
    'tsconfig.build.json',
    'vite.config.ts',
  ].filter((file) => existsSync(file) && /\.(ts|tsx|css|html|json|mjs|svg|cjs)$/.test(file));
  const key = hash(files.flatMap((file) => [file, readFileSync(file)]));
  if (read(stamp) === key) return;
  console.log('Building ...');
  run(process.execPath, ['scripts/build.mjs']);
  mkdirSync('dist', { recursive: true });
  writeFileSync(stamp, key);
}

async function prepareBrowser() {
  const { findBrowser } = await import('./browser.mjs');
  const found = await findBrowser();
  if (found.path !== null) return;
  const text = `No browser for the browser tests: ${found.reason}\n${found.remedy}`;
  console.error(text);
  if (process.env.CI === 'true') process.exit(1);
}

function run(command, args) {
  const result = spawnSync(command, args, {
    stdio: 'inherit',
    shell: process.platform === 'win32' && command === 'npm',
  });
  if (result.status !== 0) {
    console.error(`"${command} ${args.join(' ')}" failed; see the lines above.`);
    process.exit(result.status ?? 1);
  }
}

function read(path) {
  return existsSync(path) ? readFileSync(path, 'utf8') : '';
}

function hash(parts) {
  const sum = createHash('sha256');
  for (const part of parts) sum.update(part).update('\0');
  return sum.digest('hex');
}

function listFiles(folder) {
  if (!existsSync(folder)) return [];
  return readdirSync(folder)
    .sort()
    .flatMap((name) => {
      const path = join(folder, name);
      return statSync(path).isDirectory() ? listFiles(path) : [path];
    });
}
