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
}

export const DEFAULT_PORT = 4173;

export const SERVE_USAGE = `bendbook serve [--port N] [--data DIR] [--host ADDRESS] [--max-upload-mb N] [--tile-origin URL]

  --port N            port to listen on (default ${String(DEFAULT_PORT)}, or the next free one)
  --data DIR          where recordings, results and settings are kept (default ./bendbook-data)
  --host ADDRESS      address to listen on (default 127.0.0.1: this machine only)
  --max-upload-mb N   largest file accepted (default 200)
  --tile-origin URL   origin of a map tile server that the page may load from (default none)`;

/**
 * Configuration from the arguments of `serve` (or of the server itself).
 *
 * @throws BendbookError `arguments/wrong`
 */
export function readConfiguration(args: readonly string[]): Configuration {
  let values;
  try {
    ({ values } = parseArgs({
      args: [...args],
      options: {
        port: { type: 'string' },
        data: { type: 'string', default: 'bendbook-data' },
        host: { type: 'string', default: '127.0.0.1' },
        'max-upload-mb': { type: 'string', default: '200' },
        'tile-origin': { type: 'string' },
      },
      allowPositionals: false,
    }));
  } catch (error) {
    throw wrongArguments(error instanceof Error ? error.message : String(error));
  }
  const tile = values['tile-origin'];
  return {
    host: values.host,
    port: values.port === undefined ? null : wholeNumber(values.port, '--port', 0, 65535),
    dataDir: resolve(values.data),
    maxUploadBytes: wholeNumber(values['max-upload-mb'], '--max-upload-mb', 1, 100_000) * 1_000_000,
    tileOrigin: tile === undefined ? null : originOf(tile),
  };
}

function wholeNumber(text: string, name: string, least: number, most: number): number {
  const value = Number(text);
  if (Number.isInteger(value) && value >= least && value <= most) return value;
  throw wrongArguments(`${name} takes a whole number from ${String(least)} to ${String(most)}, not "${text}"`);
}

function originOf(text: string): string {
  const url = URL.parse(text);
  if (url !== null && /^https?:$/.test(url.protocol)) return url.origin;
  throw wrongArguments(`--tile-origin takes an address like https://tiles.example, not "${text}"`);
}

export function wrongArguments(cause: string): BendbookError {
  return new BendbookError('arguments/wrong', { cause, remedy: '"bendbook --help" shows the arguments' });
}
