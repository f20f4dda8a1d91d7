import L from 'leaflet';
import 'leaflet/dist/leaflet.css';
import { useEffect, useRef, useState } from 'preact/hooks';
import type { ProfileWindow } from '../../shared/schema/api.ts';
import { api } from '../api.ts';
import { saveBlob } from '../parts/save.ts';
import { rampDomain, rampOf } from '../ramp/ramp.ts';
import { app, cursor, report, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { placeTags, placeTangentPoints, type PlacedTag } from './curve-tags.ts';
import { describePlace } from './describe-place.ts';
import { createMap, fitRun, type MapPieces } from './map-pieces.ts';
import { planPicture } from './picture.ts';
import { PlanHead } from './PlanHead.tsx';
import { PlanMenu } from './PlanMenu.tsx';
import { unwrapped, type Marked } from './run-layer.ts';

/** Places asked for the whole run. */
const POINTS = 12_000;
/** A chosen curve is brought near when the map is farther out than this. */
const FAR_ZOOM = 13;

/** The line on a map: coloured by a quantity, exceedances heavier and cased, undecided ones dashed. */
export function Plan({ open }: { readonly open: OpenRun }) {
  const host = useRef<HTMLDivElement>(null);
  const data = useRef<ProfileWindow | null>(null);
  const tags = useRef<readonly PlacedTag[]>([]);
  const [pieces, setPieces] = useState<MapPieces | null>(null);
  const [window, setWindow] = useState<ProfileWindow | null>(null);
  const [place, setPlace] = useState(-1);
  const quantity = useSlice(app, (s) => s.quantity);
  const curve = useSlice(app, (s) => s.curve);
  const theme = useSlice(app, (s) => s.theme);
  const units = useSlice(app, (s) => s.units);
  const { id: runId, lengthM, bounds, name } = open.detail.summary;
  data.current = window;

  useEffect(() => {
    const made = createMap(host.current!, () => data.current, setPlace);
    setPieces(made);
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
    };
  }, []);

  useEffect(() => {
    const abort = new AbortController();
    api
      .profile(runId, 0, lengthM + 1, POINTS, abort.signal)
      .then(setWindow)
      .catch((error: unknown) => {
        if (!abort.signal.aborted) report(error);
      });
    return () => abort.abort();
  }, [runId, open.edition]);

  useEffect(() => {
    if (pieces !== null) fitRun(pieces.map, bounds);
  }, [pieces, runId]);

  const ramp = rampOf(quantity);
  const domain = rampDomain(ramp, window?.columns[ramp.column] ?? []);

  useEffect(() => {
    if (pieces === null) return;
    const chosen = open.curves.find(({ row }) => row.curve === curve)?.row;
    const colours = planColours();
    pieces.run.show(
      window === null
        ? null
        : {
            window,
            ramp,
            domain,
            marked: markedPlaces(open),
            colours,
            selected: chosen === undefined ? null : [chosen.start_m, chosen.end_m],
          },
    );
    pieces.spot.setStyle({ color: colours.casing, fillColor: colours.ink });
    placeTangentPoints(pieces, open, curve, { ring: colours.accent, fill: colours.casing });
  }, [pieces, window, quantity, curve, theme, open]);

  useEffect(() => {
    if (pieces === null) return undefined;
    const show = () => {
      tags.current = placeTags(pieces, open, curve);
    };
    show();
    pieces.map.on('moveend', show);
    return () => {
      pieces.map.off('moveend', show);
    };
  }, [pieces, curve, open]);

  useEffect(() => {
    const row = open.curves.find((c) => c.row.curve === curve)?.row;
    if (row === undefined || pieces === null) return;
    const box = L.latLngBounds([
      [row.lat_start, unwrapped(row.lon_start, bounds[1])],
      [row.lat_mid, unwrapped(row.lon_mid, bounds[1])],
      [row.lat_end, unwrapped(row.lon_end, bounds[1])],
    ]);
    const { map } = pieces;
    if (!map.getBounds().contains(box) || map.getZoom() < FAR_ZOOM)
      map.fitBounds(box.pad(0.8), { maxZoom: 17, animate: false });
  }, [pieces, curve]);

  const over = open.curves.filter(({ row }) => row.verdict === 'over').length;
  const save = () => {
    if (pieces === null) return;
    const text = { title: `${name}, ${ramp.label.toLowerCase()}`, caution: 'Derived from GPS; own limits govern' };
    void planPicture(pieces, tags.current, text).then((blob) => {
      if (blob !== null) saveBlob('plan.png', blob);
    });
  };
  return (
    <div class="plan">
      <PlanHead
        mode={open.ref.mode}
        ramp={ramp}
        domain={domain}
        onWhole={() => {
          if (pieces !== null) fitRun(pieces.map, bounds);
        }}
      >
        <PlanMenu pieces={pieces} onPicture={save} />
      </PlanHead>
      <div class="plan-map">
        <div
          ref={host}
          role="application"
          aria-label={`Map of the run coloured by ${ramp.label.toLowerCase()}; ${String(over)} of ${String(open.curves.length)} curves over their limit. The ledger holds the same figures as a table.`}
        />
        {place >= 0 && window !== null && <p class="plan-readout">{describePlace(window.columns, place, units)}</p>}
        <p class="plan-key" aria-hidden="true">
          <span class="key-over" /> over
          <span class="key-undecided" /> undecided
        </p>
      </div>
    </div>
  );
}

function markedPlaces(open: OpenRun): Marked[] {
  const marked = open.curves.flatMap(({ row }): Marked[] =>
    row.verdict === 'over' || row.verdict === 'undecided'
      ? [{ fromM: row.start_m, toM: row.end_m, verdict: row.verdict }]
      : [],
  );
  // Those over last: where stretches meet they lie on top.
  return marked.sort((a, b) => Number(a.verdict === 'over') - Number(b.verdict === 'over'));
}

function planColours() {
  const style = getComputedStyle(document.documentElement);
  const css = (name: string) => style.getPropertyValue(name).trim();
  return {
    casing: css('--panel'),
    over: css('--over'),
    undecided: css('--undecided'),
    accent: css('--accent'),
    ink: css('--ink'),
  };
}
