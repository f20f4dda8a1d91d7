import geodesic from 'geographiclib-geodesic';
import { describe, expect, it } from 'vitest';
import { layOut, planeToGeodetic } from '../../../server/clean/index.ts';

// Source of all distances and azimuths here: the package geographiclib-geodesic (C. Karney, Algorithms for geodesics,
// J. Geodesy 87, 2013), WGS84.
const wgs84 = geodesic.Geodesic.WGS84;
const RAD = Math.PI / 180;

/** A run of `count` fixes `stepM` apart that starts at a place on an azimuth and turns by `turnDeg` a step. */
function run(lat: number, lon: number, azimuth: number, stepM: number, count: number, turnDeg = 0) {
  const latDeg = new Float64Array(count);
  const lonDeg = new Float64Array(count);
  let heading = azimuth;
  [latDeg[0], lonDeg[0]] = [lat, lon];
  for (let i = 1; i < count; i++) {
    const to = wgs84.Direct(latDeg[i - 1]!, lonDeg[i - 1]!, heading, stepM);
    latDeg[i] = to.lat2!;
    lonDeg[i] = to.lon2!;
    heading = to.azi2! + turnDeg;
  }
  return { latDeg, lonDeg };
}

const wrap = (rad: number) => rad - 2 * Math.PI * Math.round(rad / (2 * Math.PI));

const PLACES: [name: string, lat: number, lon: number][] = [
  ['on the equator', 0.01, 20],
  ['in middle latitudes', 47, 8.5],
  ['in the far south', -54.8, -68.3],
  ['across the antimeridian', -16.8, 179.99],
  ['near the pole', 89.7, 30],
];

describe('the rolling plane', () => {
  it.each(PLACES)('keeps lengths to 1e-6 and directions to 1e-6 rad between neighbours, %s', (_, lat, lon) => {
    for (const azimuth of [10, 100, 225]) {
      const { latDeg, lonDeg } = run(lat, lon, azimuth, 50, 800, 0.1);
      const { xM, yM, northRad } = layOut(latDeg, lonDeg);
      for (let i = 1; i < 800; i += 7) {
        const truth = wgs84.Inverse(latDeg[i - 1]!, lonDeg[i - 1]!, latDeg[i]!, lonDeg[i]!);
        const [dx, dy] = [xM[i]! - xM[i - 1]!, yM[i]! - yM[i - 1]!];
        expect(Math.abs(Math.hypot(dx, dy) / truth.s12! - 1)).toBeLessThan(1e-6);
        // theta = north - course, at the middle of the step.
        const from = northRad[i - 1]! - truth.azi1! * RAD;
        const to = northRad[i]! - truth.azi2! * RAD;
        const middle = from + wrap(to - from) / 2;
        expect(Math.abs(wrap(Math.atan2(dy, dx) - middle))).toBeLessThan(2e-6);
      }
    }
  });

  it('adds up: a geodesic of 40 km is a straight line of its length', () => {
    for (const [, lat, lon] of PLACES.slice(0, 4)) {
      const { latDeg, lonDeg } = run(lat, lon, 60, 100, 401);
      const { xM, yM } = layOut(latDeg, lonDeg);
      const length = wgs84.Inverse(latDeg[0]!, lonDeg[0]!, latDeg[400]!, lonDeg[400]!).s12!;
      expect(Math.hypot(xM[400]!, yM[400]!)).toBeCloseTo(length, 1);
      // No curvature of its own: directions at both ends agree.
      const start = Math.atan2(yM[1]!, xM[1]!);
      const end = Math.atan2(yM[400]! - yM[399]!, xM[400]! - xM[399]!);
      expect(Math.abs(end - start)).toBeLessThan(1e-5);
    }
  });

  it('keeps north continuous when the centre moves', () => {
    const { latDeg, lonDeg } = run(60, 5, 90, 500, 300);
    const { northRad } = layOut(latDeg, lonDeg);
    for (let i = 1; i < 300; i++) expect(Math.abs(northRad[i]! - northRad[i - 1]!)).toBeLessThan(3e-4);
    // The meridians converge by the longitude times the sine of the latitude along a parallel, nearly.
    expect(northRad[299]! - northRad[0]!).toBeGreaterThan(0);
  });

  it.each(PLACES)('turns offsets in the plane back into latitude and longitude to a millimetre, %s', (_, lat, lon) => {
    const { latDeg, lonDeg } = run(lat, lon, 33, 100, 60);
    const plane = layOut(latDeg, lonDeg);
    const i = 45;
    for (const [distance, azimuth] of [
      [1, 0],
      [30, 77],
      [1000, 200],
      [1000, 310],
    ] as const) {
      const theta = plane.northRad[i]! - azimuth * RAD;
      const found = planeToGeodetic(
        { latDeg, lonDeg, northRad: plane.northRad },
        i,
        distance * Math.cos(theta),
        distance * Math.sin(theta),
      );
      const truth = wgs84.Direct(latDeg[i]!, lonDeg[i]!, azimuth, distance);
      const off = wgs84.Inverse(found.latDeg, found.lonDeg, truth.lat2!, truth.lon2!).s12!;
      // A geodesic and its image in the tangent plane differ by (d/R)^2 d / 6: 4 micrometres at 1 km.
      expect(off).toBeLessThan(1e-3);
      expect(Math.abs(found.lonDeg)).toBeLessThanOrEqual(180);
    }
  });

  it('lays out an empty and a single-fix run', () => {
    expect(layOut(new Float64Array(0), new Float64Array(0)).xM).toHaveLength(0);
    expect([...layOut(Float64Array.of(47), Float64Array.of(8)).xM]).toEqual([0]);
  });
});
