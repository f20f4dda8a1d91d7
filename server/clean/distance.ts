const RAD_PER_DEG = Math.PI / 180;
/** Mean radius of the earth, m (IUGG 1980). Good to 0.6 %: used for plausibility only, never for results. */
const MEAN_RADIUS_M = 6371008.8;

/** Great-circle distance, m, by the haversine formula: sound for small distances, at the poles and across the antimeridian. */
export function distanceM(lat1: number, lon1: number, lat2: number, lon2: number): number {
  const sinLat = Math.sin(((lat2 - lat1) * RAD_PER_DEG) / 2);
  const sinLon = Math.sin(((lon2 - lon1) * RAD_PER_DEG) / 2);
  const a = sinLat * sinLat + Math.cos(lat1 * RAD_PER_DEG) * Math.cos(lat2 * RAD_PER_DEG) * sinLon * sinLon;
  return 2 * MEAN_RADIUS_M * Math.asin(Math.min(1, Math.sqrt(a)));
}
