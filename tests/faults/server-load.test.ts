import { afterAll, expect, it } from 'vitest';
import { z } from 'zod';
import { Health, RecordingSummary } from '../../shared/schema/api.ts';
import { smallCsv } from '../support/recordings.ts';
import { call, makeFolder, removeFolders, settled, startServer, upload } from '../support/server.ts';

afterAll(removeFolders);

it('50 uploads at once are all kept and analysed, and reads are answered meanwhile', async () => {
  const server = await startServer(await makeFolder());
  let uploading = true;
  let reads = 0;
  const reader = async (address: string, schema: z.ZodType) => {
    while (uploading) {
      await call(schema, `${server.url}${address}`);
      reads++;
    }
  };
  const readers = Promise.all([reader('/api/health', Health), reader('/api/recordings', z.array(RecordingSummary))]);
  const files = Array.from({ length: 50 }, (_, seed) => ({ name: `log-${String(seed)}.csv`, content: smallCsv(seed) }));
  const answers = await Promise.all(files.map((file) => upload(server, [file])));
  const ids = answers.map(({ recordings }) => recordings[0]!.id);
  for (const id of ids) expect(await settled(server, id)).toMatchObject({ state: 'ready', fault: null });
  uploading = false;
  await readers;
  expect(reads).toBeGreaterThan(10);
  const listed = await call(z.array(RecordingSummary), `${server.url}/api/recordings`);
  expect(new Set(listed.map(({ sha256 }) => sha256)).size).toBe(50);
  await server.end();
});
