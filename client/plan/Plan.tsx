import L from 'leaflet';
import 'leaflet/dist/leaflet.css';
import { useEffect, useRef, useState } from 'preact/hooks';
import type { ProfileWindow } from '../../shared/schema/api.ts';
import { api } from '../api.ts';
import { figure } from '../parts/text.ts';
import { RAMPS, rampColours, rampDomain, rampOf } from '../ramp/ramp.ts';
import { app, cursor, report, type OpenRun, type Quantity } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { Graticule } from './graticule.ts';
import { RunLayer, unwrapped, type Marked } from './run-layer.ts';

/** Places asked for the whole run; a zoomed window asks for its own. */
const POINTS = 12_000;
const TILE_KEY = 'bendbook.tiles';

interface Pieces {
  readonly map: L.Map;
  readonly run: RunLayer;
  readonly tags: L.LayerGroup;
  readonly points: L.LayerGroup;
  readonly spot: L.CircleMarker;
  readonly background: L.LayerGroup;
}

/** The line on a map: coloured by a quantity, exceedances heavier and cased, undecided ones dashed. */
export function Plan({ open }: { readonly open: OpenRun }) {
  const host = useRef<HTMLDivElement>(null);
  const pieces = useRef<Pieces | null>(null);
  const [window, setWindow] = useState<ProfileWindow | null>(null);
  const [readout, setReadout] = useState('');
  const quantity = useSlice(app, (s) => s.quantity);
  const curve = useSlice(app, (s) => s.curve);
  const theme = useSlice(app, (s) => s.theme);
  const runId = open.detail.summary.id;

  useEffect(() => {
    const made = createMap(host.current!, setReadout);
    pieces.current = made;
    const stop = cursor.listen(() => {
      const { m } = cursor.get();
      const at = m === null ? null : made.run.at(m);
      made.spot.setStyle({ opacity: at === null ? 0 : 1, fillOpacity: at === null ? 0 : 1 });
      if (at !== null) made.spot.setLatLng(at);
    });
    const watch = new ResizeObserver(() => made.map.invalidateSize({ animate: false }));
    watch.observe(host.current!);
    return () => {
      stop();
      watch.disconnect();
      made.map.remove();
      pieces.current = null;
    };
  }, []);

  useEffect(() => {
    const abort = new AbortController();
    api
      .profile(runId, 0, open.detail.summary.lengthM + 1, POINTS, abort.signal)
      .then((answer) => {
        setWindow(answer);
        if (pieces.current !== null) hoverData.set(pieces.current.run, answer);
      })
      .catch((error: unknown) => {
        if (!abort.signal.aborted) report(error);
      });
    return () => abort.abort();
  }, [runId, open.edition]);

  useEffect(() => {
    fitRun(pieces.current!.map, open.detail.summary.bounds);
  }, [runId]);

  useEffect(() => {
    const made = pieces.current!;
    if (window === null) {
      made.run.show(null);
      return;
    }
    const ramp = rampOf(quantity);
    const style = getComputedStyle(document.documentElement);
    const css = (name: string) => style.getPropertyValue(name).trim();
    const marked: Marked[] = open.curves.flatMap(({ row }) =>
      row.verdict === 'over' || row.verdict === 'undecided'
        ? [{ fromM: row.start_m, toM: row.end_m, verdict: row.verdict }]
        : [],
    );
    marked.sort((a, b) => (a.verdict === 'over' ? 1 : 0) - (b.verdict === 'over' ? 1 : 0));
    const chosen = open.curves.find(({ row }) => row.curve === curve)?.row;
    made.run.show({
      window,
      ramp,
      domain: rampDomain(ramp, window.columns[ramp.column] ?? []),
      marked,
      colours: {
        casing: css('--panel'),
        over: css('--over'),
        undecided: css('--undecided'),
        accent: css('--accent'),
        ink: css('--ink'),
      },
      selected: chosen === undefined ? null : [chosen.start_m, chosen.end_m],
    });
    made.spot.setStyle({ color: css('--panel'), fillColor: css('--ink') });
    placeTags(made, open, curve);
  }, [window, quantity, curve, theme, open]);

  useEffect(() => {
    const row = open.curves.find((c) => c.row.curve === curve)?.row;
    const made = pieces.current;
    if (row === undefined || made === null) return;
    const lon0 = open.detail.summary.bounds[1];
    const box = L.latLngBounds([
      [row.lat_start, unwrapped(row.lon_start, lon0)],
      [row.lat_mid, unwrapped(row.lon_mid, lon0)],
      [row.lat_end, unwrapped(row.lon_end, lon0)],
    ]);
    if (!made.map.getBounds().contains(box) || made.map.getZoom() < 13)
      made.map.fitBounds(box.pad(0.8), { maxZoom: 17, animate: false });
  }, [curve]);

  const ramp = rampOf(quantity);
  const domain = window === null ? [0, 1] : rampDomain(ramp, window.columns[ramp.column] ?? []);
  const over = open.curves.filter(({ row }) => row.verdict === 'over').length;
  return (
    <section class="plan" aria-label="Plan">
      <div
        ref={host}
        role="application"
        aria-label={`Map of the run coloured by ${ramp.label.toLowerCase()}; ${String(over)} of ${String(open.curves.length)} curves over their limit. The ledger holds the same figures as a table.`}
      />
      {readout !== '' && <div class="plan-readout">{readout}</div>}
      <div class="plan-tools">
        <label>
          <span class="sr">Colour by</span>
          <select value={quantity} onChange={(e) => app.set({ quantity: e.currentTarget.value as Quantity })}>
            {RAMPS.filter((r) => open.ref.mode === 'rail' || r.quantity !== 'deficiency').map((r) => (
              <option key={r.quantity} value={r.quantity}>
                {r.label}
              </option>
            ))}
          </select>
        </label>
        <button type="button" onClick={() => fitRun(pieces.current!.map, open.detail.summary.bounds)}>
          Whole run
        </button>
        <BackgroundMenu pieces={pieces} />
      </div>
      <Legend
        label={ramp.label}
        unit={ramp.unit}
        colours={rampColours(ramp)}
        low={figure(domain[0]!, ramp.decimals)}
        high={figure(domain[1]!, ramp.decimals)}
      />
    </section>
  );
}

