import type { Interval } from './confidence.ts';
import type { Unit } from '../units.ts';
import { formatQuantity } from '../units.ts';

/** Fixed-point text of a number for a working, without unit. */
export function num(value: number, decimals: number): string {
  return value.toFixed(decimals);
}

/** Radius as a working shows it: whole metres above 1 km, else one decimal. */
export function radiusText(radiusM: number): string {
  return Number.isFinite(radiusM) ? `${radiusM.toFixed(radiusM >= 1000 ? 0 : 1)} m` : 'straight';
}

/** A figure with its interval: "132.8 mm (95 % interval 128.1 to 137.4 mm)". */
export function intervalText(interval: Interval, unit: Unit, decimals: number, confidence: number): string {
  const value = formatQuantity(interval.value, unit, decimals);
  if (interval.low === interval.value && interval.high === interval.value) return value;
  const percent = Number((confidence * 100).toFixed(1));
  const high = formatQuantity(interval.high, unit, decimals);
  if (interval.low === null) return `${value} (upper end of the ${percent} % interval ${high}; no lower end)`;
  return `${value} (${percent} % interval ${num(interval.low, decimals)} to ${high})`;
}
