// 50 uploads at once with reads meanwhile, and how fast an endless analysis is stopped: node dist/tests/bench/uploads.js
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { quantileSorted } from 'simple-statistics';
import { z } from 'zod';
import { PACKAGE_ROOT } from '../../server/package-root.ts';
import { Job, RecordingSummary } from '../../shared/schema/api.ts';
import { call, makeFolder, removeFolders, settled, startServer, upload } from '../support/server.ts';

const UPLOADS = 50;
const content = new Uint8Array(readFileSync(join(PACKAGE_ROOT, 'data/demo/rail-cab-2025-03-11.nmea')));

const server = await startServer(await makeFolder());
const readMs: number[] = [];
const stop = new AbortController();
const reader = (async () => {
  while (!stop.signal.aborted) {
    const began = performance.now();
    await call(z.array(RecordingSummary), `${server.url}/api/recordings`);
    readMs.push(performance.now() - began);
    await new Promise((resolve) => setTimeout(resolve, 20));
  }
})();
const began = performance.now();
const uploadMs: number[] = [];
const answers = await Promise.all(
  Array.from({ length: UPLOADS }, async (_, i) => {
    const answer = await upload(server, [{ name: `log-${String(i)}.nmea`, content }]);
    uploadMs.push(performance.now() - began);
    return answer.recordings[0]!.id;
  }),
);
let ready = 0;
for (const id of answers) if ((await settled(server, id)).state === 'ready') ready++;
const allMs = performance.now() - began;
stop.abort();
await reader;

const { jobId } = (await upload(server, [{ name: 'to-cancel.nmea', content }])).recordings[0]!;
while ((await call(Job, `${server.url}/api/jobs/${jobId!}`)).stage !== 'estimate');
const asked = performance.now();
const cancelled = await call(Job, `${server.url}/api/jobs/${jobId!}`, { method: 'DELETE' });
const cancelMs = performance.now() - asked;
await server.end();
await removeFolders();

const quantiles = (values: number[]) => {
  const sorted = [...values].sort((a, b) => a - b);
  return Object.fromEntries([0.5, 0.95, 1].map((p) => [`${String(p * 100)} %`, Math.round(quantileSorted(sorted, p))]));
};
console.log(
  JSON.stringify(
    {
      uploads: UPLOADS,
      megabytes: Math.round((UPLOADS * content.length) / 1e6),
      ready,
      'upload acknowledged, ms': quantiles(uploadMs),
      reads: readMs.length,
      'read of the list meanwhile, ms': quantiles(readMs),
      'all analysed, s': Math.round(allMs / 100) / 10,
      'cancelled, ms': [cancelled.state, Math.round(cancelMs)],
    },
    null,
    1,
  ),
);
