import { createHash } from 'node:crypto';
import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { z } from 'zod';
import { seededStream } from '../../data/synthetic/random.ts';
import { RecordingSummary } from '../../shared/schema/api.ts';
import { smallCsv } from './recordings.ts';
import { call, settled, startServer, upload, type TestServer } from './server.ts';

/** What the rounds came to. The three lists must be empty. */
export interface KillReport {
  rounds: number;
  acknowledged: number;
  deleted: number;
  /** Stored whole, though the kill came before the answer. */
  unansweredButWhole: number;
  lost: string[];
  notWhole: string[];
  halfMade: string[];
  /** How the analyses ended after the last start: done, given up after too many kills, stopped by a deletion that the kill cut short. */
  ready: number;
  givenUp: number;
  stopped: number;
}

/** Uploads under way at once. */
const CLIENTS = 4;
const LONGEST_LIFE_MS = 900;

/**
 * Kills a server with SIGKILL at random moments while clients upload and delete, and compares what is there
 * after each restart with what it had acknowledged. `seed` fixes the moments asked for.
 */
export async function killRounds(folder: string, rounds: number, seed: number): Promise<KillReport> {
  const stream = seededStream(seed);
  const report: KillReport = {
    rounds: 0,
    acknowledged: 0,
    deleted: 0,
    unansweredButWhole: 0,
    lost: [],
    notWhole: [],
    halfMade: [],
    ready: 0,
    givenUp: 0,
    stopped: 0,
  };
  /** Acknowledged and not asked to be deleted: sums by id. */
  const kept = new Map<string, string>();
  /** Asked to be deleted without an answer: may be there or not. */
  const maybe = new Set<string>();
  /** Of those, the ones still there: their analysis may have been stopped for the deletion. */
  const survivors = new Set<string>();
  let serial = 0;

  async function client(server: TestServer): Promise<void> {
    for (;;) {
      const content = smallCsv(serial++);
      const sha256 = createHash('sha256').update(content).digest('hex');
      const { recordings } = await upload(server, [{ name: `log-${String(serial)}.csv`, content }]);
      kept.set(recordings[0]!.id, sha256);
      report.acknowledged++;
      if (stream.chance(0.3)) await removeOne(server);
    }
  }

  async function removeOne(server: TestServer): Promise<void> {
    const ids = [...kept.keys()];
    const id = ids[Math.floor(stream.between(0, ids.length))]!;
    kept.delete(id);
    maybe.add(id);
    const { status } = await fetch(`${server.url}/api/recordings/${id}`, { method: 'DELETE' });
    if (status !== 204) throw new Error(`deletion of ${id} gave ${String(status)}`);
    maybe.delete(id);
    report.deleted++;
  }

  async function check(server: TestServer): Promise<void> {
    const listed = await call(z.array(RecordingSummary), `${server.url}/api/recordings`);
    const ids = new Set(listed.map(({ id }) => id));
    for (const id of kept.keys()) if (!ids.has(id)) report.lost.push(id);
    for (const { id, sha256, bytes } of listed) {
      const raw = readFileSync(join(folder, 'recordings', `${id}.raw`));
      const whole = raw.length === bytes && createHash('sha256').update(raw).digest('hex') === sha256;
      if (!whole || (kept.has(id) && kept.get(id) !== sha256)) report.notWhole.push(id);
      if (kept.has(id)) continue;
      if (maybe.delete(id)) survivors.add(id);
      else report.unansweredButWhole++;
      kept.set(id, sha256);
    }
    maybe.clear();
    const files = readdirSync(join(folder, 'recordings'));
    const allowed = new Set([...ids].flatMap((id) => [`${id}.raw`, `${id}.json`]));
    report.halfMade.push(...readdirSync(join(folder, 'incoming')), ...files.filter((name) => !allowed.has(name)));
  }

  for (; report.rounds < rounds; report.rounds++) {
    const server = await startServer(folder);
    await check(server);
    let killed = false;
    const clients = Array.from({ length: CLIENTS }, () =>
      client(server).catch((error: unknown) => {
        // Lines cut by the kill are what this is about; anything else is a failure.
        if (!killed || !/fetch failed|terminated|other side closed/.test(String(error))) throw error;
      }),
    );
    const ended = Promise.all(clients);
    await Promise.race([ended, new Promise((resolve) => setTimeout(resolve, stream.between(0, LONGEST_LIFE_MS)))]);
    killed = true;
    await server.end('SIGKILL');
    await ended;
  }
  const last = await startServer(folder);
  await check(last);
  for (const id of kept.keys()) {
    const { state, fault } = await settled(last, id);
    if (state === 'ready') report.ready++;
    else if (fault?.code === 'jobs/interrupted') report.givenUp++;
    else if (fault?.code === 'jobs/cancelled' && survivors.has(id)) report.stopped++;
    else report.notWhole.push(`${id}: ${JSON.stringify(fault)}`);
  }
  await last.end();
  return report;
}
