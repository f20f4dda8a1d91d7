import { existsSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

/** Folder of the checkout. */
export const ROOT = fileURLToPath(new URL('../../', import.meta.url));

/** Folder of facts and real recordings laid beside the checkout, where there is one. */
export const SHARED = fileURLToPath(new URL('../../../shared/', import.meta.url));

export const RECORDINGS = `${SHARED}recordings/`;

/** True when the real recordings can be read. */
export const hasRecordings = existsSync(`${RECORDINGS}INDEX.md`);

/** True when the check values can be read. */
export const hasCheckValues = existsSync(`${SHARED}check-values/check-values.json`);

export const SKIP_REASON = 'the folder ../shared with real recordings and check values is not beside this checkout';
