/**
 * Twist from cant run-off: dD/ds = D / L, mm/m. cantChangeMm mm; lengthM m, > 0.
 * Source: EN 13803-1:2010, 5.2 (from memory); 2.25 mm/m is a slope of 1 in 444.
 */
export function cantGradientMmPerM(cantChangeMm: number, lengthM: number): number {
  return Math.abs(cantChangeMm) / lengthM;
}
