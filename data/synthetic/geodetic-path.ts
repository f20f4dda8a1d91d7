import { lastNotAbove, type SyntheticLine } from './line.ts';

/** WGS84 (NGA.STND.0036, 2014, table 3.1). */
const SEMI_MAJOR_M = 6378137;
const ECCENTRICITY_SQUARED = 6.69437999014e-3;
const DEGREE = Math.PI / 180;
const STEP_M = 25;

export interface Origin {
  readonly latDeg: number;
  readonly lonDeg: number;
}

/** A line developed onto the ellipsoid: its plane rolls along it without turning about the vertical. */
export interface GeodeticPath {
  /** Direction of true north in the line's plane, radians counter-clockwise from +x. */
  northAt(chainageM: number): number;
  /** Latitude and longitude of a plane point lying within some tens of metres of the given chainage. */
  toGeodetic(chainageM: number, xM: number, yM: number): readonly [latDeg: number, lonDeg: number];
  toPlane(chainageM: number, latDeg: number, lonDeg: number): readonly [xM: number, yM: number];
}

/** Radii of curvature along the meridian and across it, m: M = a(1-e^2)/W^3, N = a/W, W^2 = 1-e^2 sin^2(lat). */
function curvatureRadii(latRad: number): readonly [meridianM: number, normalM: number] {
  const w2 = 1 - ECCENTRICITY_SQUARED * Math.sin(latRad) ** 2;
  const w = Math.sqrt(w2);
  return [(SEMI_MAJOR_M * (1 - ECCENTRICITY_SQUARED)) / (w2 * w), SEMI_MAJOR_M / w];
}

/**
 * Rolls the plane of the line along the ellipsoid: with course c clockwise from north,
 * dlat/ds = cos c / M, dlon/ds = sin c / (N cos lat), and north turns by
 * dnorth/ds = sin c tan(lat) / N (meridian convergence), so that geodesic curvature equals plane
 * curvature and the geometry of the line is true on the ground. Fourth-order Runge-Kutta steps of 25 m.
 *
 * @param northRad direction of true north at chainage 0 in the plane of the line
 */
export function developOnEllipsoid(line: SyntheticLine, origin: Origin, northRad = Math.PI / 2): GeodeticPath {
  const count = Math.max(1, Math.ceil(line.lengthM / STEP_M));
  const step = line.lengthM / count;
  const s = new Float64Array(count + 1);
  const lat = new Float64Array(count + 1);
  const lon = new Float64Array(count + 1);
  const north = new Float64Array(count + 1);
  const x = new Float64Array(count + 1);
  const y = new Float64Array(count + 1);
  lat[0] = origin.latDeg * DEGREE;
  lon[0] = origin.lonDeg * DEGREE;
  north[0] = northRad;

  function slope(chainageM: number, latRad: number, northNow: number): readonly [number, number, number] {
    const course = northNow - line.headingAt(chainageM);
    const [meridianM, normalM] = curvatureRadii(latRad);
    return [
      Math.cos(course) / meridianM,
      Math.sin(course) / (normalM * Math.cos(latRad)),
      (Math.sin(course) * Math.tan(latRad)) / normalM,
    ];
  }

  for (let i = 0; i <= count; i += 1) {
    s[i] = i * step;
    const [px, py] = line.positionAt(s[i]!);
    x[i] = px;
    y[i] = py;
    if (i === count) break;
    const at = s[i]!;
    const k1 = slope(at, lat[i]!, north[i]!);
    const k2 = slope(at + step / 2, lat[i]! + (k1[0] * step) / 2, north[i]! + (k1[2] * step) / 2);
    const k3 = slope(at + step / 2, lat[i]! + (k2[0] * step) / 2, north[i]! + (k2[2] * step) / 2);
    const k4 = slope(at + step, lat[i]! + k3[0] * step, north[i]! + k3[2] * step);
    lat[i + 1] = lat[i]! + (step / 6) * (k1[0] + 2 * k2[0] + 2 * k3[0] + k4[0]);
    lon[i + 1] = lon[i]! + (step / 6) * (k1[1] + 2 * k2[1] + 2 * k3[1] + k4[1]);
    north[i + 1] = north[i]! + (step / 6) * (k1[2] + 2 * k2[2] + 2 * k3[2] + k4[2]);
  }

  return {
    northAt(chainageM) {
      const i = Math.min(lastNotAbove(s, chainageM), count - 1);
      return north[i]! + ((north[i + 1]! - north[i]!) * (chainageM - s[i]!)) / step;
    },
    toGeodetic(chainageM, xM, yM) {
      const i = lastNotAbove(s, chainageM);
      const dx = xM - x[i]!;
      const dy = yM - y[i]!;
      const northing = dx * Math.cos(north[i]!) + dy * Math.sin(north[i]!);
      const easting = dx * Math.sin(north[i]!) - dy * Math.cos(north[i]!);
      const [meridianM, normalM] = curvatureRadii(lat[i]!);
      return [(lat[i]! + northing / meridianM) / DEGREE, (lon[i]! + easting / (normalM * Math.cos(lat[i]!))) / DEGREE];
    },
    toPlane(chainageM, latDeg, lonDeg) {
      const i = lastNotAbove(s, chainageM);
      const [meridianM, normalM] = curvatureRadii(lat[i]!);
      const northing = (latDeg * DEGREE - lat[i]!) * meridianM;
      const easting = (lonDeg * DEGREE - lon[i]!) * normalM * Math.cos(lat[i]!);
      return [
        x[i]! + northing * Math.cos(north[i]!) + easting * Math.sin(north[i]!),
        y[i]! + northing * Math.sin(north[i]!) - easting * Math.cos(north[i]!),
      ];
    },
  };
}
