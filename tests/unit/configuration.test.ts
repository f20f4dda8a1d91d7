import { resolve } from 'node:path';
import { describe, expect, it } from 'vitest';
import { readConfiguration } from '../../server/configuration.ts';

describe('configuration of the server', () => {
  it('without a word: loopback, a free port from 4173 on, ./bendbook-data, 200 MB', () => {
    expect(readConfiguration([], {})).toEqual({
      host: '127.0.0.1',
      port: null,
      dataDir: resolve('bendbook-data'),
      maxUploadBytes: 200_000_000,
      tileOrigin: null,
      recover: false,
    });
  });

  it('arguments go before the environment', () => {
    const environment = {
      BENDBOOK_PORT: '5000',
      BENDBOOK_DATA: '/var/lib/bendbook',
      BENDBOOK_HOST: '::1',
      BENDBOOK_MAX_UPLOAD_MB: '20',
      BENDBOOK_TILE_ORIGIN: 'https://tiles.example/a/{z}',
    };
    expect(readConfiguration([], environment)).toMatchObject({
      host: '::1',
      port: 5000,
      dataDir: '/var/lib/bendbook',
      maxUploadBytes: 20_000_000,
      tileOrigin: 'https://tiles.example',
    });
    expect(readConfiguration(['--port', '0', '--data', '/tmp/x', '--recover'], environment)).toMatchObject({
      port: 0,
      dataDir: '/tmp/x',
      recover: true,
    });
  });

  it.each([
    [['--port', '65536']],
    [['--port', '']],
    [['--port', '80.5']],
    [['--max-upload-mb', '0']],
    [['--tile-origin', 'tiles.example']],
    [['--tile-origin', 'javascript:alert(1)']],
    [['--colour', 'red']],
    [['extra']],
  ])('%j is refused', (args) => {
    expect(() => readConfiguration(args, {})).toThrow(
      expect.objectContaining({ fault: expect.objectContaining({ code: 'arguments/wrong' }) as unknown }) as Error,
    );
  });
});
