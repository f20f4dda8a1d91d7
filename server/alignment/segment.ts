import type { Motion } from '../../shared/model/motion.ts';

/** What an element of the piecewise-linear description of curvature is. */
export const KIND = { STRAIGHT: 0, ARC: 1, UP: 2, DOWN: 3, BETWEEN: 4 } as const;

export interface Segment {
  readonly kind: number;
  readonly fromM: number;
  readonly toM: number;
  /** Mean curvature of the segment, 1/m. */
  readonly curvaturePerM: number;
}

/** Smoothed curvature on an even grid of chainage, with the weight of each cell. */
export interface CurvatureGrid {
  readonly count: number;
  readonly fromM: number;
  readonly stepM: number;
  readonly kappa: Float64Array;
  readonly weight: Float64Array;
  /** Median distance over which the smoothed curvature's error is one error, m. */
  readonly correlationM: number;
}

/** Step between the finest and the coarsest grid worth having, m. */
const FINEST_STEP_M = 1;
const COARSEST_STEP_M = 15;
/** Arcs and transitions are looked for up to so many cells and metres. */
const MOST_CELLS = 220;
const LONGEST_TRANSITION_M = 250;

/**
 * Curvature, interpolated to a grid of a sixth of its correlation length. For a walk of curvature seen through noisy headings
 * the smoother's errors of heading and curvature are in the ratio lambda = (S/q)^(1/4) and the error of curvature is correlated
 * over about lambda / sqrt(2): so the ratio of the two standard deviations tells the length. Cells shorter than it are not
 * independent and count by their share of it.
 */
export function curvatureGrid(motion: Motion): CurvatureGrid {
  const { count, chainageM, curvaturePerM, curvatureSdPerM, headingSdRad } = motion;
  const lengths: number[] = [];
  const stride = Math.max(1, Math.floor(count / 20_000));
  for (let i = 0; i < count; i += stride) {
    if (motion.speedMps[i]! < 1) continue;
    const length = headingSdRad[i]! / (Math.SQRT2 * curvatureSdPerM[i]!);
    if (Number.isFinite(length)) lengths.push(length);
  }
  lengths.sort((a, b) => a - b);
  const correlationM = Math.min(150, Math.max(3, lengths[lengths.length >> 1] ?? 30));
  const stepM = Math.min(COARSEST_STEP_M, Math.max(FINEST_STEP_M, correlationM / 5));
  const fromM = chainageM[0] ?? 0;
  const cells = Math.max(1, Math.floor(((chainageM[count - 1] ?? 0) - fromM) / stepM));
  const kappa = new Float64Array(cells);
  const weight = new Float64Array(cells);
  let i = 0;
  for (let c = 0; c < cells; c++) {
    const s = fromM + (c + 0.5) * stepM;
    while (i + 1 < count && chainageM[i + 1]! <= s) i++;
    const j = Math.min(count - 1, i + 1);
    const width = chainageM[j]! - chainageM[i]!;
    const t = width > 0 ? Math.min(1, Math.max(0, (s - chainageM[i]!) / width)) : 0;
    kappa[c] = curvaturePerM[i]! + t * (curvaturePerM[j]! - curvaturePerM[i]!);
    const sd = curvatureSdPerM[i]! + t * (curvatureSdPerM[j]! - curvatureSdPerM[i]!);
    const local = (headingSdRad[i]! / Math.max(1e-12, curvatureSdPerM[i]!)) * Math.SQRT1_2;
    weight[c] = Math.min(1, stepM / Math.min(300, Math.max(stepM, local))) / (sd * sd);
  }
  return { count: cells, fromM, stepM, kappa, weight, correlationM };
}

/** Penalties in units of chi-square. */
export interface Penalties {
  readonly arc: number;
  readonly transition: number;
  readonly straight: number;
  readonly abruptFromStraight: number;
  readonly abruptBetween: number;
}

export const WITH_COURSE: Penalties = { arc: 10, transition: 4, straight: 4, abruptFromStraight: 2, abruptBetween: 4 };
export const POSITIONS_ONLY: Penalties = {
  arc: 5,
  transition: 2,
  straight: 2,
  abruptFromStraight: 1,
  abruptBetween: 2,
};

