import { createServer } from 'node:net';
import type { AddressInfo } from 'node:net';
import { afterAll, describe, expect, it } from 'vitest';
import { Health } from '../../shared/schema/api.ts';
import { call, makeFolder, removeFolders, startServer } from '../support/server.ts';

afterAll(removeFolders);

describe('start of the server', () => {
  it('prints one line: where it is and where its data are', async () => {
    const folder = await makeFolder();
    const server = await startServer(folder);
    expect(server.output()).toBe(`Bendbook is ready at ${server.url} (data in ${folder})\n`);
    expect(await call(Health, `${server.url}/api/health`)).toMatchObject({ ok: true });
    expect(await server.end()).toBe(0);
    expect(server.output().trim().split('\n')).toHaveLength(1);
  });

  it('on a port that is taken says so and ends', async () => {
    const other = createServer();
    await new Promise<void>((resolve) => other.listen(0, '127.0.0.1', resolve));
    const port = String((other.address() as AddressInfo).port);
    await expect(startServer(await makeFolder(), ['--port', port])).rejects.toThrow(
      `ended with 1: port ${port} on 127.0.0.1 is taken. Choose another with --port N`,
    );
    other.close();
  });

  it('with wrong arguments ends with status 2', async () => {
    await expect(startServer(await makeFolder(), ['--port', 'x'])).rejects.toThrow(
      'ended with 2: --port takes a whole number',
    );
  });
});
