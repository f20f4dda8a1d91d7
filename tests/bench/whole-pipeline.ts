import { mkdtemp, rm, stat, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { assessRun } from '../../shared/assess/index.ts';
import { resolveSetup, BUILT_IN, DEFAULT_SETUP } from '../../server/catalogue.ts';
import { analyseFile, type Progress } from '../../server/pipeline.ts';
import { nmeaText } from './ingest.ts';

/** A whole NMEA file of `fixes` fixes from bytes to verdicts: seconds by stage and peak memory. */
export async function benchPipeline(fixes: number): Promise<void> {
  const folder = await mkdtemp(join(tmpdir(), 'bendbook-bench-'));
  try {
    const path = join(folder, 'long.nmea');
    await writeFile(path, nmeaText(fixes));
    const { size } = await stat(path);
    const began = performance.now();
    const entered = new Map<Progress['stage'], number>();
    const analysis = await analyseFile(path, {
      name: 'long.nmea',
      onProgress({ stage }) {
        if (!entered.has(stage)) entered.set(stage, performance.now());
      },
    });
    const analysed = performance.now();
    const setup = resolveSetup(DEFAULT_SETUP.rail, { ...BUILT_IN, registers: [] });
    const runs = analysis.recordings.flatMap((recording) => recording.runs);
    const curves = runs.reduce((sum, run) => sum + assessRun(run.passages, setup).curves.length, 0);
    const assessed = performance.now();
    const stages = [...entered.entries(), ['assess', analysed] as const];
    const parts = stages.map(([stage, at], i) => {
      const until = i + 1 < stages.length ? stages[i + 1]![1] : assessed;
      return `${stage} ${((until - at) / 1000).toFixed(2)} s`;
    });
    console.log(
      `${String(fixes)} fixes, ${(size / 1e6).toFixed(1)} MB: ${((assessed - began) / 1000).toFixed(2)} s in all ` +
        `(${parts.join(', ')}); ${String(runs.length)} runs, ${String(curves)} curves; ` +
        `peak ${(process.resourceUsage().maxRSS / 1024).toFixed(0)} MB`,
    );
  } finally {
    await rm(folder, { recursive: true, force: true });
  }
}