/**
 * Exact minimum, by dynamic programming, of sum of weighted squares plus penalties over descriptions of the curvature by
 * straights (zero), arcs (constant) and linear changes: up from a straight, down to one, or between arcs.
 * It divides too finely on purpose; the fit to the fixes decides. O(n) with a bounded look-back.
 */
export function segmentCurvature(grid: CurvatureGrid, penalties: Penalties): Segment[] {
  const { count: n, stepM, kappa, weight } = grid;
  const sums = prefixSums(grid);
  const { WKK } = sums;
  const KINDS = 5;
  const best = new Float64Array((n + 1) * KINDS).fill(Infinity);
  const from = new Int32Array((n + 1) * KINDS).fill(-1);
  const previous = new Int8Array((n + 1) * KINDS).fill(-1);
  best[KIND.STRAIGHT] = 0;
  best[KIND.ARC] = penalties.arc;
  const mostArc = MOST_CELLS;
  const mostChange = Math.max(3, Math.min(120, Math.round(LONGEST_TRANSITION_M / stepM)));
  // A straight costs W(b) - W(a): its best beginning is a running minimum.
  let straightBest = 0;
  let straightFrom = 0;
  let straightKind: number = KIND.STRAIGHT;
  const enter = new Float64Array(n + 1);
  const enterKind = new Int8Array(n + 1);
  const changeEnter = new Float64Array(n + 1);
  const changeKind = new Int8Array(n + 1);
  const arcEnd = new Float64Array(n + 1);
  const note = (t: number): void => {
    const row = t * KINDS;
    const straight = best[row + KIND.STRAIGHT]!;
    const arc = best[row + KIND.ARC]!;
    const up = best[row + KIND.UP]!;
    const down = best[row + KIND.DOWN]!;
    const between = best[row + KIND.BETWEEN]!;
    let value = straight + penalties.abruptFromStraight;
    let kind: number = KIND.STRAIGHT;
    if (up < value) [value, kind] = [up, KIND.UP];
    if (between < value) [value, kind] = [between, KIND.BETWEEN];
    if (arc + penalties.abruptBetween < value) [value, kind] = [arc + penalties.abruptBetween, KIND.ARC];
    enter[t] = value;
    enterKind[t] = kind;
    changeEnter[t] = Math.min(straight, down);
    changeKind[t] = straight <= down ? KIND.STRAIGHT : KIND.DOWN;
    arcEnd[t] = arc;
    const viaArc = arc + penalties.abruptFromStraight;
    const start = Math.min(viaArc, down) + penalties.straight - WKK[t]!;
    if (start < straightBest) {
      straightBest = start;
      straightFrom = t;
      straightKind = viaArc <= down ? KIND.ARC : KIND.DOWN;
    }
  };
  note(0);
  for (let t = 1; t <= n; t++) {
    const row = t * KINDS;
    best[row + KIND.STRAIGHT] = straightBest + WKK[t]!;
    from[row + KIND.STRAIGHT] = straightFrom;
    previous[row + KIND.STRAIGHT] = straightKind;
    let [arcValue, arcFrom] = [Infinity, -1];
    let [upValue, upFrom] = [Infinity, -1];
    let [downValue, downFrom] = [Infinity, -1];
    let [midValue, midFrom] = [Infinity, -1];
    for (let a = t - 1; a >= Math.max(0, t - mostArc); a--) {
      const arc = enter[a]! + arcCost(sums, a, t);
      if (arc < arcValue) [arcValue, arcFrom] = [arc, a];
      // A beginning further back costs at least this arc less one division: none of them can win any more.
      else if (arc > arcValue + penalties.arc + penalties.abruptBetween) break;
    }
    arcValue += penalties.arc;
    // Moments of the cells [a, t) about t, summed as a goes back: prefix sums of squared positions would lose all digits on long runs.
    let [w, wk, wkk, ws, wss, wsk] = [0, 0, 0, 0, 0, 0];
    for (let a = t - 1; a >= Math.max(0, t - mostChange); a--) {
      const cell = weight[a]!;
      const k = kappa[a]!;
      const d = a + 0.5 - t;
      w += cell;
      wk += cell * k;
      wkk += cell * k * k;
      ws += cell * d;
      wss += cell * d * d;
      wsk += cell * k * d;
      // Through zero at its beginning (up) or its end (down): moments about that end.
      const length = t - a;
      const upSS = wss + 2 * length * ws + length * length * w;
      const upSK = wsk + length * wk;
      const up = changeEnter[a]! + (upSS > 0 ? wkk - (upSK * upSK) / upSS : 0);
      if (up < upValue) [upValue, upFrom] = [up, a];
      const down = arcEnd[a]! + (wss > 0 ? wkk - (wsk * wsk) / wss : 0);
      if (down < downValue) [downValue, downFrom] = [down, a];
      if (w <= 0) continue;
      const spread = wss - (ws * ws) / w;
      const slope = wsk - (ws * wk) / w;
      const flat = wkk - (wk * wk) / w;
      const mid = arcEnd[a]! + (spread > 1e-9 * wss ? flat - (slope * slope) / spread : flat);
      if (mid < midValue) [midValue, midFrom] = [mid, a];
    }
    upValue += penalties.transition;
    downValue += penalties.transition;
    midValue += penalties.transition + penalties.abruptBetween;
    best[row + KIND.ARC] = arcValue;
    from[row + KIND.ARC] = arcFrom;
    previous[row + KIND.ARC] = arcFrom >= 0 ? enterKind[arcFrom]! : -1;
    best[row + KIND.UP] = upValue;
    from[row + KIND.UP] = upFrom;
    previous[row + KIND.UP] = upFrom >= 0 ? changeKind[upFrom]! : -1;
    best[row + KIND.DOWN] = downValue;
    from[row + KIND.DOWN] = downFrom;
    previous[row + KIND.DOWN] = KIND.ARC;
    best[row + KIND.BETWEEN] = midValue;
    from[row + KIND.BETWEEN] = midFrom;
    previous[row + KIND.BETWEEN] = KIND.ARC;
    note(t);
  }
  return traceBack(grid, { best, from, previous }, n, KINDS, kappa, weight);
}

