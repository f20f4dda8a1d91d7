import L from 'leaflet';
import { chooseCurve, type OpenRun } from '../state/app-state.ts';
import type { MapPieces } from './map-pieces.ts';
import { unwrapped } from './run-layer.ts';

const TAG_PX = 24;
/** A tag stands up and to the right of the middle of its curve. */
const AWAY: readonly [number, number] = [-6, 30];

/** A tag as it stands on the screen, for pictures of the plan. */
export interface PlacedTag {
  readonly x: number;
  readonly y: number;
  readonly curve: number;
  readonly verdict: OpenRun['curves'][number]['row']['verdict'];
}

/**
 * Numbers of the curves, those that need attention before the rest where there is no room for all. Returns the tags
 * placed; call again whenever the map has moved.
 */
export function placeTags({ map, tags }: MapPieces, open: OpenRun, selected: number | null): PlacedTag[] {
  tags.clearLayers();
  const lon0 = open.detail.summary.bounds[1];
  const placed: (PlacedTag & { readonly at: L.LatLng })[] = [];
  const view = map.getBounds().pad(0.05);
  for (const { row } of [...open.curves].sort((a, b) => weight(b, selected) - weight(a, selected))) {
    const at = L.latLng(row.lat_mid, unwrapped(row.lon_mid, lon0));
    if (!view.contains(at)) continue;
    const { x, y } = map.latLngToContainerPoint(at);
    const isFree = placed.every((other) => Math.hypot(other.x - x, other.y - y) >= TAG_PX + 3);
    if (row.curve === selected || isFree) placed.push({ at, x, y, curve: row.curve, verdict: row.verdict });
  }
  // Along the run, so that the Tab key goes from curve to curve as a train does.
  placed.sort((a, b) => a.curve - b.curve);
  for (const { at, curve, verdict } of placed) {
    const isSelected = curve === selected;
    const marker = L.marker(at, {
      icon: L.divIcon({
        className: `curve-tag ${verdict.replace(' ', '-')}${isSelected ? ' selected' : ''}`,
        html: String(curve),
        iconSize: [TAG_PX, TAG_PX],
        iconAnchor: [...AWAY],
      }),
      keyboard: true,
      zIndexOffset: isSelected ? 2000 : verdict === 'over' ? 1000 : 0,
    });
    marker.on('click', () => chooseCurve(curve)).addTo(tags);
    marker.getElement()?.setAttribute('aria-label', `Curve ${String(curve)}, ${verdict}`);
  }
  return placed.map(({ x, y, curve, verdict }) => ({
    x: x - AWAY[0] + TAG_PX / 2,
    y: y - AWAY[1] + TAG_PX / 2,
    curve,
    verdict,
  }));
}

function weight({ row }: OpenRun['curves'][number], selected: number | null): number {
  const rank = { over: 3, undecided: 2, 'not assessed': 1, within: 0 }[row.verdict];
  return (row.curve === selected ? 100 : 0) + rank * 10 + (row.utilisation ?? 0);
}

/** Start and end of the chosen curve as rings on the line. */
export function placeTangentPoints(
  { points }: MapPieces,
  open: OpenRun,
  selected: number | null,
  colours: { readonly ring: string; readonly fill: string },
): void {
  points.clearLayers();
  const lon0 = open.detail.summary.bounds[1];
  const row = open.curves.find((c) => c.row.curve === selected)?.row;
  if (row === undefined) return;
  for (const [lat, lon, name] of [
    [row.lat_start, row.lon_start, 'start'],
    [row.lat_end, row.lon_end, 'end'],
  ] as const) {
    L.circleMarker([lat, unwrapped(lon, lon0)], {
      radius: 4,
      weight: 2,
      color: colours.ring,
      fillColor: colours.fill,
      fillOpacity: 1,
    })
      .bindTooltip(`Curve ${String(row.curve)}, ${name}`)
      .addTo(points);
  }
}
