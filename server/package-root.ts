import { existsSync, readFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

/** Folder that holds package.json and data/: the same from sources and from dist/. */
export const PACKAGE_ROOT = findRoot(dirname(fileURLToPath(import.meta.url)));

/** Name and version for reports: figures can be challenged, so exports say what made them. */
export const SOFTWARE = `Bendbook ${(JSON.parse(readFileSync(join(PACKAGE_ROOT, 'package.json'), 'utf8')) as { version: string }).version}`;

function findRoot(folder: string): string {
  return existsSync(join(folder, 'package.json')) ? folder : findRoot(dirname(folder));
}
