import { mkdtemp, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { cleanRecording } from '../../server/clean/index.ts';
import { ingestFile } from '../../server/ingest/index.ts';

/** A file to start from. */
export interface Seed {
  readonly name: string;
  readonly bytes: Uint8Array;
}

export interface MutationReport {
  readonly runs: number;
  /** Mutants that still gave a recording, and those refused with a typed fault. */
  readonly read: number;
  readonly refused: number;
  readonly slowestMs: number;
  /** What went wrong, with the seed and number that repeat it. */
  readonly failures: string[];
}

/** Uniform integers below `n` from a seed (mulberry32, public domain). */
export function integersFrom(seed: number): (n: number) => number {
  let a = seed >>> 0;
  return (n) => {
    a = (a + 0x6d2b79f5) >>> 0;
    let t = a;
    t = Math.imul(t ^ (t >>> 15), t | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return Math.floor((((t ^ (t >>> 14)) >>> 0) / 4294967296) * n);
  };
}

/** What a field of text is replaced by. */
const FIELDS = [
  'NaN',
  '1e999',
  '-1e999',
  '',
  '-0',
  '9'.repeat(400),
  '0.' + '0'.repeat(400) + '1',
  '\u0000\u0001\u0007\u001b',
  '<script>alert(1)</script>',
  '</trkseg></trk></gpx>',
  '=HYPERLINK("x")',
  '@SUM(1)',
  '"',
  '""","',
  '&',
  '&amp;lt;',
  '<![CDATA[',
  '<!--',
  'undefined',
  '٣٤',
  '\ufeff',
  '\ud800',
  '9999-99-99T99:99:99Z',
  '1970-01-01T00:00:00Z',
  '2038-01-19T03:14:08Z',
  '90',
  '-90',
  '180',
  '-180.0000001',
];

/** One change of a copy of the bytes, chosen and placed by `pick`. */
export function mutate(bytes: Uint8Array, pick: (n: number) => number): Uint8Array {
  const n = bytes.length;
  const span = () => {
    const start = pick(n);
    return [start, Math.min(n, start + 1 + pick(Math.max(1, n >> 3)))] as const;
  };
  switch (pick(8)) {
    case 0: {
      const out = bytes.slice();
      for (let k = 1 + pick(8); k > 0; k--) out[pick(n)] = pick(256);
      return out;
    }
    case 1: {
      const out = bytes.slice();
      for (let k = 1 + pick(4); k > 0; k--) out[pick(n)]! ^= 1 << pick(8);
      return out;
    }
    case 2:
      return bytes.slice(0, pick(n));
    case 3: {
      const [start, end] = span();
      return Buffer.concat([bytes.subarray(0, start), bytes.subarray(end)]);
    }
    case 4: {
      const [start, end] = span();
      return Buffer.concat([bytes.subarray(0, end), bytes.subarray(start, end), bytes.subarray(end)]);
    }
    case 5: {
      const [start, end] = span();
      const to = pick(n);
      const rest = Buffer.concat([bytes.subarray(0, start), bytes.subarray(end)]);
      return Buffer.concat([rest.subarray(0, to), bytes.subarray(start, end), rest.subarray(to)]);
    }
    case 6: {
      const [start, end] = span();
      return Buffer.concat([bytes.subarray(0, start), new Uint8Array(end - start), bytes.subarray(end)]);
    }
    default: {
      // A field: what stands between two of the characters that part fields.
      const isEdge = (byte: number) => [44, 59, 9, 10, 13, 32, 34, 60, 62, 61, 42, 91, 93, 58].includes(byte);
      let out = bytes;
      for (let k = 1 + pick(3); k > 0; k--) {
        let start = pick(out.length);
        while (start > 0 && !isEdge(out[start - 1]!)) start--;
        let end = start;
        while (end < out.length && !isEdge(out[end]!)) end++;
        out = Buffer.concat([out.subarray(0, start), Buffer.from(FIELDS[pick(FIELDS.length)]!), out.subarray(end)]);
      }
      return out;
    }
  }
}

/** What a result must hold to be called right; the first thing that it does not. */
async function check(path: string): Promise<{ read: boolean; wrong: string | null }> {
  const { recordings, refused } = await ingestFile(path, { name: 'mutant', maxFixes: 200_000 });
  if (recordings.length === 0 && refused.length === 0) return { read: false, wrong: 'neither read nor refused' };
  for (const { fault } of refused) {
    if (!fault.code.startsWith('ingest/') || fault.cause === '' || fault.remedy === '') {
      return { read: false, wrong: `fault without code, cause or remedy: ${JSON.stringify(fault)}` };
    }
    if (fault.place.file === undefined) return { read: false, wrong: 'fault without a place' };
    if (/is not a function|is not defined|undefined|Cannot read|of null|Invalid (?:array|typed)/.test(fault.cause)) {
      return { read: false, wrong: `a programming error shows as a fault: ${fault.cause}` };
    }
  }
  for (const recording of recordings) {
    const { fixes } = recording;
    for (let i = 0; i < fixes.count; i++) {
      const place = Math.abs(fixes.latDeg[i]!) <= 90 && Math.abs(fixes.lonDeg[i]!) <= 180;
      const speed = fixes.speedMps === null ? NaN : fixes.speedMps[i]!;
      const course = fixes.courseRad === null ? NaN : fixes.courseRad[i]!;
      if (!place) return { read: true, wrong: `fix ${i} has no valid place` };
      if (speed < 0 || Math.abs(speed) === Infinity) return { read: true, wrong: `fix ${i} has speed ${speed}` };
      if (course < 0 || course >= 2 * Math.PI + 1e-6) return { read: true, wrong: `fix ${i} has course ${course}` };
      if (Math.abs(fixes.utcS[i]!) === Infinity) return { read: true, wrong: `fix ${i} has an infinite time` };
    }
    const { runs, findings } = cleanRecording(recording);
    const kept = runs.reduce((total, run) => total + run.fixes.count, 0);
    const dropped = findings.reduce((total, finding) => total + finding.dropped, 0);
    if (kept + dropped !== fixes.count)
      return { read: true, wrong: `${fixes.count} fixes, ${kept} kept, ${dropped} counted` };
    for (const run of runs) {
      for (let i = 0; i < run.fixes.count; i++) {
        const sound = Number.isFinite(run.fixes.xM[i]! + run.fixes.yM[i]! + run.fixes.northRad[i]!);
        if (!sound) return { read: true, wrong: `run ${run.id} has no plane at fix ${i}` };
        if (i > 0 && !(run.fixes.timeS[i]! > run.fixes.timeS[i - 1]!)) {
          return { read: true, wrong: `run ${run.id} has no rising time at fix ${i}` };
        }
      }
    }
  }
  return { read: recordings.length > 0, wrong: null };
}

/**
 * Reads `count` mutants of the seeds, each by one to three changes, and checks every result: a recording whose values
 * are valid and whose every fix is in a run or counted, or a typed refusal; never anything thrown, never longer than
 * `limitMs`.
 */
export async function runMutations(
  seeds: readonly Seed[],
  count: number,
  seed: number,
  limitMs: number,
): Promise<MutationReport> {
  const folder = await mkdtemp(join(tmpdir(), 'bendbook-mutants-'));
  const path = join(folder, 'mutant');
  const failures: string[] = [];
  let [read, refused, slowestMs] = [0, 0, 0];
  try {
    for (let i = 0; i < count; i++) {
      const origin = seeds[i % seeds.length]!;
      const pick = integersFrom(seed * 1_000_003 + i);
      let bytes = origin.bytes;
      for (let k = 1 + pick(3); k > 0 && bytes.length > 0; k--) bytes = mutate(bytes, pick);
      await writeFile(path, bytes);
      const start = performance.now();
      const label = `${origin.name}, seed ${seed}, mutant ${i}`;
      try {
        const result = await check(path);
        if (result.wrong !== null) failures.push(`${label}: ${result.wrong}`);
        if (result.read) read++;
        else refused++;
      } catch (error) {
        failures.push(`${label}: threw ${error instanceof Error ? (error.stack ?? error.message) : String(error)}`);
      }
      const took = performance.now() - start;
      slowestMs = Math.max(slowestMs, took);
      if (took > limitMs) failures.push(`${label}: took ${took.toFixed(0)} ms`);
    }
  } finally {
    await rm(folder, { recursive: true });
  }
  return { runs: count, read, refused, slowestMs, failures };
}
