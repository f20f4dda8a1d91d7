/** Track gauge and the customary cant base (distance of the wheel contact circles), mm. */
export interface Gauge {
  readonly gaugeMm: number;
  readonly cantBaseMm: number;
  /** Range in use, mm. */
  readonly range: readonly [low: number, high: number];
}

/**
 * Customary cant bases by gauge. All from memory (1435 -> 1500 also follows from the printed 11.8 and 153 mm per m/s^2,
 * read); railways differ, so every screen lets the user give their own.
 */
export const GAUGES: readonly Gauge[] = [
  { gaugeMm: 1000, cantBaseMm: 1055, range: [1050, 1070] },
  { gaugeMm: 1067, cantBaseMm: 1127, range: [1120, 1130] },
  { gaugeMm: 1435, cantBaseMm: 1500, range: [1490, 1512] },
  { gaugeMm: 1520, cantBaseMm: 1580, range: [1580, 1600] },
  { gaugeMm: 1600, cantBaseMm: 1664, range: [1660, 1675] },
  { gaugeMm: 1668, cantBaseMm: 1733, range: [1730, 1740] },
  { gaugeMm: 1676, cantBaseMm: 1750, range: [1740, 1750] },
];

/**
 * Cant base for a gauge, mm: the customary value, or gauge + 65 mm (one rail head) for a gauge not in the table.
 * Source: table above (from memory).
 */
export function cantBaseForGaugeMm(gaugeMm: number): number {
  return GAUGES.find((g) => Math.abs(g.gaugeMm - gaugeMm) <= 1)?.cantBaseMm ?? gaugeMm + 65;
}
