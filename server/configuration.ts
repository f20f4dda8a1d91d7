import { resolve } from 'node:path';
import { parseArgs } from 'node:util';
import { BendbookError } from '../shared/model/fault.ts';

export interface Configuration {
  readonly host: string;
  /** Null: 4173, or the next free one. */
  readonly port: number | null;
  readonly dataDir: string;
  readonly maxUploadBytes: number;
  readonly tileOrigin: string | null;
  /** Set a damaged database aside and list the recordings anew. */
  readonly recover: boolean;
}

export const DEFAULT_PORT = 4173;

export const SERVE_USAGE = `bendbook serve [options]

  --port N            port to listen on (default ${String(DEFAULT_PORT)}, or the next free one)
  --data DIR          where recordings, results and settings are kept (default ./bendbook-data)
  --host ADDRESS      address to listen on (default 127.0.0.1: this machine only)
  --max-upload-mb N   largest file accepted (default 200)
  --tile-origin URL   origin of a map tile server that the page may load from (default none)
  --recover           set a damaged database aside; the uploaded recordings are analysed anew

Each of these may also be set in the environment: BENDBOOK_PORT, BENDBOOK_DATA, BENDBOOK_HOST,
BENDBOOK_MAX_UPLOAD_MB, BENDBOOK_TILE_ORIGIN.`;

/**
 * Configuration from the arguments of `serve` (or of the server itself), then from the environment.
 *
 * @throws BendbookError `arguments/wrong`
 */
export function readConfiguration(args: readonly string[], environment: NodeJS.ProcessEnv): Configuration {
  let values;
  try {
    ({ values } = parseArgs({
      args: [...args],
      options: {
        port: { type: 'string' },
        data: { type: 'string' },
        host: { type: 'string' },
        'max-upload-mb': { type: 'string' },
        'tile-origin': { type: 'string' },
        recover: { type: 'boolean', default: false },
      },
      allowPositionals: false,
    }));
  } catch (error) {
    throw wrongArguments(error instanceof Error ? error.message : String(error));
  }
  const port = values.port ?? environment.BENDBOOK_PORT;
  const tile = values['tile-origin'] ?? environment.BENDBOOK_TILE_ORIGIN;
  const maxUploadMb = values['max-upload-mb'] ?? environment.BENDBOOK_MAX_UPLOAD_MB ?? '200';
  return {
    host: values.host ?? environment.BENDBOOK_HOST ?? '127.0.0.1',
    port: port === undefined ? null : wholeNumber(port, '--port', 0, 65535),
    dataDir: resolve(values.data ?? environment.BENDBOOK_DATA ?? 'bendbook-data'),
    maxUploadBytes: wholeNumber(maxUploadMb, '--max-upload-mb', 1, 100_000) * 1_000_000,
    tileOrigin: tile === undefined ? null : originOf(tile),
    recover: values.recover,
  };
}

function wholeNumber(text: string, name: string, least: number, most: number): number {
  const value = Number(text);
  if (text.trim() !== '' && Number.isInteger(value) && value >= least && value <= most) return value;
  throw wrongArguments(`${name} takes a whole number from ${String(least)} to ${String(most)}, not "${text}"`);
}

function originOf(text: string): string {
  const url = URL.canParse(text) ? new URL(text) : null;
  if (url !== null && /^https?:$/.test(url.protocol)) return url.origin;
  throw wrongArguments(`--tile-origin takes an address like https://tiles.example, not "${text}"`);
}

export function wrongArguments(cause: string): BendbookError {
  return new BendbookError('arguments/wrong', { cause, remedy: '"bendbook --help" shows the arguments' });
}
