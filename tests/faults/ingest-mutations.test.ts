import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { runMutations, type Seed } from '../bench/mutations.ts';
import { syntheticSeeds } from '../bench/mutation-seeds.ts';
import { hasRecordings, RECORDINGS, SKIP_REASON } from '../support/shared.ts';

/** Mutants of each kind of seed; the full number of tens of thousands by MUTATIONS=20000. */
const COUNT = Number(process.env.MUTATIONS ?? 2600);
/** Far above what any small file takes even on a loaded machine: a hang, not slowness. */
const HANG_MS = 20_000;

const SMALL_REAL = [
  'ugly/tgj_gxtrack.kml',
  'ugly/tgj_sample.tcx',
  'ugly/npm_igc_marcourt.igc',
  'ugly/babel_fit-sample.fit',
  'ugly/gpsd_bt451.log',
  'ugly/babel_v900_basic_mode.csv',
  'ugly/tgj_apple_watch_route.gpx',
];

describe('mutated logs', () => {
  it(
    'every mutant of an invented log of every format ends in sound fixes, all counted, or in a typed refusal',
    { timeout: 3_600_000 },
    async () => {
      const report = await runMutations(syntheticSeeds(), COUNT, 1, HANG_MS);
      expect(report.failures).toEqual([]);
      // Both ends are reached, or the oracle looked at one side only.
      expect(report.read).toBeGreaterThan(0.2 * COUNT);
      expect(report.refused).toBeGreaterThan(0.05 * COUNT);
    },
  );

  it.skipIf(!hasRecordings)(
    `every mutant of a real log does so too (skipped when ${SKIP_REASON})`,
    { timeout: 3_600_000 },
    async () => {
      const seeds: Seed[] = SMALL_REAL.map((name) => ({ name, bytes: readFileSync(`${RECORDINGS}${name}`) }));
      const report = await runMutations(seeds, Math.round(COUNT / 3), 2, HANG_MS);
      expect(report.failures).toEqual([]);
    },
  );
});
