import { afterAll, expect, it } from 'vitest';
import { killRounds } from '../support/kill-rounds.ts';
import { makeFolder, removeFolders } from '../support/server.ts';

afterAll(removeFolders);

it('a server killed 12 times while it takes uploads has every acknowledged recording, whole, and nothing half made', async () => {
  const report = await killRounds(await makeFolder(), 12, 20261201);
  expect(report.acknowledged).toBeGreaterThan(12);
  expect(report.deleted).toBeGreaterThan(0);
  expect({ lost: report.lost, notWhole: report.notWhole, halfMade: report.halfMade }).toEqual({
    lost: [],
    notWhole: [],
    halfMade: [],
  });
  expect(report.ready).toBeGreaterThan(0);
}, 240_000);
