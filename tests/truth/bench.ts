import { DEFAULT_CURVES, type FamilyName } from '../../data/synthetic/families.ts';
import type { ReceiverCondition, ReceiverErrors } from '../../data/synthetic/receiver.ts';
import { asRecording, simulateRun, type SimulatedRun } from '../../data/synthetic/simulate.ts';
import { buildPassages, fitAlignment } from '../../server/alignment/index.ts';
import { cleanRecording } from '../../server/clean/index.ts';
import { estimateMotion } from '../../server/estimate/index.ts';
import { addNaive, emptyNaiveScore, type NaiveScore } from './naive.ts';
import { addRun, emptyScore, type Score } from './score.ts';

/** One line of the table: a family, a rate, a receiver. */
export interface Cell {
  readonly family: FamilyName;
  readonly rateHz: number;
  readonly course: boolean;
  readonly condition: ReceiverCondition;
  /** At least so many curves (for `straights`: so many straights). */
  readonly curves: number;
  readonly firstSeed: number;
  readonly errors?: Partial<ReceiverErrors>;
}

export interface CellResult {
  readonly cell: Cell;
  readonly score: Score;
  readonly naive: NaiveScore;
  readonly runs: number;
}

/** Half window of the baseline, s, and the family's largest radius, m. */
const NAIVE: Readonly<Record<FamilyName, readonly [halfWindowS: number, largestRadiusM: number]>> = {
  main: [4, 3000],
  secondary: [3, 500],
  tram: [2, 100],
  road: [3, 300],
  reverse: [3, 500],
  compound: [3, 1100],
  abrupt: [3, 900],
  stop: [3, 500],
  straights: [4, 3000],
};

/** Seeds of one cell: distinct for distinct cells, the same on every machine. */
function seedOf(cell: Cell, run: number): number {
  const key = [cell.family, cell.rateHz, cell.course, cell.condition].join(' ');
  let hash = 7;
  for (const letter of key) hash = (hash * 31 + letter.charCodeAt(0)) % 1_000_003;
  return cell.firstSeed * 10_000_019 + hash * 4096 + run;
}

/** Simulates runs until the cell has its curves, estimates, fits and scores them. */
export function runCell(cell: Cell): CellResult {
  const score = emptyScore();
  const naive = emptyNaiveScore();
  let made = 0;
  let runs = 0;
  while (made < cell.curves) {
    const seed = seedOf(cell, runs);
    const receiver = {
      rateHz: cell.rateHz,
      course: cell.course,
      condition: cell.condition,
      ...(cell.errors ? { errors: cell.errors } : {}),
    };
    const sim = throughCleaning(simulateRun(cell.family, receiver, seed));
    made += Math.max(1, sim.truth.curves.length || DEFAULT_CURVES[cell.family]);
    runs += 1;
    addNaive(naive, sim, ...NAIVE[cell.family]);
    try {
      const begun = performance.now();
      const estimate = estimateMotion(sim.run);
      const between = performance.now();
      const fit = fitAlignment(sim.run, estimate.motion);
      score.estimateMs += between - begun;
      score.alignmentMs += performance.now() - between;
      addRun(score, sim, { ...fit, passages: buildPassages(sim.run, fit.motion, fit.alignment) });
    } catch (error) {
      score.failures += 1;
      score.notes.push(
        `${sim.run.recordingName} failed: ${error instanceof Error ? (error.stack ?? error.message).split('\n', 2).join('') : String(error)}`,
      );
    }
  }
  return { cell, score, naive, runs };
}

/**
 * Dirty logs pass through the cleaning stage, as a file would; the truth is then looked up for the fixes that are left.
 * The longest run is kept: a log torn apart loses its other parts.
 */
function throughCleaning(sim: SimulatedRun): SimulatedRun {
  if (sim.truth.errors.outlierShare === 0 && sim.truth.errors.burstsPerHour === 0) return sim;
  const { runs } = cleanRecording(asRecording(sim.run));
  const longest = runs.reduce((best, run) => (run.fixes.count > best.fixes.count ? run : best));
  const index = Array.from(longest.fixes.row, (row) => row - 1);
  const offset = sim.truth.chainageM[index[0]!]!;
  if (offset > 1 || index.length < 0.9 * sim.run.fixes.count) {
    throw new Error(`${sim.run.recordingName}: cleaning tore the run apart (${String(runs.length)} runs)`);
  }
  return {
    run: longest,
    truth: {
      ...sim.truth,
      chainageM: Float64Array.from(index, (i) => sim.truth.chainageM[i]!),
      speedMps: Float64Array.from(index, (i) => sim.truth.speedMps[i]!),
      spoiled: Uint8Array.from(index, (i) => sim.truth.spoiled[i]!),
    },
  };
}
