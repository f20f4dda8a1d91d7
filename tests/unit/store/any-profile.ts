import type { Profile } from '../../../shared/model/motion.ts';

/** A profile of `count` places with a different number, or NaN, in every cell. */
export function anyProfile(count: number): Profile {
  let next = 0.5;
  const fill = <T extends Float64Array | Float32Array | Uint8Array>(column: T): T => {
    for (let i = 0; i < column.length; i++) column[i] = next++;
    return column;
  };
  const floats = () => fill(new Float32Array(count));
  const elevationM = floats();
  elevationM[0] = NaN;
  return {
    count,
    spacingM: 2.5,
    chainageM: fill(new Float64Array(count)),
    timeS: fill(new Float64Array(count)),
    latDeg: fill(new Float64Array(count)),
    lonDeg: fill(new Float64Array(count)),
    elevationM,
    speedMps: floats(),
    speedSdMps: floats(),
    courseRad: floats(),
    accelerationMps2: floats(),
    curvaturePerM: floats(),
    curvatureSdPerM: floats(),
    speedCurvatureCorrelation: floats(),
    fittedCurvaturePerM: floats(),
    positionSdM: floats(),
    observed: fill(new Uint8Array(count)),
  };
}
