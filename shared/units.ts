/** Standard acceleration of free fall, m/s^2 (CGPM 1901; exact). The one value of g used everywhere. */
export const STANDARD_GRAVITY_MPS2 = 9.80665;

/** International foot, m (exact). */
export const METRES_PER_FOOT = 0.3048;

/** Exact factors, SI = shown * factor, one line a display unit. `decimals` is the customary precision on a screen. */
export const UNITS = {
  'm/s': { quantity: 'speed', toSi: 1, decimals: 2 },
  'km/h': { quantity: 'speed', toSi: 1 / 3.6, decimals: 1 },
  mph: { quantity: 'speed', toSi: 0.44704, decimals: 1 },
  kn: { quantity: 'speed', toSi: 1852 / 3600, decimals: 1 },
  m: { quantity: 'length', toSi: 1, decimals: 1 },
  km: { quantity: 'length', toSi: 1000, decimals: 3 },
  ft: { quantity: 'length', toSi: METRES_PER_FOOT, decimals: 1 },
  mi: { quantity: 'length', toSi: 1609.344, decimals: 3 },
  ch: { quantity: 'length', toSi: 20.1168, decimals: 1 },
  mm: { quantity: 'length', toSi: 0.001, decimals: 1 },
  in: { quantity: 'length', toSi: 0.0254, decimals: 2 },
  'mm/s': { quantity: 'speed', toSi: 0.001, decimals: 1 },
  'in/s': { quantity: 'speed', toSi: 0.0254, decimals: 2 },
  'm/s²': { quantity: 'acceleration', toSi: 1, decimals: 3 },
  g: { quantity: 'acceleration', toSi: STANDARD_GRAVITY_MPS2, decimals: 3 },
  'ft/s²': { quantity: 'acceleration', toSi: METRES_PER_FOOT, decimals: 2 },
  'm/s³': { quantity: 'jerk', toSi: 1, decimals: 3 },
  'g/s': { quantity: 'jerk', toSi: STANDARD_GRAVITY_MPS2, decimals: 3 },
  rad: { quantity: 'angle', toSi: 1, decimals: 4 },
  '°': { quantity: 'angle', toSi: Math.PI / 180, decimals: 1 },
  'rad/s': { quantity: 'angular speed', toSi: 1, decimals: 4 },
  '°/s': { quantity: 'angular speed', toSi: Math.PI / 180, decimals: 2 },
  '1/m': { quantity: 'curvature', toSi: 1, decimals: 6 },
  '1/km': { quantity: 'curvature', toSi: 0.001, decimals: 3 },
  'mm/m': { quantity: 'gradient', toSi: 0.001, decimals: 2 },
  '%': { quantity: 'gradient', toSi: 0.01, decimals: 1 },
  s: { quantity: 'time', toSi: 1, decimals: 1 },
  min: { quantity: 'time', toSi: 60, decimals: 1 },
  kg: { quantity: 'mass', toSi: 1, decimals: 0 },
  t: { quantity: 'mass', toSi: 1000, decimals: 1 },
  Hz: { quantity: 'frequency', toSi: 1, decimals: 2 },
  '1': { quantity: 'ratio', toSi: 1, decimals: 3 },
} as const;

export type Unit = keyof typeof UNITS;

/** Value in SI from a value in `unit`. */
export function toSi(value: number, unit: Unit): number {
  return value * UNITS[unit].toSi;
}

/** Value in `unit` from a value in SI. */
export function fromSi(valueSi: number, unit: Unit): number {
  return valueSi / UNITS[unit].toSi;
}

/**
 * Value in unit `to` from a value in unit `from`.
 * Errors: RangeError when the two units are not of the same quantity.
 */
export function convert(value: number, from: Unit, to: Unit): number {
  if (UNITS[from].quantity !== UNITS[to].quantity) {
    throw new RangeError(`${from} (${UNITS[from].quantity}) cannot be shown in ${to} (${UNITS[to].quantity})`);
  }
  return (value * UNITS[from].toSi) / UNITS[to].toSi;
}

/** m/s from km/h. */
export function kmhToMps(speedKmh: number): number {
  return speedKmh / 3.6;
}

/** km/h from m/s. */
export function mpsToKmh(speedMps: number): number {
  return speedMps * 3.6;
}

/** Radians from degrees. */
export function degToRad(deg: number): number {
  return (deg * Math.PI) / 180;
}

/** Degrees from radians. */
export function radToDeg(rad: number): number {
  return (rad * 180) / Math.PI;
}

/**
 * A value with its unit, digits as customary for the unit, decimal point, no grouping: the same text in
 * every language and on every machine. An unknown value is an en dash.
 */
export function formatQuantity(value: number | null, unit: Unit, decimals: number = UNITS[unit].decimals): string {
  if (value === null || Number.isNaN(value)) return '–';
  if (!Number.isFinite(value)) return value > 0 ? 'unbounded' : '-unbounded';
  const digits = value.toFixed(decimals);
  // toFixed can leave "-0.0", which no reader expects.
  const text = Number(digits) === 0 ? digits.replace('-', '') : digits;
  if (unit === '1') return text;
  return unit === '°' || unit === '%' ? `${text}${unit}` : `${text} ${unit}`;
}