const hoverData = new WeakMap<RunLayer, ProfileWindow>();

function createMap(host: HTMLElement, setReadout: (text: string) => void): Pieces {
  const map = L.map(host, {
    zoomControl: true,
    attributionControl: false,
    preferCanvas: true,
    zoomSnap: 0.25,
    keyboard: true,
  });
  map.setView([0, 0], 2);
  new Graticule().addTo(map);
  const background = L.layerGroup().addTo(map);
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
    box.setAttribute('aria-label', 'North is up');
    return box;
  };
  north.addTo(map);
  map.on('mousemove', (event: L.LeafletMouseEvent) => {
    const i = run.nearest(event.containerPoint);
    const columns = hoverData.get(run)?.columns;
    const s = i < 0 ? null : (columns?.s_m?.[i] ?? null);
    cursor.set({ m: s });
    setReadout(s === null || columns === undefined ? '' : describe(columns, i));
  });
  map.on('mouseout', () => {
    cursor.set({ m: null });
    setReadout('');
  });
  map.on('click', (event: L.LeafletMouseEvent) => {
    const i = run.nearest(event.containerPoint);
    const s = i < 0 ? null : (hoverData.get(run)?.columns.s_m?.[i] ?? null);
    const hit = app.get().open?.curves.find(({ row }) => s !== null && s >= row.start_m && s <= row.end_m);
    if (hit !== undefined) app.set({ curve: hit.row.curve, tab: 'sheet' });
  });
  return { map, run, tags, points, spot, background };
}

/** What is known at one place, with its intervals. */
function describe(columns: ProfileWindow['columns'], i: number): string {
  const at = (name: string) => columns[name]?.[i] ?? null;
  const speed = at('speed_ms');
  const speedSd = at('speed_sd_ms');
  const lateral = at('lateral_track_ms2');
  const lateralSd = at('lateral_track_sd_ms2');
  const fitted = at('curvature_fit_1_m');
  const use = at('utilisation');
  const parts = [
    `${figure((at('s_m') ?? 0) / 1000, 3)} km`,
    `${figure(speed === null ? null : speed * 3.6, 1)} ± ${figure(speedSd === null ? null : speedSd * 1.96 * 3.6, 1)} km/h`,
    fitted === null || fitted === 0
      ? 'straight'
      : `R ${figure(1 / Math.abs(fitted), 0)} m ${fitted > 0 ? 'left' : 'right'}`,
    `lateral ${figure(lateral, 2)} ± ${figure(lateralSd === null ? null : lateralSd * 1.96, 2)} m/s²`,
    ...(use === null ? [] : [`utilisation ${figure(use, 2)}`]),
    ...(at('observed') === 0 ? ['not observed'] : []),
  ];
  return parts.join(' · ');
}

function fitRun(map: L.Map, [south, west, north, east]: readonly [number, number, number, number]): void {
  map.fitBounds(
    [
      [south, west],
      [north, east],
    ],
    { padding: [36, 36], maxZoom: 17, animate: false },
  );
}

