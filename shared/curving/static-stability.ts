/**
 * Static stability factor T / (2 h): the lateral acceleration in g at which a rigid vehicle on a level road would lift
 * its inner wheels. A caution, never a clearance: roll, tyres, load and dynamics bring the real threshold lower
 * (about 25 % for articulated lorries, SAE 2003-01-3385, read).
 * trackWidthM and centreOfGravityHeightM in m. Source: NHTSA definition (read).
 */
export function staticStabilityFactor(trackWidthM: number, centreOfGravityHeightM: number): number {
  return trackWidthM / (2 * centreOfGravityHeightM);
}
