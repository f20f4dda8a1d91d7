/**
 * Distance of two near places, m: mean-latitude formula on the WGS84 ellipsoid's local radii; below 1 part in 10^4
 * over some
 * tens of kilometres, enough to lay a register onto curves. Arguments [latitude, longitude] in degrees.
 * Source: local radii of curvature M and N of WGS84.
 */
export function distanceM(a: readonly [number, number], b: readonly [number, number]): number {
  const rad = Math.PI / 180;
  const mid = ((a[0] + b[0]) / 2) * rad;
  const w = 1 - 0.0066943799901413165 * Math.sin(mid) ** 2;
  const north = ((6378137 * (1 - 0.0066943799901413165)) / (w * Math.sqrt(w))) * (b[0] - a[0]) * rad;
  const turn = ((b[1] - a[1] + 540) % 360) - 180;
  const east = (6378137 / Math.sqrt(w)) * Math.cos(mid) * turn * rad;
  return Math.hypot(north, east);
}
