// Finds a Chromium for the browser tests: $BROWSER_PATH, then one of the system, then the one
// that the package @sparticuz/chromium carries, unpacked once into node_modules/.cache.
import { spawnSync } from 'node:child_process';
import {
  createReadStream,
  createWriteStream,
  existsSync,
  mkdirSync,
  readFileSync,
  renameSync,
  rmSync,
  chmodSync,
} from 'node:fs';
import { dirname, join } from 'node:path';
import { pipeline } from 'node:stream/promises';
import { fileURLToPath } from 'node:url';
import { createBrotliDecompress } from 'node:zlib';

const root = join(dirname(fileURLToPath(import.meta.url)), '..');
const SYSTEM = [
  '/usr/bin/chromium',
  '/usr/bin/chromium-browser',
  '/usr/bin/google-chrome',
  '/usr/bin/google-chrome-stable',
  '/Applications/Google Chrome.app/Contents/MacOS/Google Chrome',
  '/Applications/Chromium.app/Contents/MacOS/Chromium',
  'C:/Program Files/Google/Chrome/Application/chrome.exe',
];

/** @returns {Promise<{ path: string | null, env: Record<string, string>, reason: string, remedy: string }>} */
export async function findBrowser() {
  const tried = [];
  for (const path of [process.env.BROWSER_PATH, ...SYSTEM]) {
    if (path === undefined || path === '' || !existsSync(path)) continue;
    if (starts(path, {})) return { path, env: {}, reason: '', remedy: '' };
    tried.push(`${path} does not start`);
  }
  const packaged = await unpackPackaged().catch((error) => {
    tried.push(`the packaged Chromium could not be unpacked: ${String(error)}`);
    return null;
  });
  if (packaged !== null) {
    if (starts(packaged.path, packaged.env)) return { ...packaged, reason: '', remedy: '' };
    tried.push('the packaged Chromium does not start (it is made for Linux on x64)');
  }
  return {
    path: null,
    env: {},
    reason: tried.join('; ') || 'no Chromium found',
    remedy: 'Install one (Debian: apt-get install chromium) or name one in BROWSER_PATH, then run the tests again.',
  };
}

function starts(path, env) {
  const result = spawnSync(path, ['--version', '--no-sandbox'], { env: { ...process.env, ...env }, timeout: 20000 });
  return result.status === 0;
}

async function unpackPackaged() {
  const folder = join(root, 'node_modules/@sparticuz/chromium');
  if (process.platform !== 'linux' || process.arch !== 'x64' || !existsSync(folder)) return null;
  const { version } = JSON.parse(readFileSync(join(folder, 'package.json'), 'utf8'));
  const cache = join(root, 'node_modules/.cache', `chromium-${version}`);
  const path = join(cache, 'chromium');
  if (!existsSync(path)) {
    // A name of its own and a rename at the end: two test runs at once do not see half a browser.
    const building = `${cache}.${process.pid}`;
    rmSync(building, { recursive: true, force: true });
    mkdirSync(building, { recursive: true });
    await expand(join(folder, 'bin/chromium.br'), join(building, 'chromium'));
    chmodSync(join(building, 'chromium'), 0o755);
    for (const name of ['swiftshader.tar.br', 'al2023.tar.br', 'fonts.tar.br']) {
      const archive = join(folder, 'bin', name);
      if (!existsSync(archive)) continue;
      const tar = join(building, name.replace('.br', ''));
      await expand(archive, tar);
      const into = join(building, name.split('.')[0]);
      mkdirSync(into, { recursive: true });
      spawnSync('tar', ['-xf', tar, '-C', into]);
      rmSync(tar);
    }
    try {
      renameSync(building, cache);
    } catch (error) {
      rmSync(building, { recursive: true, force: true });
      if (!existsSync(path)) throw error;
    }
  }
  const env = {};
  const libraries = join(cache, 'al2023/lib');
  if (!starts(path, {}) && existsSync(libraries)) env.LD_LIBRARY_PATH = libraries;
  if (!existsSync('/etc/fonts/fonts.conf') && existsSync(join(cache, 'fonts/fonts.conf')))
    env.FONTCONFIG_PATH = join(cache, 'fonts');
  return { path, env };
}

async function expand(from, to) {
  await pipeline(createReadStream(from), createBrotliDecompress(), createWriteStream(to));
}
