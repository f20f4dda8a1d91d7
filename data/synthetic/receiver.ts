import { FLAG, type Resolution, type RunFixes } from '../../shared/model/run.ts';
import type { GeodeticPath } from './geodetic-path.ts';
import type { SyntheticLine } from './line.ts';
import { gaussMarkov, type RandomStream } from './random.ts';
import type { Travel } from './speed.ts';

/**
 * clean: white and wandering position error, Doppler error, some lag. dirty: besides, outliers, multipath bursts,
 * gaps, coarse rounding, jittering whole-second stamps, stale course. phone: smooth filtered errors in place of
 * white ones, lag, stale and repeated course at low speed, coarse rounding.
 */
export type ReceiverCondition = 'clean' | 'dirty' | 'phone';

/** What goes wrong in one receiver, drawn once per run. Position and Doppler errors are per horizontal axis. */
export interface ReceiverErrors {
  readonly sigmaWhiteM: number;
  /** Correlation time of the `white` part: 0, or some seconds when the receiver filters its positions. */
  readonly whiteTimeS: number;
  readonly sigmaWanderM: number;
  readonly wanderTimeS: number;
  readonly sigmaDopplerWhiteMps: number;
  readonly sigmaDopplerSlowMps: number;
  readonly dopplerTimeS: number;
  /** Speed and course refer to an instant this long before the stamp, s. */
  readonly lagS: number;
  /** Share of fixes thrown 5 to 25 m off. */
  readonly outlierShare: number;
  /** Multipath: 5 to 20 s with an offset of 3 to 8 m and fourfold Doppler error. */
  readonly burstsPerHour: number;
  /** Tunnels: 8 to 45 s without a fix. */
  readonly gapsPerHour: number;
  /** Below this speed the course may be repeated from the last fix. */
  readonly staleCourseBelowMps: number;
  readonly coordinateDecimals: number;
  readonly speedStepMps: number;
  readonly courseStepRad: number;
  /** Fixes are taken off their whole-interval stamps by up to this, s. */
  readonly stampJitterS: number;
  /** The vehicle's own wander in its lane, m rms (0 on rails). */
  readonly laneWanderM: number;
}

export interface ReceiverOptions {
  readonly rateHz: number;
  /** With Doppler speed and course, or positions only. */
  readonly course: boolean;
  readonly condition?: ReceiverCondition;
  /** Fixed values in place of drawn ones. */
  readonly errors?: Partial<ReceiverErrors>;
  /** Known tunnels by chainage of the vehicle, besides those drawn. */
  readonly tunnels?: readonly { readonly startM: number; readonly endM: number }[];
}

export interface Observation {
  readonly fixes: RunFixes;
  readonly resolution: Resolution;
  readonly errors: ReceiverErrors;
  /** What is true at each fix: the instant of the position, and the vehicle's state then. */
  readonly trueTimeS: Float64Array;
  readonly trueChainageM: Float64Array;
  readonly trueSpeedMps: Float64Array;
  /** 1 where the fix is an outlier or in a burst. */
  readonly spoiled: Uint8Array;
  /** Start and end of bursts and of stretches without fixes, s. */
  readonly bursts: readonly (readonly [number, number])[];
  readonly gaps: readonly (readonly [number, number])[];
}

const DEGREE = Math.PI / 180;
/** Below this speed a receiver's course says nothing. */
const COURSE_FLOOR_MPS = 1.2;
const STANDSTILL_MPS = 0.3;

/** Draws a receiver: ranges of the error model for ordinary receivers (common practice, no source). */
function drawErrors(options: ReceiverOptions, random: RandomStream): ReceiverErrors {
  const condition = options.condition ?? 'clean';
  const sigmaDoppler = random.between(0.05, 0.1);
  const drawn: ReceiverErrors = {
    sigmaWhiteM: random.between(0.3, 1),
    whiteTimeS: condition === 'phone' ? random.between(3, 10) : 0,
    sigmaWanderM: random.between(1, 3),
    wanderTimeS: random.between(60, 300),
    sigmaDopplerWhiteMps: sigmaDoppler * Math.SQRT1_2,
    sigmaDopplerSlowMps: sigmaDoppler * Math.SQRT1_2,
    dopplerTimeS: 1,
    lagS: condition === 'phone' ? random.between(0.2, 1) : random.chance(0.5) ? 0 : random.between(0, 1),
    outlierShare: condition === 'dirty' ? 0.002 : 0,
    burstsPerHour: condition === 'dirty' ? 6 : condition === 'phone' ? 2 : 0,
    gapsPerHour: condition === 'dirty' ? 6 : condition === 'phone' ? 2 : 0,
    staleCourseBelowMps: condition === 'phone' ? 3 : condition === 'dirty' ? 2 : 0,
    coordinateDecimals: condition === 'clean' ? 8 : random.chance(0.4) ? 5 : 6,
    speedStepMps: condition === 'clean' ? 0.001 : 0.01,
    courseStepRad: (condition === 'clean' ? 0.01 : 0.1) * DEGREE,
    stampJitterS: condition === 'dirty' && options.rateHz === 1 && random.chance(0.4) ? 0.1 : 0,
    laneWanderM: 0,
  };
  return { ...drawn, ...options.errors };
}

