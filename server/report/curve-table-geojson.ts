import { roundRow, roundTo } from '../../shared/schema/curve-columns.ts';
import type { CurveRow } from '../../shared/schema/curve-row.ts';
import type { ReportContext } from './context.ts';

type Position = readonly [longitude: number, latitude: number];

interface CurveFeature {
  readonly type: 'Feature';
  readonly id: string;
  readonly geometry:
    | { readonly type: 'LineString'; readonly coordinates: readonly Position[] }
    | { readonly type: 'MultiLineString'; readonly coordinates: readonly (readonly Position[])[] };
  readonly properties: CurveRow & { readonly caution: string };
}

export interface CurveTableGeoJson {
  readonly type: 'FeatureCollection';
  readonly name: string;
  readonly cautions: readonly string[];
  readonly features: readonly CurveFeature[];
}

/**
 * The curve table as GeoJSON (RFC 7946: WGS84, longitude first, 7 decimals): one line a curve with
 * the columns of the table as properties. A curve across the antimeridian is cut there (RFC 7946, 3.1.9).
 */
export function curveTableGeoJson(context: ReportContext): CurveTableGeoJson {
  return {
    type: 'FeatureCollection',
    name: context.title,
    cautions: context.cautions,
    features: context.runs.flatMap((run) =>
      run.curves.map(({ row }) => ({
        type: 'Feature' as const,
        id: `${run.id}/${String(row.curve)}`,
        geometry: lineGeometry(pathOf(row, run.path(row.curve))),
        properties: { ...roundRow(row), caution: context.cautions[0] ?? '' },
      })),
    ),
  };
}

function pathOf(row: CurveRow, path: readonly Position[]): readonly Position[] {
  if (path.length >= 2) return path;
  return [
    [row.lon_start, row.lat_start],
    [row.lon_mid, row.lat_mid],
    [row.lon_end, row.lat_end],
  ];
}

function lineGeometry(path: readonly Position[]): CurveFeature['geometry'] {
  const parts: Position[][] = [[]];
  let previous: Position | null = null;
  for (const [lon, lat] of path) {
    if (previous !== null && Math.abs(lon - previous[0]) > 180) {
      const side = previous[0] > 0 ? 180 : -180;
      const span = 360 - Math.abs(lon - previous[0]);
      const share = span > 0 ? Math.abs(side - previous[0]) / span : 0.5;
      const crossing = previous[1] + share * (lat - previous[1]);
      parts.at(-1)!.push(rounded(side, crossing));
      parts.push([rounded(-side, crossing)]);
    }
    parts.at(-1)!.push(rounded(lon, lat));
    previous = [lon, lat];
  }
  const lines = parts.filter((part) => part.length >= 2);
  return lines.length === 1
    ? { type: 'LineString', coordinates: lines[0]! }
    : { type: 'MultiLineString', coordinates: lines };
}

function rounded(lon: number, lat: number): Position {
  return [roundTo(lon, 7) ?? 0, roundTo(lat, 7) ?? 0];
}
