import type { Alignment } from '../../shared/model/alignment.ts';
import type { Motion, Profile } from '../../shared/model/motion.ts';
import { FLAG, type Run } from '../../shared/model/run.ts';
import { planeToGeodetic } from '../clean/rolling-plane.ts';

/** Fixes farther apart than this leave the line between them unobserved, s. */
const UNOBSERVED_AFTER_S = 6;
/** Variance factors beyond this mark a burst. */
const BURST_FACTOR = 6;

/**
 * Motion at equal steps of chainage. Between two fixes position and heading follow the cubic through both
 * headings, everything else is linear; a standstill collapses into one place.
 *
 * @param spacingM step, m, positive
 */
export function buildProfile(run: Run, motion: Motion, alignment: Alignment, spacingM = 5): Profile {
  const { fixes } = run;
  const lengthM = motion.count > 0 ? motion.chainageM[motion.count - 1]! : 0;
  const count = Math.max(1, Math.floor(lengthM / spacingM) + 1);
  const f32 = () => new Float32Array(count);
  const profile = {
    count,
    spacingM,
    chainageM: new Float64Array(count),
    timeS: new Float64Array(count),
    latDeg: new Float64Array(count),
    lonDeg: new Float64Array(count),
    elevationM: f32().fill(NaN),
    speedMps: f32(),
    speedSdMps: f32(),
    courseRad: f32(),
    accelerationMps2: f32(),
    curvaturePerM: f32(),
    curvatureSdPerM: f32(),
    speedCurvatureCorrelation: f32(),
    fittedCurvaturePerM: f32(),
    positionSdM: f32(),
    observed: new Uint8Array(count),
  };
  let i = 0;
  let e = 0;
  const { elements } = alignment;
  for (let k = 0; k < count; k++) {
    const s = k * spacingM;
    // The last fix at or before s whose successor lies beyond: a standstill is passed over.
    while (i + 2 < motion.count && motion.chainageM[i + 1]! <= s) i++;
    const j = Math.min(motion.count - 1, i + 1);
    const span = motion.chainageM[j]! - motion.chainageM[i]!;
    const t = span > 0 ? Math.min(1, Math.max(0, (s - motion.chainageM[i]!) / span)) : 0;
    const mix = (column: ArrayLike<number>) => column[i]! + t * (column[j]! - column[i]!);
    profile.chainageM[k] = s;
    profile.timeS[k] = mix(motion.timeS);
    profile.speedMps[k] = mix(motion.speedMps);
    profile.speedSdMps[k] = mix(motion.speedSdMps);
    profile.accelerationMps2[k] = mix(motion.accelerationMps2);
    profile.curvaturePerM[k] = mix(motion.curvaturePerM);
    profile.curvatureSdPerM[k] = mix(motion.curvatureSdPerM);
    profile.speedCurvatureCorrelation[k] = mix(motion.speedCurvatureCorrelation);
    profile.positionSdM[k] = mix(motion.positionSdM);
    if (fixes.elevationM !== null) profile.elevationM[k] = mix(fixes.elevationM);
    const nearest = t < 0.5 ? i : j;
    const [x, y] = hermite(motion, i, j, t, span);
    const place = planeToGeodetic(fixes, nearest, x - fixes.xM[nearest]!, y - fixes.yM[nearest]!);
    profile.latDeg[k] = place.latDeg;
    profile.lonDeg[k] = place.lonDeg;
    const course = mix(fixes.northRad) - mix(motion.headingRad);
    profile.courseRad[k] = course - 2 * Math.PI * Math.floor(course / (2 * Math.PI));
    while (e + 1 < elements.length && elements[e]!.endM < s) e++;
    const element = elements[e];
    if (element !== undefined && element.endM > element.startM) {
      const share = Math.min(1, Math.max(0, (s - element.startM) / (element.endM - element.startM)));
      profile.fittedCurvaturePerM[k] =
        element.startCurvaturePerM + share * (element.endCurvaturePerM - element.startCurvaturePerM);
    }
    const apart = motion.timeS[j]! - motion.timeS[i]!;
    const burst = motion.positionVarianceFactor[nearest]! > BURST_FACTOR;
    const held = (fixes.flags[nearest]! & FLAG.HELD) !== 0;
    const standing = (fixes.flags[i]! & FLAG.STOPPED) !== 0;
    profile.observed[k] = (apart > UNOBSERVED_AFTER_S && !standing) || burst || held ? 0 : 1;
  }
  return profile;
}

/** Position between two fixes by the cubic with both headings as its tangents. */
function hermite(motion: Motion, i: number, j: number, t: number, span: number): [number, number] {
  const { xM, yM, headingRad } = motion;
  const t2 = t * t;
  const t3 = t2 * t;
  const a = 2 * t3 - 3 * t2 + 1;
  const b = (t3 - 2 * t2 + t) * span;
  const c = -2 * t3 + 3 * t2;
  const d = (t3 - t2) * span;
  return [
    a * xM[i]! + b * Math.cos(headingRad[i]!) + c * xM[j]! + d * Math.cos(headingRad[j]!),
    a * yM[i]! + b * Math.sin(headingRad[i]!) + c * yM[j]! + d * Math.sin(headingRad[j]!),
  ];
}
