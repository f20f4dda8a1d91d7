import type { FindingLog } from '../ingest/finding-log.ts';
import { sampledQuantile } from './quantiles.ts';
import type { MovingColumns } from './standing.ts';

/** Factors by which a speed is wrong when its unit was taken for metres a second, or the reverse. */
const UNIT_FACTORS: readonly (readonly [number, string])[] = [
  [3.6, 'km/h, not m/s'],
  [1 / 0.44704, 'mph, not m/s'],
  [3600 / 1852, 'kn, not m/s'],
  [1 / 3.6, 'm/s, not km/h'],
  [0.44704, 'm/s, not mph'],
  [1852 / 3600, 'm/s, not kn'],
  [1.609344, 'mph, not km/h'],
  [1 / 1.609344, 'km/h, not mph'],
  [1.852, 'kn, not km/h'],
  [1 / 1.852, 'km/h, not kn'],
  [100, 'cm/s, not m/s'],
  [1000, 'mm/s, not m/s'],
];

/** Window over which positions give a speed, s, and the least way in it, m. */
const WINDOW_S = 6;
const LEAST_WAY_M = 40;
const LEAST_WINDOWS = 5;

/**
 * Median ratio of the speed channel to the speed of the positions over windows of some seconds while moving; NaN
 * when there are too few windows.
 */
function ratioToPositions({ count, timeS, xM, yM, speedMps }: MovingColumns): { ratio: number; spread: number } {
  const ratios = new Float64Array(count).fill(NaN);
  let windows = 0;
  let a = 0;
  while (a < count) {
    let b = a;
    let way = 0;
    let driven = 0;
    let whole = true;
    while (b < count - 1 && (timeS[b]! - timeS[a]! < WINDOW_S || way < LEAST_WAY_M)) {
      const dt = timeS[b + 1]! - timeS[b]!;
      if (dt > 10 || timeS[b]! - timeS[a]! > 10 * WINDOW_S) {
        whole = false;
        break;
      }
      way += Math.hypot(xM[b + 1]! - xM[b]!, yM[b + 1]! - yM[b]!);
      driven += (dt * (speedMps![b]! + speedMps![b + 1]!)) / 2;
      b++;
    }
    if (whole && way >= LEAST_WAY_M && way / (timeS[b]! - timeS[a]!) > 3 && Number.isFinite(driven)) {
      ratios[windows++] = driven / way;
    }
    a = Math.max(b, a + 1);
  }
  if (windows < LEAST_WINDOWS) return { ratio: NaN, spread: NaN };
  const at = (share: number) => sampledQuantile(windows, share, (i) => ratios[i]!);
  return { ratio: at(0.5), spread: at(0.75) - at(0.25) };
}

/**
 * Checks the speed channel against the positions. A unit taken wrongly shows as a constant factor (3.6, 0.514,
 * ...): corrected and noted. A channel that follows neither is dropped and noted.
 * @returns The column to use: the given one, a corrected copy, or null.
 */
export function checkSpeed(columns: MovingColumns, file: string, log: FindingLog): Float32Array | null {
  const { speedMps, count } = columns;
  if (speedMps === null) return null;
  const { ratio, spread } = ratioToPositions(columns);
  if (Number.isNaN(ratio) || (ratio > 0.8 && ratio < 1.25)) return speedMps;
  const unit = UNIT_FACTORS.reduce((best, candidate) =>
    Math.abs(Math.log(ratio / candidate[0])) < Math.abs(Math.log(ratio / best[0])) ? candidate : best,
  );
  if (Math.abs(ratio / unit[0] - 1) < 0.08 && spread < 0.25 * ratio) {
    log.note(
      'speed-unit',
      'warning',
      () =>
        `The speed channel is ${ratio.toFixed(2)} times the speed of the positions: it is in ${unit[1]}, and was corrected`,
      { file },
      0,
      count,
    );
    return speedMps.map((speed) => speed / unit[0]);
  }
  log.note(
    'speed-dropped',
    'warning',
    () => `The speed channel does not agree with the positions (${ratio.toFixed(2)} times their speed): not used`,
    { file },
    0,
    count,
  );
  return null;
}
