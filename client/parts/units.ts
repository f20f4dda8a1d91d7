import { UNITS, type Unit } from '../../shared/units.ts';

/** The quantities whose unit the reader chooses. */
export type ShownQuantity = 'speed' | 'chainage' | 'length' | 'cant' | 'acceleration' | 'jerk';
export type ShownUnits = Readonly<Record<ShownQuantity, Unit>>;

export const UNIT_CHOICES: Readonly<Record<ShownQuantity, { label: string; units: readonly Unit[] }>> = {
  speed: { label: 'Speed', units: ['km/h', 'mph', 'm/s', 'kn'] },
  chainage: { label: 'Chainage and length of line', units: ['m', 'km', 'ft', 'mi'] },
  length: { label: 'Radius and other lengths', units: ['m', 'ft'] },
  cant: { label: 'Cant and cant deficiency', units: ['mm', 'in'] },
  acceleration: { label: 'Acceleration', units: ['m/s²', 'g', 'ft/s²'] },
  jerk: { label: 'Lateral jerk', units: ['m/s³', 'g/s'] },
};

export const SI_UNITS: ShownUnits = {
  speed: 'km/h',
  chainage: 'm',
  length: 'm',
  cant: 'mm',
  acceleration: 'm/s²',
  jerk: 'm/s³',
};

export const IMPERIAL_UNITS: ShownUnits = {
  speed: 'mph',
  chainage: 'mi',
  length: 'ft',
  cant: 'in',
  acceleration: 'g',
  jerk: 'g/s',
};

/** A kept choice made whole: quantities and units that this version does not know give the SI unit. */
export function completeUnits(kept: Partial<Record<string, string>>): ShownUnits {
  const entries = (Object.keys(SI_UNITS) as ShownQuantity[]).map((quantity) => {
    const unit = UNIT_CHOICES[quantity].units.find((choice) => choice === kept[quantity]);
    return [quantity, unit ?? SI_UNITS[quantity]] as const;
  });
  return Object.fromEntries(entries) as ShownUnits;
}

/** The unit in which a figure that stands in `unit` is shown; `chainage` tells a place from a length. */
export function shownUnit(unit: string, units: ShownUnits, isChainage = false): string {
  switch (unit) {
    case 'km/h':
      return units.speed;
    case 'm':
      return isChainage ? units.chainage : units.length;
    case 'mm':
      return units.cant;
    case 'mm/s':
      return units.cant === 'in' ? 'in/s' : unit;
    case 'm/s²':
      return units.acceleration;
    case 'm/s³':
      return units.jerk;
    default:
      return unit;
  }
}

/** How many of `to` one of `from` makes; units outside the table are never converted. */
export function unitRatio(from: string, to: string): number {
  return from === to ? 1 : UNITS[from as Unit].toSi / UNITS[to as Unit].toSi;
}

/** Decimals that show the same fineness in another unit, three at most unless the figure had more. */
export function shownDecimals(decimals: number, ratio: number): number {
  if (ratio === 1) return decimals;
  return Math.max(0, Math.min(Math.max(3, decimals), decimals + Math.round(-Math.log10(ratio))));
}

/** A figure in the reader's unit with the decimals that suit it. */
export function inShown(
  value: number | null,
  unit: string,
  decimals: number,
  units: ShownUnits,
  isChainage = false,
): { value: number | null; unit: string; decimals: number } {
  const shown = shownUnit(unit, units, isChainage);
  const ratio = unitRatio(unit, shown);
  return { value: value === null ? null : value * ratio, unit: shown, decimals: shownDecimals(decimals, ratio) };
}