/** Numbers of the curves (all that need attention; the rest from close by) and tangent points of the chosen one. */
function placeTags({ map, tags, points }: Pieces, open: OpenRun, selected: number | null): void {
  const lon0 = open.detail.summary.bounds[1];
  const show = () => {
    tags.clearLayers();
    const taken: L.Point[] = [];
    const ordered = [...open.curves].sort((a, b) => weight(b, selected) - weight(a, selected));
    for (const { row } of ordered) {
      const at = L.latLng(row.lat_mid, unwrapped(row.lon_mid, lon0));
      if (!map.getBounds().pad(0.1).contains(at)) continue;
      const pixel = map.latLngToContainerPoint(at);
      if (row.curve !== selected && taken.some((other) => other.distanceTo(pixel) < 26)) continue;
      taken.push(pixel);
      const icon = L.divIcon({
        className: `curve-tag ${row.verdict.replace(' ', '-')}${row.curve === selected ? ' selected' : ''}`,
        html: String(row.curve),
        iconSize: [22, 22],
        iconAnchor: [-6, 28],
      });
      L.marker(at, {
        icon,
        keyboard: true,
        title: `Curve ${String(row.curve)}: ${row.verdict}`,
        alt: `Curve ${String(row.curve)}, ${row.verdict}`,
      })
        .on('click', () => app.set({ curve: row.curve, tab: 'sheet' }))
        .addTo(tags);
    }
  };
  show();
  const previous = tagHandlers.get(map);
  if (previous !== undefined) map.off('moveend', previous);
  tagHandlers.set(map, show);
  map.on('moveend', show);
  points.clearLayers();
  const row = open.curves.find((c) => c.row.curve === selected)?.row;
  if (row === undefined) return;
  for (const [lat, lon, name] of [
    [row.lat_start, row.lon_start, 'start'],
    [row.lat_end, row.lon_end, 'end'],
  ] as const) {
    L.circleMarker([lat, unwrapped(lon, lon0)], {
      radius: 4,
      weight: 2,
      color: '#125f7c',
      fillColor: '#ffffff',
      fillOpacity: 1,
    })
      .bindTooltip(`Curve ${String(row.curve)}, ${name}`)
      .addTo(points);
  }
}

const tagHandlers = new WeakMap<L.Map, () => void>();

function weight({ row }: OpenRun['curves'][number], selected: number | null): number {
  const rank = { over: 3, undecided: 2, 'not assessed': 1, within: 0 }[row.verdict];
  return (row.curve === selected ? 100 : 0) + rank * 10 + (row.utilisation ?? 0);
}

function Legend({
  label,
  unit,
  colours,
  low,
  high,
}: {
  label: string;
  unit: string;
  colours: readonly string[];
  low: string;
  high: string;
}) {
  const canvas = useRef<HTMLCanvasElement>(null);
  useEffect(() => {
    const context = canvas.current!.getContext('2d')!;
    const { width, height } = canvas.current!;
    colours.forEach((colour, k) => {
      context.fillStyle = colour;
      context.fillRect((k * width) / colours.length, 0, width / colours.length + 1, height);
    });
  }, [colours.join()]);
  return (
    <div class="plan-legend">
      <strong>
        {label} <span class="quiet-text">{unit}</span>
      </strong>
      <canvas ref={canvas} width={168} height={10} aria-hidden="true" />
      <span class="ticks">
        <span>{low}</span>
        <span>{high}</span>
      </span>
      <span class="verdict over">▲ heavy and cased: over</span>
      <span class="verdict undecided">┅ dashed: undecided</span>
    </div>
  );
}

/** The user's own background: a GeoJSON file, or map tiles from an address that they set. */
function BackgroundMenu({ pieces }: { readonly pieces: { readonly current: Pieces | null } }) {
  const [tiles, setTiles] = useState(() => localStorage.getItem(TILE_KEY) ?? '');
  const show = (address: string) => {
    localStorage.setItem(TILE_KEY, address);
    setTiles(address);
    const layer = pieces.current?.background;
    layer?.clearLayers();
    if (address !== '') L.tileLayer(address, { maxZoom: 20 }).addTo(layer!);
  };
  const readFile = async (file: File | undefined) => {
    if (file === undefined) return;
    try {
      const data = JSON.parse(await file.text()) as Parameters<typeof L.geoJSON>[0];
      L.geoJSON(data, {
        style: { color: '#7a868c', weight: 1.5, fillOpacity: 0.08 },
        pointToLayer: (_feature, at) => L.circleMarker(at, { radius: 3, color: '#7a868c' }),
      }).addTo(pieces.current!.background);
    } catch {
      app.set({
        faults: [
          ...app.get().faults,
          {
            code: 'page/geojson',
            cause: 'this background is not GeoJSON',
            place: { file: file.name },
            remedy: 'Export it as GeoJSON in longitude and latitude',
          },
        ],
      });
    }
  };
  return (
    <details class="menu">
      <summary>Background</summary>
      <div>
        <label>
          GeoJSON file
          <input type="file" accept=".geojson,.json" onChange={(e) => void readFile(e.currentTarget.files?.[0])} />
        </label>
        <form
          onSubmit={(e) => {
            e.preventDefault();
            show(new FormData(e.currentTarget).get('tiles')?.toString().trim() ?? '');
          }}
        >
          <label>
            Tile address
            <input name="tiles" type="text" value={tiles} placeholder="https://…/{z}/{x}/{y}.png" />
          </label>
          <button type="submit">Use</button>
          <p class="quiet-text">
            Tiles tell their server where you look. The server must be started with --tile-origin for that address;
            credit it as its owner asks.
          </p>
        </form>
      </div>
    </details>
  );
}
