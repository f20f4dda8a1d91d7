import { wrapAngle } from './motion-filter.ts';
import type { Observations } from './observations.ts';
import { USE } from './observations.ts';

/** A position this far from the line between its neighbours, and alone in it, is an outlier, m. */
const SPIKE_M = 4;
/** Share of the five fixes' second differences that a single displaced fix must explain. */
const SPIKE_SHARE = 0.8;
/** A change of lateral or longitudinal acceleration that comes and goes within one step, m/s^2. */
const LATERAL_SPIKE_MPS2 = 7;
const ALONG_SPIKE_MPS2 = 4.5;
/** Steps shorter than this make spikes of mere noise, longer ones may hold a real manoeuvre, s. */
const SHORTEST_STEP_S = 0.15;
const LONGEST_STEP_S = 2.5;
const SUSPECT_FACTOR = 100;

/** White position error taken for granted before the noise is known, m. */
const ASSUMED_WHITE_M = 1;

/** How many positions and how many Doppler readings are suspect. */
export interface Suspects {
  readonly positions: number;
  readonly doppler: number;
}

/**
 * Enlarges the variance of what the raw columns alone show to be wrong, before any filter has followed it: single displaced
 * positions, and Doppler readings between which the vehicle would have turned or braked for one step as no vehicle can.
 */
export function screen(observations: Observations): Suspects {
  return { positions: screenPositions(observations), doppler: screenDoppler(observations) };
}

function screenPositions(o: Observations): number {
  const { count, timeS, xM, yM, use, positionFactor } = o;
  let found = 0;
  for (let i = 2; i + 2 < count; i++) {
    const step = timeS[i]! - timeS[i - 1]!;
    if (timeS[i + 2]! - timeS[i - 2]! > 6 * step || step > LONGEST_STEP_S) continue;
    if ((use[i - 2]! & use[i - 1]! & use[i]! & use[i + 1]! & use[i + 2]! & USE.POSITION) === 0) continue;
    const dx = secondDifference(timeS, xM, i);
    const dy = secondDifference(timeS, yM, i);
    const size = Math.hypot(dx, dy);
    if (size < SPIKE_M) continue;
    const bx = secondDifference(timeS, xM, i - 1);
    const by = secondDifference(timeS, yM, i - 1);
    const ax = secondDifference(timeS, xM, i + 1);
    const ay = secondDifference(timeS, yM, i + 1);
    // A fix displaced by s shows as (-s/2, s, -s/2) in the three second differences.
    const sx = (dx - 0.5 * (bx + ax)) / 1.5;
    const sy = (dy - 0.5 * (by + ay)) / 1.5;
    const explained = 1.5 * (sx * sx + sy * sy);
    const total = dx * dx + dy * dy + bx * bx + by * by + ax * ax + ay * ay;
    const spike = Math.hypot(sx, sy);
    if (spike < SPIKE_M + 4 * ASSUMED_WHITE_M || explained < SPIKE_SHARE * total) continue;
    positionFactor[i]! *= Math.max(1, (spike / ASSUMED_WHITE_M) ** 2);
    found++;
  }
  return found;
}

/** Distance of value i from the line between its neighbours in time. */
function secondDifference(timeS: Float64Array, values: Float64Array, i: number): number {
  const u = (timeS[i]! - timeS[i - 1]!) / (timeS[i + 1]! - timeS[i - 1]!);
  return values[i]! - values[i - 1]! - u * (values[i + 1]! - values[i - 1]!);
}

function screenDoppler(o: Observations): number {
  const { count, timeS, use, speedMps, courseRad, northRad, dopplerFactor, positionFactor } = o;
  if (speedMps === null) return 0;
  let found = 0;
  // Lateral and longitudinal acceleration of the steps (i - 2, i - 1), (i - 1, i) and (i, i + 1).
  const lateral = [0, 0, 0];
  const along = [0, 0, 0];
  for (let i = 1; i < count; i++) {
    const step = timeS[i]! - timeS[i - 1]!;
    const both = use[i]! & use[i - 1]!;
    const usable = step >= SHORTEST_STEP_S && step <= LONGEST_STEP_S;
    lateral.shift();
    along.shift();
    const mean = (speedMps[i]! + speedMps[i - 1]!) / 2;
    const turned =
      usable && courseRad !== null && (both & USE.COURSE) !== 0
        ? wrapAngle(northRad[i]! - courseRad[i]! - northRad[i - 1]! + courseRad[i - 1]!)
        : 0;
    lateral.push((turned * mean) / step);
    along.push(usable && (both & USE.SPEED) !== 0 ? (speedMps[i]! - speedMps[i - 1]!) / step : 0);
    if (i < 3) continue;
    if (isSpike(lateral, LATERAL_SPIKE_MPS2) || isSpike(along, ALONG_SPIKE_MPS2)) {
      // Position and velocity come from one solution of the receiver: where one leaps the other is not to be relied on.
      for (let k = i - 2; k < i; k++) {
        dopplerFactor[k] = Math.max(dopplerFactor[k]!, SUSPECT_FACTOR);
        positionFactor[k] = Math.max(positionFactor[k]!, SUSPECT_FACTOR);
      }
      found++;
    }
  }
  return found;
}

/** Is the middle of three steps beyond the limit, and neither neighbour of its sign half as large? */
function isSpike(steps: readonly number[], limit: number): boolean {
  const [before, middle, after] = steps as [number, number, number];
  const half = 0.5 * middle * middle;
  return Math.abs(middle) > limit && before * middle < half && after * middle < half;
}
