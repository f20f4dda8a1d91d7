import { describe, expect, it } from 'vitest';
import { boundsOf } from '../../../server/jobs/results.ts';

const box = (...places: [lat: number, lon: number][]) =>
  boundsOf({
    count: places.length,
    latDeg: Float64Array.from(places, ([lat]) => lat),
    lonDeg: Float64Array.from(places, ([, lon]) => lon),
  });

describe('boundsOf', () => {
  it('is south, west, north, east of the places that are known', () => {
    expect(box([1, 5], [NaN, NaN], [3, 4])).toEqual([1, 4, 3, 5]);
    expect(box([-1, -5])).toEqual([-1, -5, -1, -5]);
    expect(box()).toEqual([0, 0, 0, 0]);
  });

  it('across the antimeridian stays as small as the run', () => {
    expect(box([0, 179.5], [0, -179.5])).toEqual([0, 179.5, 0, 180.5]);
    expect(box([0, -179.5], [0, 179.5])).toEqual([0, -180.5, 0, -179.5]);
    expect(box([0, 179.5], [NaN, NaN], [0, -179.5], [0, 179.5])).toEqual([0, 179.5, 0, 180.5]);
  });
});
