/** A line in unit Mercator coordinates with the class of each place; NaN lifts the pen. */
export interface Polyline {
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly rank: Int8Array;
}

/** What is left for the screen: pixels, class of the piece that ends there, and whether the pen is down on it. */
export interface ScreenLine {
  readonly count: number;
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly rank: Int8Array;
  readonly pen: Uint8Array;
}

/** Places nearer than this to the last one kept are skipped, px. */
const NEAR_PX = 2;
/** Pieces wholly outside the view by more than this are not drawn, px. */
const MARGIN_PX = 40;

/**
 * Screen decimation: of places that fall within two pixels one is kept, with the highest class of those skipped, so that
 * the worst place shows at every zoom. Pieces outside the view are left out.
 */
export function decimate(
  line: Polyline,
  view: {
    readonly scale: number;
    readonly dx: number;
    readonly dy: number;
    readonly width: number;
    readonly height: number;
  },
): ScreenLine {
  const n = line.x.length;
  const out = { x: new Float64Array(n), y: new Float64Array(n), rank: new Int8Array(n), pen: new Uint8Array(n) };
  let count = 0;
  let worst = 0;
  let [px, py] = [NaN, NaN];
  let down = false;
  for (let i = 0; i < n; i++) {
    const x = line.x[i]! * view.scale - view.dx;
    const y = line.y[i]! * view.scale - view.dy;
    if (Number.isNaN(x) || Number.isNaN(y)) {
      down = false;
      continue;
    }
    worst = Math.max(worst, line.rank[i]!);
    const last = i === n - 1;
    if (down && !last && Math.abs(x - px) < NEAR_PX && Math.abs(y - py) < NEAR_PX) continue;
    const visible =
      Math.max(x, down ? px : x) > -MARGIN_PX &&
      Math.min(x, down ? px : x) < view.width + MARGIN_PX &&
      Math.max(y, down ? py : y) > -MARGIN_PX &&
      Math.min(y, down ? py : y) < view.height + MARGIN_PX;
    out.x[count] = x;
    out.y[count] = y;
    out.rank[count] = worst;
    out.pen[count] = down && visible ? 1 : 0;
    // Two places running outside: the earlier one is not needed.
    if (!visible && count > 0 && out.pen[count - 1] === 0) {
      out.x[count - 1] = x;
      out.y[count - 1] = y;
    } else count++;
    [px, py] = [x, y];
    worst = line.rank[i]!;
    down = true;
  }
  return { count, x: out.x, y: out.y, rank: out.rank, pen: out.pen };
}
