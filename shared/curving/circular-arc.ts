/** Elements of a circular curve of radius R turning through an angle, m. */
export interface ArcElements {
  readonly arcM: number;
  readonly tangentM: number;
  readonly chordM: number;
  /** Mid-ordinate of the long chord. */
  readonly versineM: number;
  /** Distance of the tangents' intersection from the curve. */
  readonly externalM: number;
}

/**
 * arc R d, tangent R tan(d/2), chord 2R sin(d/2), versine R(1 - cos(d/2)), external R(sec(d/2) - 1). Source:
 * geometry.
 */
export function arcElements(radiusM: number, deflectionRad: number): ArcElements {
  const half = deflectionRad / 2;
  return {
    arcM: radiusM * deflectionRad,
    tangentM: radiusM * Math.tan(half),
    chordM: 2 * radiusM * Math.sin(half),
    versineM: radiusM * (1 - Math.cos(half)),
    externalM: radiusM * (1 / Math.cos(half) - 1),
  };
}
