import { FLAG } from '../../shared/model/run.ts';
import { sampledQuantile } from './quantiles.ts';

/** Columns of a run that these rules look at. */
export interface MovingColumns {
  readonly count: number;
  readonly timeS: Float64Array;
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  readonly latDeg: Float64Array;
  readonly lonDeg: Float64Array;
  readonly speedMps: Float32Array | null;
}

/** Below this Doppler speed the vehicle stands, m/s. */
const STANDING_MPS = 0.3;
/** Half of the window in which a standing receiver must stay, s. */
const HALF_WINDOW_S = 2.5;

/** White error of position per axis from second differences of neighbouring fixes, m. */
function whiteErrorM({ count, timeS, xM, yM }: MovingColumns): number {
  const median = sampledQuantile(count - 2, 0.5, (i) => {
    const before = timeS[i + 1]! - timeS[i]!;
    const after = timeS[i + 2]! - timeS[i + 1]!;
    if (Math.abs(before - after) > 0.1 * before || before > 2) return NaN;
    const dx = xM[i + 2]! - 2 * xM[i + 1]! + xM[i]!;
    const dy = yM[i + 2]! - 2 * yM[i + 1]! + yM[i]!;
    return Math.hypot(dx, dy);
  });
  // A second difference of white noise has six times its variance; the median of a Rayleigh length is 1.18 sigma.
  const sigma = median / (Math.sqrt(6) * 1.1774);
  return Number.isFinite(sigma) ? Math.min(1.5, Math.max(0.1, sigma)) : 0.5;
}

/**
 * Marks fixes at which the vehicle stands: Doppler speed under 0.3 m/s, or without one positions that over 5 s (at
 * least three fixes) stay within three times their white error of their mean. Returns how many.
 */
export function markStanding(columns: MovingColumns, flags: Uint8Array): number {
  const { count, timeS, xM, yM, speedMps } = columns;
  const reach = 3 * whiteErrorM(columns);
  let standing = 0;
  let a = 0;
  let b = 0;
  for (let i = 0; i < count; i++) {
    const speed = speedMps === null ? NaN : speedMps[i]!;
    let stands: boolean;
    if (Number.isFinite(speed)) stands = speed < STANDING_MPS;
    else {
      while (a < count && timeS[i]! - timeS[a]! > HALF_WINDOW_S) a++;
      if (b < i) b = i;
      while (b < count - 1 && timeS[b + 1]! - timeS[i]! <= HALF_WINDOW_S) b++;
      // Slow logs: one fix to each side, if not too far.
      const from = i > 0 && a === i && timeS[i]! - timeS[i - 1]! < 30 ? i - 1 : a;
      const to = i < count - 1 && b === i && timeS[i + 1]! - timeS[i]! < 30 ? i + 1 : b;
      stands = to - from >= 2 && withinReach(xM, yM, from, to, reach);
    }
    if (stands) {
      flags[i]! |= FLAG.STOPPED;
      standing++;
    }
  }
  return standing;
}

function withinReach(xM: Float64Array, yM: Float64Array, from: number, to: number, reach: number): boolean {
  let [x, y] = [0, 0];
  const n = to - from + 1;
  for (let i = from; i <= to; i++) {
    x += xM[i]!;
    y += yM[i]!;
  }
  x /= n;
  y /= n;
  for (let i = from; i <= to; i++) if (Math.hypot(xM[i]! - x, yM[i]! - y) > reach) return false;
  return true;
}

/** A receiver that coasts longer than this has lost the sky: the rest is a gap anyway, s. */
const LONGEST_HOLD_S = 60;
/** Average speed over a hold and the step that ends it above which the vehicle kept moving, m/s. */
const MOVING_MPS = 2;

/**
 * Marks fixes that repeat the position before them although the vehicle moves on (its speed channel says so, or the
 * next new position lies where only motion during the hold can have brought it). Returns how many.
 */
export function markHeld(columns: MovingColumns, flags: Uint8Array): number {
  const { count, timeS, xM, yM, latDeg, lonDeg, speedMps } = columns;
  let held = 0;
  let first = 0;
  for (let i = 1; i <= count; i++) {
    if (i < count && latDeg[i] === latDeg[first] && lonDeg[i] === lonDeg[first]) continue;
    // Fixes first..i-1 share one position.
    if (i - first > 1) {
      let byStep = false;
      if (i < count) {
        const duration = timeS[i]! - timeS[first]!;
        const step = Math.hypot(xM[i]! - xM[first]!, yM[i]! - yM[first]!);
        byStep = duration <= LONGEST_HOLD_S && step / duration > MOVING_MPS;
      }
      for (let j = first + 1; j < i; j++) {
        const speed = speedMps === null ? NaN : speedMps[j]!;
        if (Number.isFinite(speed) ? speed > MOVING_MPS : byStep) {
          flags[j]! |= FLAG.HELD;
          held++;
        }
      }
    }
    first = i;
  }
  return held;
}