function drawSpans(
  perHour: number,
  shortestS: number,
  longestS: number,
  durationS: number,
  random: RandomStream,
): (readonly [number, number])[] {
  const spans: (readonly [number, number])[] = [];
  if (perHour <= 0) return spans;
  let t = 20 - (Math.log(1 - random.uniform()) * 3600) / perHour;
  while (t < durationS - longestS - 20) {
    const end = t + random.between(shortestS, longestS);
    spans.push([t, end]);
    t = end - (Math.log(1 - random.uniform()) * 3600) / perHour;
  }
  return spans;
}

const inSpan = (spans: readonly (readonly [number, number])[], t: number) => spans.some(([a, b]) => t >= a && t < b);

/** Smooth lateral offset of given rms, wavelengths 250 to 1000 m. */
function laneWander(rmsM: number, random: RandomStream): (chainageM: number) => number {
  if (rmsM === 0) return () => 0;
  const waves = Array.from({ length: 4 }, () => ({
    perM: (2 * Math.PI) / random.logBetween(250, 1000),
    phase: random.between(0, 2 * Math.PI),
  }));
  const amplitude = rmsM * Math.sqrt(2 / waves.length);
  return (s) => waves.reduce((sum, wave) => sum + amplitude * Math.sin(wave.perM * s + wave.phase), 0);
}

const roundTo = (value: number, step: number) => (step > 0 ? Math.round(value / step) * step : value);

/**
 * What a receiver aboard writes down, as a cleaned log: duplicates and meaningless courses are already gone.
 *
 * Position = truth + white + Gauss-Markov (+ outliers, bursts), rounded as latitude and longitude.
 * Doppler velocity per axis = truth at (t - lag) + white + Gauss-Markov; speed is its length and course its direction.
 */
