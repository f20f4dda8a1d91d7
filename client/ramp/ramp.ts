import { interpolateCividis, interpolateRdYlBu } from 'd3-scale-chromatic';
import type { Quantity } from '../state/app-state.ts';

/** How a quantity is coloured on the plan: published schemes that colour-blind eyes can read. */
export interface Ramp {
  readonly quantity: Quantity;
  readonly label: string;
  readonly unit: string;
  /** Column of the profile and its factor to the unit. */
  readonly column: string;
  readonly factor: number;
  readonly diverging: boolean;
  readonly decimals: number;
}

export const RAMPS: readonly Ramp[] = [
  {
    quantity: 'utilisation',
    label: 'Utilisation',
    unit: 'of the limit',
    column: 'utilisation',
    factor: 1,
    diverging: false,
    decimals: 2,
  },
  {
    quantity: 'lateral',
    label: 'Lateral, track plane',
    unit: 'm/s²',
    column: 'lateral_track_ms2',
    factor: 1,
    diverging: true,
    decimals: 2,
  },
  {
    quantity: 'deficiency',
    label: 'Cant deficiency',
    unit: 'mm',
    column: 'cant_deficiency_mm',
    factor: 1,
    diverging: false,
    decimals: 0,
  },
  { quantity: 'speed', label: 'Speed', unit: 'km/h', column: 'speed_ms', factor: 3.6, diverging: false, decimals: 0 },
  {
    quantity: 'curvature',
    label: 'Curvature, left +',
    unit: '1/km',
    column: 'curvature_fit_1_m',
    factor: 1000,
    diverging: true,
    decimals: 1,
  },
  {
    quantity: 'jerk',
    label: 'Lateral jerk',
    unit: 'm/s³',
    column: 'jerk_ms3',
    factor: 1,
    diverging: true,
    decimals: 2,
  },
];

export function rampOf(quantity: Quantity): Ramp {
  return RAMPS.find((ramp) => ramp.quantity === quantity)!;
}

/** Number of colours: neighbours stay apart for every kind of colour vision. */
const CLASSES = 7;

/** Colours of the classes; the lightest ends are left out, since a line must stand out from paper. */
export function rampColours(ramp: Ramp): string[] {
  return Array.from({ length: CLASSES }, (_, k) => {
    const t = k / (CLASSES - 1);
    return ramp.diverging ? interpolateRdYlBu(1 - t) : interpolateCividis(0.04 + 0.92 * t);
  });
}

/** Ends of the scale for some values: utilisation up to the limit, diverging ones about zero. */
export function rampDomain(ramp: Ramp, values: readonly (number | null)[]): [number, number] {
  if (ramp.quantity === 'utilisation') return [0, 1];
  let [low, high] = [Infinity, -Infinity];
  for (const v of values) {
    if (v === null) continue;
    low = Math.min(low, v * ramp.factor);
    high = Math.max(high, v * ramp.factor);
  }
  if (!Number.isFinite(low)) return [0, 1];
  if (ramp.diverging) {
    const most = Math.max(Math.abs(low), Math.abs(high)) || 1;
    return [-most, most];
  }
  return [Math.min(0, low), high > low ? high : low + 1];
}

/** Class of a value, 0..CLASSES-1; -1 when there is none. */
export function rampClass(value: number | null, factor: number, [low, high]: readonly [number, number]): number {
  if (value === null || !Number.isFinite(value)) return -1;
  const t = (value * factor - low) / (high - low);
  return Math.min(CLASSES - 1, Math.max(0, Math.floor(t * CLASSES)));
}
