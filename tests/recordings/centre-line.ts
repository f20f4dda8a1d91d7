import { readFileSync } from 'node:fs';

/** Surveyed centre lines of tracks, in metres about their middle. */
export interface CentreLines {
  toPlane(latDeg: number, lonDeg: number): readonly [xM: number, yM: number];
  /** Nearest point of any track: its distance and place. */
  nearest(
    xM: number,
    yM: number,
  ): { readonly distanceM: number; readonly xM: number; readonly yM: number; readonly track: number };
}

interface Geojson {
  readonly features: readonly {
    readonly geometry: { readonly type: string; readonly coordinates: readonly (readonly [number, number])[] };
  }[];
}

const CELL_M = 50;

/** Reads the LineStrings of a GeoJSON file; local scale by the radii of curvature of WGS84 (within 1e-5 over 20 km). */
export function readCentreLines(path: string): CentreLines {
  const { features } = JSON.parse(readFileSync(path, 'utf8')) as Geojson;
  const tracks = features
    .filter(({ geometry }) => geometry.type === 'LineString')
    .map(({ geometry }) => geometry.coordinates);
  const all = tracks.flat();
  const lat0 = all.reduce((sum, [, lat]) => sum + lat, 0) / all.length;
  const lon0 = all.reduce((sum, [lon]) => sum + lon, 0) / all.length;
  const w2 = 1 - 0.00669437999014 * Math.sin((lat0 * Math.PI) / 180) ** 2;
  const perLat = ((6378137 * (1 - 0.00669437999014)) / w2 ** 1.5) * (Math.PI / 180);
  const perLon = (6378137 / Math.sqrt(w2)) * Math.cos((lat0 * Math.PI) / 180) * (Math.PI / 180);
  // The length of a degree of longitude falls off to the north: to first order.
  const fall = Math.tan((lat0 * Math.PI) / 180) * (Math.PI / 180);
  const toPlane = (latDeg: number, lonDeg: number) =>
    [(lonDeg - lon0) * perLon * (1 - fall * (latDeg - lat0)), (latDeg - lat0) * perLat] as const;

  const cells = new Map<string, { ax: number; ay: number; bx: number; by: number; track: number }[]>();
  tracks.forEach((coordinates, track) => {
    for (let i = 1; i < coordinates.length; i += 1) {
      const [ax, ay] = toPlane(coordinates[i - 1]![1], coordinates[i - 1]![0]);
      const [bx, by] = toPlane(coordinates[i]![1], coordinates[i]![0]);
      const segment = { ax, ay, bx, by, track };
      const steps = Math.max(1, Math.ceil(Math.hypot(bx - ax, by - ay) / CELL_M));
      const keys = new Set<string>();
      for (let k = 0; k <= steps; k += 1) {
        const cx = Math.floor((ax + ((bx - ax) * k) / steps) / CELL_M);
        const cy = Math.floor((ay + ((by - ay) * k) / steps) / CELL_M);
        for (let dx = -1; dx <= 1; dx += 1)
          for (let dy = -1; dy <= 1; dy += 1) keys.add(`${String(cx + dx)} ${String(cy + dy)}`);
      }
      for (const key of keys) {
        const list = cells.get(key);
        if (list) list.push(segment);
        else cells.set(key, [segment]);
      }
    }
  });

  return {
    toPlane,
    nearest(xM, yM) {
      let best = { distanceM: Number.POSITIVE_INFINITY, xM: Number.NaN, yM: Number.NaN, track: -1 };
      for (const { ax, ay, bx, by, track } of cells.get(
        `${String(Math.floor(xM / CELL_M))} ${String(Math.floor(yM / CELL_M))}`,
      ) ?? []) {
        const squared = (bx - ax) ** 2 + (by - ay) ** 2;
        const t = squared > 0 ? Math.min(1, Math.max(0, ((xM - ax) * (bx - ax) + (yM - ay) * (by - ay)) / squared)) : 0;
        const px = ax + t * (bx - ax);
        const py = ay + t * (by - ay);
        const distanceM = Math.hypot(xM - px, yM - py);
        if (distanceM < best.distanceM) best = { distanceM, xM: px, yM: py, track };
      }
      return best;
    },
  };
}

/** Circle through points by least squares of x^2 + y^2 + a x + b y + c: radius and rms distance from it, m. */
export function fitCircle(points: readonly (readonly [number, number])[]): { radiusM: number; rmsM: number } {
  const n = points.length;
  const mx = points.reduce((sum, [x]) => sum + x, 0) / n;
  const my = points.reduce((sum, [, y]) => sum + y, 0) / n;
  let [xx, yy, xy, xz, yz, zm] = [0, 0, 0, 0, 0, 0];
  for (const [px, py] of points) {
    const x = px - mx;
    const y = py - my;
    const z = x * x + y * y;
    xx += x * x;
    yy += y * y;
    xy += x * y;
    xz += x * z;
    yz += y * z;
    zm += z / n;
  }
  const determinant = xx * yy - xy * xy;
  const cx = (xz * yy - yz * xy) / determinant / 2;
  const cy = (yz * xx - xz * xy) / determinant / 2;
  const radiusM = Math.sqrt(cx * cx + cy * cy + zm);
  const squares = points.reduce((sum, [x, y]) => sum + (Math.hypot(x - mx - cx, y - my - cy) - radiusM) ** 2, 0);
  return { radiusM, rmsM: Math.sqrt(squares / n) };
}
