import type { Alignment, Curve } from '../../shared/model/alignment.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { Passage, RunPassages } from '../../shared/model/passage.ts';
import type { Run } from '../../shared/model/run.ts';
import { planeToGeodetic } from '../clean/rolling-plane.ts';

/** Places of a passage lie at most so far apart, and there are at least so many. */
const LONGEST_STEP_M = 5;
const LEAST_STEPS = 12;
/** A channel counts as present when this share of moving fixes has it. */
const PRESENT = 0.5;

/** What an assessment needs of a run: its passage through each curve, at even steps with the tangent points among them. */
export function buildPassages(run: Run, motion: Motion, alignment: Alignment): RunPassages {
  const { count, timeS } = motion;
  return {
    run: run.id,
    lengthM: alignment.lengthM,
    durationS: count > 0 ? timeS[count - 1]! - timeS[0]! : 0,
    intervalS: run.intervalS,
    hasCourse: motion.quality.courseShare > PRESENT,
    passages: alignment.curves.map((curve) => buildPassage(run, motion, curve)),
  };
}

function buildPassage(run: Run, motion: Motion, curve: Curve): Passage {
  const stations = stationsOf(curve);
  const passage = {
    curve,
    chainageM: stations,
    speedMps: [] as number[],
    speedSdMps: [] as number[],
    accelerationMps2: [] as number[],
    elevationM: [] as (number | null)[],
  };
  let i = fixBefore(motion, stations[0]!);
  for (const s of stations) {
    while (i + 2 < motion.count && motion.chainageM[i + 1]! <= s) i++;
    const j = Math.min(motion.count - 1, i + 1);
    const span = motion.chainageM[j]! - motion.chainageM[i]!;
    const t = span > 0 ? Math.min(1, Math.max(0, (s - motion.chainageM[i]!) / span)) : 0;
    const mix = (column: ArrayLike<number>) => column[i]! + t * (column[j]! - column[i]!);
    passage.speedMps.push(mix(motion.speedMps));
    passage.speedSdMps.push(mix(motion.speedSdMps));
    passage.accelerationMps2.push(mix(motion.accelerationMps2));
    const elevation = run.fixes.elevationM === null ? NaN : mix(run.fixes.elevationM);
    passage.elevationM.push(Number.isFinite(elevation) ? elevation : null);
  }
  return {
    ...passage,
    start: placeAt(run, motion, curve.startM),
    middle: placeAt(run, motion, (curve.arcStartM + curve.arcEndM) / 2),
    end: placeAt(run, motion, curve.endM),
  };
}

/** Even steps over each of the three parts, so that every tangent point is a station. */
function stationsOf({ startM, arcStartM, arcEndM, endM }: Curve): number[] {
  const stations = [startM];
  const step = Math.min(LONGEST_STEP_M, Math.max(0.1, (endM - startM) / LEAST_STEPS));
  for (const [a, b] of [
    [startM, arcStartM],
    [arcStartM, arcEndM],
    [arcEndM, endM],
  ] as const) {
    const steps = Math.ceil((b - a) / step - 1e-9);
    for (let k = 1; k <= steps; k++) stations.push(k === steps ? b : a + ((b - a) * k) / steps);
  }
  if (stations.length === 1) stations.push(endM);
  return stations;
}

/** Last fix at or before a chainage. */
function fixBefore({ chainageM, count }: Motion, s: number): number {
  let low = 0;
  let high = count - 1;
  while (low < high) {
    const middle = (low + high + 1) >> 1;
    if (chainageM[middle]! <= s) low = middle;
    else high = middle - 1;
  }
  return low;
}

/** Latitude and longitude of the line at a chainage. */
function placeAt(run: Run, motion: Motion, s: number): [number, number] {
  const i = fixBefore(motion, s);
  const ahead = s - motion.chainageM[i]!;
  const heading = motion.headingRad[i]! + (motion.curvaturePerM[i]! * ahead) / 2;
  const { fixes } = run;
  const { latDeg, lonDeg } = planeToGeodetic(
    fixes,
    i,
    motion.xM[i]! + ahead * Math.cos(heading) - fixes.xM[i]!,
    motion.yM[i]! + ahead * Math.sin(heading) - fixes.yM[i]!,
  );
  return [latDeg, lonDeg];
}
