import { simulateRun } from '../../data/synthetic/simulate.ts';
import { fitAlignment } from '../../server/alignment/index.ts';
import { estimateMotion } from '../../server/estimate/index.ts';
import { addNaive, emptyNaiveScore } from '../truth/naive.ts';

/** Half window of the local circle fit, s, and the largest radius it looks for, m. */
const NAIVE = [3, 500] as const;
/** Curves that give about this many fixes of a secondary line at 10 Hz. */
const FIXES_PER_CURVE = 560;

/**
 * Estimate and alignment of about `fixes` fixes at 10 Hz with course, in this process: seconds of processor time by stage, and
 * the peak of resident memory above what the run itself takes.
 */
export function benchScaling(fixes: number): void {
  const curves = Math.max(4, Math.round(fixes / FIXES_PER_CURVE));
  // The first run warms the compiler; its time is not counted.
  for (const { run } of [simulateRun('secondary', { rateHz: 10, course: true }, 11, { curves: 12 })]) {
    fitAlignment(run, estimateMotion(run).motion);
  }
  const sim = simulateRun('secondary', { rateHz: 10, course: true }, 12, { curves });
  const { count } = sim.run.fixes;
  globalThis.gc?.();
  const before = process.memoryUsage().rss;
  const begun = process.cpuUsage();
  const { motion } = estimateMotion(sim.run);
  const estimated = process.cpuUsage(begun);
  const { alignment } = fitAlignment(sim.run, motion);
  const fitted = process.cpuUsage(begun);
  const peak = process.resourceUsage().maxRSS * 1024;
  const seconds = ({ user, system }: NodeJS.CpuUsage) => (user + system) / 1e6;
  const naive = emptyNaiveScore();
  const naiveBegun = process.cpuUsage();
  addNaive(naive, sim, ...NAIVE);
  console.log(
    JSON.stringify({
      fixes: count,
      curves: alignment.curves.length,
      estimateS: round(seconds(estimated)),
      alignmentS: round(seconds(fitted) - seconds(estimated)),
      naiveS: round(seconds(process.cpuUsage(naiveBegun))),
      bytesAFix: Math.round((peak - before) / count),
    }),
  );
}

function round(value: number): number {
  return Math.round(value * 1000) / 1000;
}
