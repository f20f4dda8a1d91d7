import { request } from 'node:http';
import { networkInterfaces } from 'node:os';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { faultOf, jsonBody, makeFolder, removeFolders, startServer, type TestServer } from '../support/server.ts';

let server: TestServer;
beforeAll(async () => {
  server = await startServer(await makeFolder(), ['--tile-origin', 'https://tiles.example/{z}/{x}/{y}.png']);
});
afterAll(async () => {
  await server.end();
  await removeFolders();
});

/** A request with headers that fetch does not let one set. */
function raw(method: string, path: string, headers: Record<string, string>): Promise<{ status: number; body: string }> {
  const { hostname, port } = new URL(server.url);
  return new Promise((resolve, reject) => {
    const sent = request({ hostname, port, method, path, headers }, (response) => {
      let body = '';
      response.on('data', (chunk: Buffer) => (body += chunk.toString()));
      response.on('end', () => resolve({ status: response.statusCode!, body }));
    });
    sent.on('error', reject);
    sent.end();
  });
}

describe('what a browser is told', () => {
  it.each(['/', '/api/health', '/api/none'])('%s carries the content policy and no word of HTTPS', async (path) => {
    const { headers } = await fetch(server.url + path);
    const policy = headers.get('content-security-policy')!;
    const directives = new Map(policy.split(';').map((d) => [d.trim().split(' ')[0], d.trim().split(' ').slice(1)]));
    expect(directives.get('script-src')).toEqual(["'self'"]);
    expect(directives.get('style-src')).toEqual(["'self'"]);
    expect(directives.get('default-src')).toEqual(["'self'"]);
    expect(directives.get('img-src')).toEqual(["'self'", 'data:', 'blob:', 'https://tiles.example']);
    expect(directives.get('object-src')).toEqual(["'none'"]);
    expect(directives.get('frame-ancestors')).toEqual(["'none'"]);
    // On plain HTTP inside a network these two leave the page blank.
    expect(policy).not.toContain('upgrade-insecure-requests');
    expect(headers.get('strict-transport-security')).toBeNull();
    expect(headers.get('x-content-type-options')).toBe('nosniff');
    expect(headers.get('x-powered-by')).toBeNull();
  });

  it('answers of the API are not kept by caches', async () => {
    expect((await fetch(`${server.url}/api/recordings`)).headers.get('cache-control')).toBe('no-store');
  });
});

describe('other sites and other machines', () => {
  it('a page of another origin cannot change anything', async () => {
    for (const headers of [
      { Origin: 'https://elsewhere.example' },
      { Origin: 'null' },
      { 'Sec-Fetch-Site': 'cross-site' },
      { Origin: 'http://127.0.0.1:1' },
    ]) {
      const { status, body } = await raw('POST', '/api/demo', headers);
      expect({ status, code: (JSON.parse(body) as { fault: { code: string } }).fault.code }).toEqual({
        status: 403,
        code: 'http/foreign',
      });
    }
    const { host, origin } = new URL(server.url);
    expect((await raw('DELETE', '/api/recordings/none', { Host: host, Origin: origin })).status).toBe(404);
  });

  it('a foreign name that points here reads nothing', async () => {
    for (const Host of ['evil.example', '127.0.0.1.evil.example', 'localhost.evil.example:80']) {
      expect((await raw('GET', '/api/recordings', { Host })).status).toBe(403);
    }
    expect((await raw('GET', '/api/recordings', { Host: 'localhost:4173' })).status).toBe(200);
  });

  it('listens on loopback only unless told otherwise', async ({ skip }) => {
    const outside = Object.values(networkInterfaces())
      .flat()
      .find((address) => address?.internal === false && address.family === 'IPv4');
    if (outside === undefined) skip('this machine has no other address than loopback');
    await expect(fetch(`http://${outside!.address}:${new URL(server.url).port}/api/health`)).rejects.toThrow(
      'fetch failed',
    );
  });
});

describe('failures', () => {
  it('leave as a fault, never with a stack or a path of the server', async () => {
    const { hostname } = new URL(server.url);
    expect(hostname).toBe('127.0.0.1');
    const deep = `${'{"a":'.repeat(50_000)}1${'}'.repeat(50_000)}`;
    const long = { ...jsonBody('PUT', {}), body: JSON.stringify({ a: 'x'.repeat(3_000_000) }) };
    const cases: [string, number, RequestInit][] = [
      ['/api/none', 404, {}],
      ['/api/setup', 400, { ...jsonBody('PUT', {}), body: '{' }],
      ['/api/setup', 400, { ...jsonBody('PUT', {}), body: deep }],
      ['/api/setup', 413, long],
      ['/api/runs/..%2f..%2fetc%2fpasswd', 404, {}],
      ['/api/recordings/..%2f..%2fbendbook.sqlite/raw', 404, {}],
      ['/api/runs/%00', 404, {}],
      ['/api/runs/%ff', 400, {}],
      ['/api/vehicles/x', 400, jsonBody('PUT', { id: 'x' })],
    ];
    for (const [path, status, init] of cases) {
      const fault = await faultOf(server.url + path, status, init);
      expect(JSON.stringify(fault), path).not.toMatch(/\bat .*\.(js|ts):\d+|node_modules|\/server\//);
      expect(fault.cause).not.toBe('');
      expect(fault.remedy).not.toBe('');
    }
  });

  it('are not written to the log when they are the client’s', () => {
    expect(server.output().trim().split('\n')).toHaveLength(1);
  });
});
