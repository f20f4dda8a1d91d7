import L from 'leaflet';
import type { ProfileWindow } from '../../shared/schema/api.ts';
import { chooseCurve, app, cursor } from '../state/app-state.ts';
import { Graticule } from './graticule.ts';
import { RunLayer } from './run-layer.ts';

/** The map and the layers that are filled from outside, lowest first. */
export interface MapPieces {
  readonly map: L.Map;
  readonly graticule: Graticule;
  readonly background: L.LayerGroup;
  readonly others: L.LayerGroup;
  readonly run: RunLayer;
  readonly points: L.LayerGroup;
  readonly tags: L.LayerGroup;
  /** The place under the common cursor. */
  readonly spot: L.CircleMarker;
}

/**
 * Builds the map. `dataOf` gives the profile now drawn; `onHover` gets the index of the place of it under the pointer,
 * or -1.
 */
export function createMap(
  host: HTMLElement,
  dataOf: () => ProfileWindow | null,
  onHover: (index: number) => void,
): MapPieces {
  const map = L.map(host, { attributionControl: false, preferCanvas: true, zoomSnap: 0.25, keyboard: true });
  map.setView([0, 0], 2);
  const graticule = new Graticule().addTo(map);
  const background = L.layerGroup().addTo(map);
  const others = L.layerGroup().addTo(map);
  const run = new RunLayer().addTo(map);
  const points = L.layerGroup().addTo(map);
  const tags = L.layerGroup().addTo(map);
  const spot = L.circleMarker([0, 0], { radius: 6, weight: 2, opacity: 0, fillOpacity: 0, interactive: false }).addTo(
    map,
  );
  L.control.scale({ imperial: false, position: 'bottomright' }).addTo(map);
  const north = new L.Control({ position: 'bottomright' });
  north.onAdd = () => {
    const box = L.DomUtil.create('div', 'north');
    box.textContent = '↑ N';
    return box;
  };
  north.addTo(map);
  const chainageAt = (index: number) => dataOf()?.columns.s_m?.[index] ?? null;
  map.on('mousemove', (event: L.LeafletMouseEvent) => {
    const index = run.nearest(event.containerPoint);
    cursor.set({ m: chainageAt(index) });
    onHover(index);
  });
  map.on('mouseout', () => {
    cursor.set({ m: null });
    onHover(-1);
  });
  map.on('click', (event: L.LeafletMouseEvent) => {
    const s = chainageAt(run.nearest(event.containerPoint));
    const hit = app.get().open?.curves.find(({ row }) => s !== null && s >= row.start_m && s <= row.end_m);
    if (hit !== undefined) chooseCurve(hit.row.curve);
  });
  return { map, graticule, background, others, run, points, tags, spot };
}

export function fitRun(map: L.Map, [south, west, north, east]: readonly [number, number, number, number]): void {
  map.fitBounds(
    [
      [south, west],
      [north, east < west ? east + 360 : east],
    ],
    { paddingTopLeft: [44, 44], paddingBottomRight: [44, 52], maxZoom: 17, animate: false },
  );
}
