import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { faultOf, makeFolder, removeFolders, startServer, type TestServer } from '../support/server.ts';

let server: TestServer;
beforeAll(async () => {
  server = await startServer(await makeFolder());
});
afterAll(async () => {
  await server.end();
  await removeFolders();
});

describe('the built page', () => {
  it('is served at every address that is not of the API, and asked for again each time', async () => {
    const home = await fetch(`${server.url}/`);
    expect(home.status).toBe(200);
    expect(home.headers.get('content-type')).toContain('text/html');
    expect(home.headers.get('cache-control')).toBe('no-cache');
    const html = await home.text();
    for (const path of ['/runs/any/curves/3', '/index.html']) {
      const deep = await fetch(server.url + path);
      expect({ path, status: deep.status, html: await deep.text() }).toEqual({ path, status: 200, html });
    }
  });

  it('has its parts kept by browsers, for their names change with their content', async () => {
    const html = await (await fetch(`${server.url}/`)).text();
    const parts = [...html.matchAll(/(?:src|href)="(\/assets\/[^"]+)"/g)].map(([, path]) => path!);
    expect(parts.length).toBeGreaterThan(0);
    for (const path of parts) {
      const part = await fetch(server.url + path);
      expect(part.status).toBe(200);
      expect(part.headers.get('cache-control')).toBe('public, max-age=31536000, immutable');
      expect(part.headers.get('content-type')).not.toContain('text/html');
    }
    expect((await faultOf(`${server.url}/assets/none.js`, 404)).code).toBe('http/not-found');
  });

  it('carries no script or style within itself, as the policy asks', async () => {
    const html = await (await fetch(`${server.url}/`)).text();
    expect(html).not.toMatch(/<script(?![^>]*\bsrc=)[^>]*>|<style|\sstyle="|\son\w+="/i);
  });
});
