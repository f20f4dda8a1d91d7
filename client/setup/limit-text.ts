import type { LimitBand } from '../../shared/schema/limit-set.ts';
import { figure } from '../parts/text.ts';

/** Where a band holds, in words. */
export function bandText(band: LimitBand): string {
  const parts = [];
  if (band.minSpeedKmh !== undefined) parts.push(`from ${String(band.minSpeedKmh)} km/h`);
  if (band.maxSpeedKmh !== undefined) parts.push(`to ${String(band.maxSpeedKmh)} km/h`);
  if (band.minRadiusM !== undefined) parts.push(`R from ${String(band.minRadiusM)} m`);
  if (band.maxRadiusM !== undefined) parts.push(`R to ${String(band.maxRadiusM)} m`);
  return parts.length === 0 ? 'always' : parts.join(', ');
}

/** A limit without needless zeros. */
export function limitFigure(value: number | null): string {
  return figure(value, 3).replace(/\.?0+$/, '');
}
