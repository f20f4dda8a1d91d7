import type { RollBody } from '../curving/roll-oscillator.ts';
import { rollResponse } from '../curving/roll-oscillator.ts';
import { comfortCurveTransitionPct, comfortDiscreteEventPct } from '../curving/comfort-index.ts';
import { radToDeg, STANDARD_GRAVITY_MPS2 } from '../units.ts';
import type { CurveFacts } from './curve-facts.ts';

/** Body motion through one curve as the fitted alignment, the measured speed and the vehicle's figures give it. */
export interface BodyMotion {
  /** Largest lateral body acceleration with the roll's overshoot, m/s^2. */
  readonly peakBodyMps2: number;
  /** Largest roll relative to the track plane over the quasi-static one; 1 without overshoot. */
  readonly dynamicFactor: number;
  readonly peakRollDeg: number;
  /** Entry transition, s. */
  readonly entryS: number;
  /** Windowed figures of the entry: 1 s mean acceleration, its change per second, 1 s mean roll velocity. */
  readonly meanBodyMps2: number;
  readonly meanJerkMps3: number;
  readonly meanRollDegS: number;
  /** Peak to peak and mean over the 2 s window of the largest discrete-event index. */
  readonly eventPeakToPeakMps2: number;
  readonly eventMeanMps2: number;
}

/** The vehicle as far as body motion needs it. */
export interface BodyModel {
  readonly rollCoefficient: number;
  /** Null: no natural frequency or damping known; the body follows quasi-statically. */
  readonly roll: RollBody | null;
  readonly tiltCompensation: number;
}

/** Sampling of the windows, s; the windows of EN 12299 are whole numbers of it. */
const GRID_S = 0.1;
/** Speed taken at a start or stop within a passage, m/s. */
const SLOWEST_MPS = 1;

/**
 * Curvature in favour of the curve and cant ratio at a chainage, from the fitted geometry with effective transitions.
 */
interface Shape {
  readonly s: readonly [number, number, number, number];
  readonly curvature: readonly [number, number, number];
  readonly cantRatio: readonly [number, number, number];
}

function shapeOf(facts: CurveFacts, cantRatio: number, cantRatioBefore: number, cantRatioAfter: number): Shape {
  const { curve } = facts.passage;
  const [entry, exit] = facts.ends;
  const own = facts.curvaturePerM;
  // A transition shorter than the vehicle's virtual length is spread over that length about its own middle.
  const spread = (fromM: number, toM: number, lengthM: number): [number, number] => {
    if (toM - fromM >= lengthM) return [fromM, toM];
    const middle = (fromM + toM) / 2;
    return [middle - lengthM / 2, middle + lengthM / 2];
  };
  const [a, b] = spread(curve.startM, curve.arcStartM, entry.lengthM);
  const [c, d] = spread(curve.arcEndM, curve.endM, exit.lengthM);
  return {
    s: [a, b, Math.max(c, b), Math.max(d, b)],
    curvature: [own - entry.curvatureChangePerM, own, own - exit.curvatureChangePerM],
    cantRatio: [cantRatioBefore, cantRatio, cantRatioAfter],
  };
}

/**
 * Columns of the nodes, kept between calls: a page assesses hundreds of curves a second and they need not be made
 * anew.
 */
interface Nodes {
  t: Float64Array;
  s: Float64Array;
  v: Float64Array;
  drive: Float64Array;
  lean: Float64Array;
  phi: Float64Array;
  rate: Float64Array;
  integral: Float64Array;
  count: number;
}

function makeNodes(size: number): Nodes {
  const column = (): Float64Array => new Float64Array(size);
  return {
    t: column(),
    s: column(),
    v: column(),
    drive: column(),
    lean: column(),
    phi: column(),
    rate: column(),
    integral: column(),
    count: 0,
  };
}

/**
 * Bounds the work on a passage with a crawl: more nodes than this are not laid, and the rest of the passage is left
 * out.
 */
const MOST_NODES = 16_384;
const scratch = makeNodes(MOST_NODES);

/**
 * Lays nodes of time, chainage and speed through the passage, with every junction and steps short against the roll's
 * period.
 */