function traceBack(
  grid: CurvatureGrid,
  table: { best: Float64Array; from: Int32Array; previous: Int8Array },
  n: number,
  kinds: number,
  kappa: Float64Array,
  weight: Float64Array,
): Segment[] {
  let kind: number = KIND.STRAIGHT;
  for (let k = 1; k < kinds; k++) if (table.best[n * kinds + k]! < table.best[n * kinds + kind]!) kind = k;
  const segments: Segment[] = [];
  let t = n;
  while (t > 0 && kind >= 0) {
    const row = t * kinds + kind;
    const a = Math.max(0, table.from[row]!);
    let [w, wk] = [0, 0];
    for (let c = a; c < t; c++) {
      w += weight[c]!;
      wk += weight[c]! * kappa[c]!;
    }
    segments.push({
      kind,
      fromM: grid.fromM + a * grid.stepM,
      toM: grid.fromM + t * grid.stepM,
      curvaturePerM: kind === KIND.STRAIGHT ? 0 : w > 0 ? wk / w : 0,
    });
    kind = table.previous[row]!;
    t = a;
  }
  return segments.reverse();
}

type Sums = ReturnType<typeof prefixSums>;

/** Weighted squares about the best constant over cells [a, t). */
function arcCost({ W, WK, WKK }: Sums, a: number, t: number): number {
  const w = W[t]! - W[a]!;
  const wk = WK[t]! - WK[a]!;
  return WKK[t]! - WKK[a]! - (w > 0 ? (wk * wk) / w : 0);
}

/** Prefix sums of weight times 1, kappa and kappa^2. */
function prefixSums({ count, kappa, weight }: CurvatureGrid) {
  const make = () => new Float64Array(count + 1);
  const [W, WK, WKK] = [make(), make(), make()];
  for (let c = 0; c < count; c++) {
    const w = weight[c]!;
    const k = kappa[c]!;
    W[c + 1] = W[c]! + w;
    WK[c + 1] = WK[c]! + w * k;
    WKK[c + 1] = WKK[c]! + w * k * k;
  }
  return { W, WK, WKK };
}
