import geodesic from 'geographiclib-geodesic';
import { describe, expect, it } from 'vitest';
import { developOnEllipsoid } from '../../../data/synthetic/geodetic-path.ts';
import { arc, buildLine, clothoid, straight } from '../../../data/synthetic/line.ts';

describe('the simulated line', () => {
  it('has the coordinates of the clothoid given by the Fresnel integrals', () => {
    // Abramowitz and Stegun, Handbook of Mathematical Functions, table 7.7: C(1) and S(1), theta = pi t^2 / 2.
    const line = buildLine([clothoid(1, 0, Math.PI)]);
    const [x, y] = line.positionAt(1);
    expect(x).toBeCloseTo(0.7798934, 7);
    expect(y).toBeCloseTo(0.4382591, 7);
    expect(line.headingAt(1)).toBeCloseTo(Math.PI / 2, 12);
  });

  it('closes a full circle', () => {
    const line = buildLine([straight(10), arc(2 * Math.PI * 40, 1 / 40), straight(10)]);
    const [x, y] = line.positionAt(10 + 2 * Math.PI * 40);
    expect(Math.hypot(x - 10, y)).toBeLessThan(1e-8);
    expect(line.headingAt(line.lengthM)).toBeCloseTo(2 * Math.PI, 12);
  });

  it('names its elements, leaves out pieces without length and keeps an abrupt change of curvature', () => {
    const line = buildLine([straight(50), clothoid(0, 0, 0.01), arc(30, 0.01), clothoid(20, 0.01, 0)]);
    expect(line.elements.map((element) => element.kind)).toEqual(['straight', 'arc', 'transition']);
    expect(line.curvatureAt(49.999)).toBe(0);
    expect(line.curvatureAt(50)).toBe(0.01);
    expect(line.curvatureAt(90)).toBeCloseTo(0.005, 12);
  });
});

describe('the line developed on the ellipsoid', () => {
  it('keeps lengths, and a straight follows the geodesic of a reference library', () => {
    const line = buildLine([straight(40_000)], 0.7);
    const origin = { latDeg: 47, lonDeg: 8 };
    const path = developOnEllipsoid(line, origin);
    const [latDeg, lonDeg] = path.toGeodetic(40_000, ...line.positionAt(40_000));
    const azimuth = 90 - (0.7 * 180) / Math.PI;
    const end = geodesic.Geodesic.WGS84.Direct(47, 8, azimuth, 40_000);
    const miss = geodesic.Geodesic.WGS84.Inverse(latDeg, lonDeg, end.lat2!, end.lon2!);
    expect(miss.s12).toBeLessThan(0.002);
    // Course at the end: azimuth of the geodesic there.
    const course = ((path.northAt(40_000) - line.headingAt(40_000)) * 180) / Math.PI;
    expect(course).toBeCloseTo(end.azi2!, 5);
  });

  it('gives back plane points near the line', () => {
    const line = buildLine([straight(500), arc(900, -1 / 300), straight(500)], 2);
    const path = developOnEllipsoid(line, { latDeg: -35, lonDeg: 150 });
    for (const s of [0, 333, 777, 1899]) {
      const [x, y] = line.positionAt(s);
      const [latDeg, lonDeg] = path.toGeodetic(s, x + 12, y - 7);
      const [x2, y2] = path.toPlane(s, latDeg, lonDeg);
      expect(Math.hypot(x2 - x - 12, y2 - y + 7)).toBeLessThan(1e-6);
    }
  });
});