function layNodes(facts: CurveFacts, shape: Shape, stepS: number, into: Nodes): void {
  const { chainageM, speedMps } = facts.passage;
  const { t, s, v } = into;
  const stations = chainageM.length;
  let n = 1;
  t[0] = 0;
  s[0] = Math.min(shape.s[0], chainageM[0]!);
  v[0] = Math.max(speedMps[0]!, SLOWEST_MPS);
  const advance = (toM: number, toV: number): void => {
    const fromM = s[n - 1]!;
    const fromV = v[n - 1]!;
    const fromT = t[n - 1]!;
    const ds = toM - fromM;
    if (!(ds > 1e-9)) return;
    const dt = (2 * ds) / (fromV + toV);
    const steps = Math.ceil(dt / stepS);
    if (n + steps > MOST_NODES) return;
    const a = (toV - fromV) / dt;
    for (let k = 1; k <= steps; k++) {
      const tau = (dt * k) / steps;
      t[n] = fromT + tau;
      s[n] = fromM + fromV * tau + (a * tau * tau) / 2;
      v[n] = fromV + a * tau;
      n++;
    }
  };
  const walk = (toM: number, toV: number): void => {
    const fromM = s[n - 1]!;
    const fromV = v[n - 1]!;
    for (const junction of shape.s) {
      if (junction > fromM + 1e-6 && junction < toM - 1e-6) {
        // Speed is interpolated by v^2 over distance: constant acceleration between stations.
        const share = (junction - fromM) / (toM - fromM);
        advance(junction, Math.sqrt(fromV * fromV + (toV * toV - fromV * fromV) * share));
      }
    }
    advance(toM, toV);
  };
  for (let i = 0; i < stations; i++) walk(chainageM[i]!, Math.max(speedMps[i]!, SLOWEST_MPS));
  const lastV = v[n - 1]!;
  // Past the end far enough for the exit's own ramp and the windows.
  walk(Math.max(shape.s[3], chainageM[stations - 1]!) + 1.7 * lastV, lastV);
  into.count = n;
}

/**
 * Body motion through a curve: roll driven by the fitted alignment at the measured speed (exact between nodes), felt
 * acceleration a + g phi, and the windows of the comfort indices.
 *
 * cantRatio: sin of the cant angle on the curve; before/after: on the far sides of its ends.
 * speedScale multiplies the measured speed (for advice).
 * Windows: 1 s centred means; acceleration from the start of the entry transition to 1.6 s after its end; its change
 * over
 * 1 s from 1 s before the start to the end; roll velocity within the transition. EN 12299:2009 (from memory). The
 * standard's
 * 2 Hz low pass is not applied: the fitted geometry holds nothing above it.
 * At a start or stop within the passage the speed is taken as at least 1 m/s.
 */
export function bodyMotion(
  facts: CurveFacts,
  model: BodyModel,
  cantRatio: number,
  cantRatioBefore: number,
  cantRatioAfter: number,
  speedScale = 1,
): BodyMotion {
  const shape = shapeOf(facts, cantRatio, cantRatioBefore, cantRatioAfter);
  const stepS = model.roll === null ? GRID_S : Math.min(0.05 / model.roll.frequencyHz, GRID_S);
  // Scaling the speed divides all times by the same factor, so the nodes laid serve for the scaled run too.
  layNodes(facts, shape, stepS * speedScale, scratch);
  const n = scratch.count;
  const { s, v, drive, lean, integral } = scratch;
  const t = scratch.t.subarray(0, n);
  const phi = scratch.phi;
  const [a, b, c, d] = shape.s;
  let quasiStatic = 0;
  for (let i = 0; i < n; i++) {
    t[i] = t[i]! / speedScale;
    const speed = v[i]! * speedScale;
    const at = s[i]!;
    // Share of the arc's own values: rises along the entry, falls along the exit.
    const far = at <= c ? 0 : 2;
    const share = at <= a ? 0 : at < b ? (at - a) / (b - a) : at <= c ? 1 : at < d ? (d - at) / (d - c) : 0;
    const ratio = shape.cantRatio[far] + (shape.cantRatio[1] - shape.cantRatio[far]) * share;
    const kappa = shape.curvature[far] + (shape.curvature[1] - shape.curvature[far]) * share;
    const track = speed * speed * kappa * Math.sqrt(1 - ratio * ratio) - STANDARD_GRAVITY_MPS2 * ratio;
    drive[i] = track * (1 - model.tiltCompensation);
    lean[i] = Math.asin(ratio);
    quasiStatic = Math.max(quasiStatic, Math.abs(drive[i]!));
  }
  if (model.roll === null) {
    for (let i = 0; i < n; i++) phi[i] = (model.rollCoefficient * drive[i]!) / STANDARD_GRAVITY_MPS2;
  } else {
    rollResponse(model.roll, t, drive.subarray(0, n), phi, scratch.rate);
  }

  let peakBody = 0;
  let peakRoll = 0;
  let before = 0;
  integral[0] = 0;
  for (let i = 0; i < n; i++) {
    const felt = drive[i]! + STANDARD_GRAVITY_MPS2 * phi[i]!;
    if (i > 0) integral[i] = integral[i - 1]! + ((felt + before) / 2) * (t[i]! - t[i - 1]!);
    before = felt;
    peakBody = Math.max(peakBody, Math.abs(felt));
    peakRoll = Math.max(peakRoll, Math.abs(phi[i]!));
    // Roll to the horizontal: the track's lean inwards less the body's roll outwards.
    lean[i] = lean[i]! - phi[i]!;
  }
  const staticRoll = (model.rollCoefficient * quasiStatic) / STANDARD_GRAVITY_MPS2;
  return {
    peakBodyMps2: peakBody,
    dynamicFactor: staticRoll > 0 ? peakRoll / staticRoll : 1,
    peakRollDeg: radToDeg(peakRoll),
    ...windows(t, integral, lean, timeOf(t, s, a), timeOf(t, s, b)),
  };
}