export function observe(
  line: SyntheticLine,
  travel: Travel,
  path: GeodeticPath,
  options: ReceiverOptions,
  random: RandomStream,
): Observation {
  const errors = drawErrors(options, random);
  const intervalS = 1 / options.rateHz;
  const total = Math.floor(travel.durationS * options.rateHz) + 1;
  const bursts = drawSpans(errors.burstsPerHour, 5, 20, travel.durationS, random);
  const gaps = drawSpans(errors.gapsPerHour, 8, 45, travel.durationS, random);
  for (const tunnel of options.tunnels ?? []) gaps.push([travel.timeAt(tunnel.startM), travel.timeAt(tunnel.endM)]);

  const stampS: number[] = [];
  const instantS: number[] = [];
  for (let i = 0; i < total; i += 1) {
    const stamp = i * intervalS;
    const instant = i === 0 ? 0 : stamp + errors.stampJitterS * random.between(-1, 1);
    if (inSpan(gaps, stamp)) continue;
    stampS.push(stamp);
    instantS.push(instant);
  }
  const count = stampS.length;
  const trueTimeS = Float64Array.from(instantS);
  const wanderX = gaussMarkov(random, trueTimeS, errors.sigmaWanderM, errors.wanderTimeS);
  const wanderY = gaussMarkov(random, trueTimeS, errors.sigmaWanderM, errors.wanderTimeS);
  const slowX = gaussMarkov(random, trueTimeS, errors.sigmaDopplerSlowMps, errors.dopplerTimeS);
  const slowY = gaussMarkov(random, trueTimeS, errors.sigmaDopplerSlowMps, errors.dopplerTimeS);
  const smooth = errors.whiteTimeS > 0;
  const jitterX = smooth ? gaussMarkov(random, trueTimeS, errors.sigmaWhiteM, errors.whiteTimeS) : null;
  const jitterY = smooth ? gaussMarkov(random, trueTimeS, errors.sigmaWhiteM, errors.whiteTimeS) : null;
  const lane = laneWander(errors.laneWanderM, random);
  const burstOffsets = bursts.map(() => {
    const angle = random.between(0, 2 * Math.PI);
    const size = random.between(3, 8);
    return [size * Math.cos(angle), size * Math.sin(angle)] as const;
  });

  const timeS = Float64Array.from(stampS);
  const latDeg = new Float64Array(count);
  const lonDeg = new Float64Array(count);
  const xM = new Float64Array(count);
  const yM = new Float64Array(count);
  const northRad = new Float64Array(count);
  const speedMps = options.course ? new Float32Array(count) : null;
  const courseRad = options.course ? new Float32Array(count) : null;
  const flags = new Uint8Array(count);
  const trueChainageM = new Float64Array(count);
  const trueSpeedMps = new Float64Array(count);
  const spoiled = new Uint8Array(count);
  const scale = 10 ** errors.coordinateDecimals;
  let lastCourse = Number.NaN;

  for (let i = 0; i < count; i += 1) {
    const instant = trueTimeS[i]!;
    const state = travel.at(instant);
    trueChainageM[i] = state.chainageM;
    trueSpeedMps[i] = state.speedMps;
    const heading = line.headingAt(state.chainageM);
    const [x0, y0] = line.positionAt(state.chainageM);
    const offset = lane(state.chainageM);
    let x = x0 - offset * Math.sin(heading) + wanderX[i]!;
    let y = y0 + offset * Math.cos(heading) + wanderY[i]!;
    x += jitterX ? jitterX[i]! : errors.sigmaWhiteM * random.normal();
    y += jitterY ? jitterY[i]! : errors.sigmaWhiteM * random.normal();
    const burst = bursts.findIndex(([a, b]) => instant >= a && instant < b);
    if (burst >= 0) {
      x += burstOffsets[burst]![0];
      y += burstOffsets[burst]![1];
      spoiled[i] = 1;
    }
    if (errors.outlierShare > 0 && random.chance(errors.outlierShare)) {
      const angle = random.between(0, 2 * Math.PI);
      const size = random.between(5, 25);
      x += size * Math.cos(angle);
      y += size * Math.sin(angle);
      spoiled[i] = 1;
    }
    const [lat, lon] = path.toGeodetic(state.chainageM, x, y);
    latDeg[i] = Math.round(lat * scale) / scale;
    lonDeg[i] = Math.round(lon * scale) / scale;
    const [xRounded, yRounded] = path.toPlane(state.chainageM, latDeg[i]!, lonDeg[i]!);
    xM[i] = xRounded;
    yM[i] = yRounded;
    northRad[i] = path.northAt(state.chainageM);

    let still = state.speedMps < 0.05;
    if (speedMps && courseRad) {
      const seen = travel.at(instant - errors.lagS);
      const seenHeading = line.headingAt(seen.chainageM);
      const gain = burst >= 0 ? 4 : 1;
      const vx =
        seen.speedMps * Math.cos(seenHeading) + gain * (slowX[i]! + errors.sigmaDopplerWhiteMps * random.normal());
      const vy =
        seen.speedMps * Math.sin(seenHeading) + gain * (slowY[i]! + errors.sigmaDopplerWhiteMps * random.normal());
      const speed = roundTo(Math.hypot(vx, vy), errors.speedStepMps);
      let course = roundTo(northRad[i]! - Math.atan2(vy, vx), errors.courseStepRad);
      if (speed < errors.staleCourseBelowMps && !Number.isNaN(lastCourse) && random.chance(0.7)) course = lastCourse;
      lastCourse = course;
      course -= 2 * Math.PI * Math.floor(course / (2 * Math.PI));
      speedMps[i] = speed;
      courseRad[i] = speed < COURSE_FLOOR_MPS ? Number.NaN : course;
      still = speed < STANDSTILL_MPS;
    }
    if (still) flags[i]! |= FLAG.STOPPED;
    if (i > 0) {
      const wait = timeS[i]! - timeS[i - 1]!;
      if (wait > 3 * intervalS && wait > 2.5) flags[i]! |= FLAG.GAP_BEFORE;
    }
  }

  return {
    fixes: {
      count,
      timeS,
      latDeg,
      lonDeg,
      xM,
      yM,
      northRad,
      elevationM: null,
      speedMps,
      courseRad,
      accuracyM: null,
      flags,
      row: Uint32Array.from({ length: count }, (_, i) => i + 1),
    },
    resolution: {
      positionM: errors.coordinateDecimals >= 7 ? 0 : 111_000 * 10 ** -errors.coordinateDecimals,
      speedMps: errors.speedStepMps,
      courseRad: errors.courseStepRad,
      timeS: errors.stampJitterS > 0 ? 1 : 0,
    },
    errors,
    trueTimeS,
    trueChainageM,
    trueSpeedMps,
    spoiled,
    bursts,
    gaps,
  };
}
