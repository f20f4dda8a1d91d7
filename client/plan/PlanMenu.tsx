import L from 'leaflet';
import { useEffect, useState } from 'preact/hooks';
import { keep, readKept } from '../parts/kept.ts';
import { showFault } from '../state/app-state.ts';
import type { MapPieces } from './map-pieces.ts';

/** What lies under the run: the user's own GeoJSON, or map tiles from an address that they set; and the picture. */
export function PlanMenu({ pieces, onPicture }: { readonly pieces: MapPieces | null; readonly onPicture: () => void }) {
  const [tiles, setTiles] = useState(() => readKept('tiles', ''));
  useEffect(() => {
    if (pieces === null || tiles === '') return undefined;
    const layer = L.tileLayer(tiles, { maxZoom: 20 }).addTo(pieces.background);
    return () => layer.remove();
  }, [pieces, tiles]);
  const readFile = async (file: File | undefined) => {
    if (file === undefined || pieces === null) return;
    try {
      const data = JSON.parse(await file.text()) as Parameters<typeof L.geoJSON>[0];
      L.geoJSON(data, {
        style: { color: '#7a868c', weight: 1.5, fillOpacity: 0.08 },
        pointToLayer: (_feature, at) => L.circleMarker(at, { radius: 3, color: '#7a868c' }),
      }).addTo(pieces.background);
    } catch {
      showFault({
        code: 'page/geojson',
        cause: 'this background is not GeoJSON',
        place: { file: file.name },
        remedy: 'Export it as GeoJSON in longitude and latitude',
      });
    }
  };
  return (
    <details class="menu right">
      <summary>Map</summary>
      <div class="plan-menu">
        <button type="button" class="quiet" onClick={onPicture}>
          Save as PNG
        </button>
        <label>
          <span>Background from a GeoJSON file</span>
          <input
            type="file"
            accept=".geojson,.json"
            onChange={(e) => {
              void readFile(e.currentTarget.files?.[0]);
            }}
          />
        </label>
        <form
          onSubmit={(e) => {
            e.preventDefault();
            const field = e.currentTarget.elements.namedItem('tiles') as HTMLInputElement;
            keep('tiles', field.value.trim() === '' ? null : field.value.trim());
            setTiles(field.value.trim());
          }}
        >
          <label>
            <span>Address of map tiles</span>
            <input name="tiles" type="text" value={tiles} placeholder="https://…/{z}/{x}/{y}.png" />
          </label>
          <div class="row">
            <button type="submit">Use</button>
            <button type="button" onClick={() => pieces?.background.clearLayers()}>
              No background
            </button>
          </div>
          <p class="quiet-text">
            Tiles tell their server where you look. Start Bendbook with --tile-origin for that address, and credit it as
            its owner asks.
          </p>
        </form>
      </div>
    </details>
  );
}