function timeOf(t: Float64Array, s: Float64Array, chainageM: number): number {
  let i = 0;
  while (i < t.length - 1 && s[i]! < chainageM - 1e-6) i++;
  return t[i]!;
}

type Windows = Pick<
  BodyMotion,
  'entryS' | 'meanBodyMps2' | 'meanJerkMps3' | 'meanRollDegS' | 'eventPeakToPeakMps2' | 'eventMeanMps2'
>;

function windows(t: Float64Array, integral: Float64Array, lean: Float64Array, startS: number, endS: number): Windows {
  // Everything on one grid that begins 2 s before the transition; before the first node the motion is taken as steady.
  const first = startS - 2;
  const count = Math.ceil((endS + 3.7 - first) / GRID_S) + 1;
  const area = new Float64Array(count);
  const angle = new Float64Array(count);
  const firstRate = t.length > 1 ? integral[1]! / (t[1]! - t[0]!) : 0;
  const last = t.length - 1;
  const lastRate = last > 0 ? (integral[last]! - integral[last - 1]!) / (t[last]! - t[last - 1]!) : 0;
  let k = 0;
  for (let i = 0; i < count; i++) {
    const at = first + i * GRID_S;
    while (k < last - 1 && t[k + 1]! < at) k++;
    if (at <= t[0]!) {
      area[i] = firstRate * (at - t[0]!);
      angle[i] = lean[0]!;
    } else if (at >= t[last]!) {
      area[i] = integral[last]! + lastRate * (at - t[last]!);
      angle[i] = lean[last]!;
    } else {
      const share = (at - t[k]!) / (t[k + 1]! - t[k]!);
      area[i] = integral[k]! + (integral[k + 1]! - integral[k]!) * share;
      angle[i] = lean[k]! + (lean[k + 1]! - lean[k]!) * share;
    }
  }
  const half = Math.round(0.5 / GRID_S);
  const whole = 2 * half;
  const mean = (i: number): number => area[i + half]! - area[i - half]!;
  let meanBody = 0;
  let meanJerk = 0;
  let meanRoll = 0;
  for (let i = half; i + half < count; i++) {
    const at = first + i * GRID_S;
    if (at >= startS - 1e-9 && at <= endS + 1.6 + 1e-9) meanBody = Math.max(meanBody, Math.abs(mean(i)));
    if (at >= startS - 1 - 1e-9 && at <= endS + 1e-9 && i + whole + half < count) {
      meanJerk = Math.max(meanJerk, Math.abs(mean(i + whole) - mean(i)));
    }
    if (at >= startS - 1e-9 && at <= endS + 1e-9) {
      meanRoll = Math.max(meanRoll, Math.abs(angle[i + half]! - angle[i - half]!));
    }
  }
  return {
    entryS: endS - startS,
    meanBodyMps2: meanBody,
    meanJerkMps3: meanJerk,
    meanRollDegS: radToDeg(meanRoll),
    ...discreteEvent(area, count),
  };
}

/** The 2 s window with the largest discrete-event index (standing) among the grid's samples. */
function discreteEvent(area: Float64Array, count: number): Pick<Windows, 'eventPeakToPeakMps2' | 'eventMeanMps2'> {
  const width = Math.round(2 / GRID_S);
  let worst = -1;
  let eventPeakToPeakMps2 = 0;
  let eventMeanMps2 = 0;
  // Half a window apart: the index varies slowly against it.
  for (let i = 0; i + width < count; i += width / 4) {
    let low = Infinity;
    let high = -Infinity;
    for (let j = i; j < i + width; j++) {
      const a = (area[j + 1]! - area[j]!) / GRID_S;
      low = Math.min(low, a);
      high = Math.max(high, a);
    }
    const average = (area[i + width]! - area[i]!) / 2;
    const index = comfortDiscreteEventPct(high - low, average, 'standing');
    if (index > worst || (index === worst && high - low > eventPeakToPeakMps2)) {
      worst = index;
      eventPeakToPeakMps2 = high - low;
      eventMeanMps2 = Math.abs(average);
    }
  }
  return { eventPeakToPeakMps2, eventMeanMps2 };
}

/** Comfort index of the entry, percent, for both postures. */
export function comfortOf(motion: BodyMotion): { seated: number; standing: number } {
  const of = (posture: 'seated' | 'standing'): number =>
    comfortCurveTransitionPct(motion.meanBodyMps2, motion.meanJerkMps3, motion.meanRollDegS, posture);
  return { seated: of('seated'), standing: of('standing') };
}
