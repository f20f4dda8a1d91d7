/**
 * A speed rounded down to the posting step, km/h. The tolerance (a millionth of a step) keeps an exact multiple from
 * falling a whole step through rounding of the arithmetic.
 * Source: advisory speeds are posted in steps of 5 mph or 10 km/h (MUTCD 2C, read); rounding down is this tool's rule.
 */
export function roundDownToStep(speedKmh: number, stepKmh: number): number {
  return Math.floor(speedKmh / stepKmh + 1e-6) * stepKmh;
}
