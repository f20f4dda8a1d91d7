import { CanvasSurface } from '../band/surface.ts';
import type { PlacedTag } from './curve-tags.ts';
import type { MapPieces } from './map-pieces.ts';

const FONT = 'system-ui, sans-serif';
const [TAG_RADIUS, FOOT] = [11, 26];

/** What a picture of the plan says besides the map. */
export interface PictureText {
  readonly title: string;
  readonly caution: string;
}

/**
 * The plan as it stands, as PNG: graticule, run, numbers of the curves, scale, and a line that says what it is. Map
 * tiles of another server are left out: a browser does not hand them on.
 */
export function planPicture(
  pieces: MapPieces,
  tags: readonly PlacedTag[],
  { title, caution }: PictureText,
): Promise<Blob | null> {
  const { map } = pieces;
  const { x: width, y: height } = map.getSize();
  const ratio = Math.max(2, devicePixelRatio || 1);
  const canvas = document.createElement('canvas');
  canvas.width = width * ratio;
  canvas.height = (height + FOOT) * ratio;
  const context = canvas.getContext('2d')!;
  context.scale(ratio, ratio);
  const style = getComputedStyle(document.documentElement);
  const css = (name: string) => style.getPropertyValue(name).trim();
  context.fillStyle = css('--map');
  context.fillRect(0, 0, width, height + FOOT);
  context.drawImage(pieces.graticule.canvas, 0, 0, width, height);
  context.drawImage(pieces.run.canvas, 0, 0, width, height);
  const surface = new CanvasSurface(context, FONT);
  for (const { x, y, curve, verdict } of tags) {
    context.beginPath();
    context.arc(x, y, TAG_RADIUS, 0, 2 * Math.PI);
    context.fillStyle = verdict === 'over' ? css('--over') : css('--panel');
    context.fill();
    context.lineWidth = 1.5;
    context.strokeStyle = css({ over: '--over', undecided: '--undecided' }[verdict as string] ?? '--line-strong');
    context.setLineDash(verdict === 'undecided' ? [3, 2] : []);
    context.stroke();
    surface.text(x, y + 4, String(curve), verdict === 'over' ? css('--panel') : css('--ink'), 11, 'middle', true);
  }
  const metres = map.distance(
    map.containerPointToLatLng([0, height / 2]),
    map.containerPointToLatLng([100, height / 2]),
  );
  const bar = roundDown(metres);
  const barPx = (100 * bar) / metres;
  surface.line([width - 16 - barPx, height - 12, width - 16, height - 12], css('--ink'), 2);
  surface.text(
    width - 16,
    height - 18,
    bar >= 1000 ? `${String(bar / 1000)} km` : `${String(bar)} m`,
    css('--ink'),
    11,
    'end',
  );
  surface.text(10, height + 17, `${title}. ${caution}`, css('--ink-2'), 11);
  return new Promise((resolve) => canvas.toBlob(resolve));
}

/** The largest of 1, 2 or 5 times a power of ten that is not larger. */
function roundDown(value: number): number {
  const power = 10 ** Math.floor(Math.log10(Math.max(value, 1e-3)));
  const lead = value / power;
  return power * (lead >= 5 ? 5 : lead >= 2 ? 2 : 1);
}
