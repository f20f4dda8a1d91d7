import type { Run } from '../../../shared/model/run.ts';
import { FLAG } from '../../../shared/model/run.ts';

/** Families of lines: radii, arc and transition lengths, lengths of straight, cruising speed (m, m/s), time between stops (s). */
export const FAMILIES = {
  main: {
    radius: [600, 3000],
    arc: [200, 600],
    transition: [60, 150],
    straight: [200, 1500],
    speed: [25, 42],
    stopEvery: 15_000,
  },
  secondary: {
    radius: [200, 500],
    arc: [80, 250],
    transition: [30, 70],
    straight: [60, 500],
    speed: [14, 22],
    stopEvery: 4000,
  },
  tram: { radius: [25, 100], arc: [15, 60], transition: [0, 15], straight: [20, 200], speed: [4, 8.3], stopEvery: 500 },
  road: {
    radius: [50, 300],
    arc: [30, 120],
    transition: [15, 50],
    straight: [30, 400],
    speed: [14, 22],
    stopEvery: 5000,
  },
} as const;

export interface Receiver {
  readonly intervalS: number;
  readonly whiteM: number;
  readonly wanderM: number;
  readonly wanderTimeS: number;
  readonly dopplerMps: number;
  readonly dopplerTimeS: number;
  readonly hasSpeed: boolean;
  readonly hasCourse: boolean;
  readonly lagS: number;
  /** Bursts, outliers, gaps. */
  readonly dirty: boolean;
}

export const RECEIVER: Receiver = {
  intervalS: 1,
  whiteM: 0.6,
  wanderM: 2,
  wanderTimeS: 120,
  dopplerMps: 0.075,
  dopplerTimeS: 1,
  hasSpeed: true,
  hasCourse: true,
  lagS: 0,
  dirty: false,
};

export interface Truth {
  readonly chainageM: Float64Array;
  readonly xM: Float64Array;
  readonly yM: Float64Array;
  readonly headingRad: Float64Array;
  readonly speedMps: Float64Array;
  readonly curvaturePerM: Float64Array;
}

/** Uniform numbers in [0, 1) from a seed (mulberry32, public domain). */
export function randomFrom(seed: number): () => number {
  let a = seed >>> 0;
  return () => {
    a = (a + 0x6d2b79f5) >>> 0;
    let t = a;
    t = Math.imul(t ^ (t >>> 15), t | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
  };
}

/** A run of `durationS` over a random line of the family, seen by the receiver, with its truth at every fix. */
export function simulateRun(
  family: keyof typeof FAMILIES,
  seed: number,
  durationS: number,
  options: Partial<Receiver> = {},
): { run: Run; truth: Truth } {
  const receiver = { ...RECEIVER, ...options };
  const random = randomFrom(seed);
  const normal = (): number => Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
  const between = ([low, high]: readonly [number, number]): number => low + (high - low) * random();
  const f = FAMILIES[family];

  // Curvature at break points, linear between.
  const breakAt = [0];
  const breakCurvature = [0];
  const lineM = f.speed[1] * durationS * 1.1 + 5000;
  let s = 0;
  const push = (length: number, curvature: number): void => {
    s += length;
    breakAt.push(s);
    breakCurvature.push(curvature);
  };
  while (s < lineM) {
    push(between(f.straight), 0);
    const curvature = (random() < 0.5 ? -1 : 1) / Math.exp(between([Math.log(f.radius[0]), Math.log(f.radius[1])]));
    push(between(f.transition) + 0.01, curvature);
    push(between(f.arc), curvature);
    push(between(f.transition) + 0.01, 0);
  }

  const n = Math.floor(durationS / receiver.intervalS);
  const column = (): Float64Array => new Float64Array(n);
  const truth = {
    chainageM: column(),
    xM: column(),
    yM: column(),
    headingRad: column(),
    speedMps: column(),
    curvaturePerM: column(),
  };
  const timeS = column();
  const step = 0.02;
  const per = Math.round(receiver.intervalS / step);
  let v = 0;
  let a = 0;
  let dwell = 20;
  let chainage = 0;
  let nextStop = f.stopEvery * (0.5 + random());
  let cruise = between(f.speed);
  let cruiseUntil = 300;
  let x = 0;
  let y = 0;
  let heading = random() * 6;
  let piece = 0;
  const headings: number[] = [];
  const speeds: number[] = [];
  for (let i = 0; i < n; i++) {
    truth.chainageM[i] = chainage;
    truth.xM[i] = x;
    truth.yM[i] = y;
    truth.headingRad[i] = heading;
    truth.speedMps[i] = v;
    timeS[i] = i * receiver.intervalS;
    for (let k = 0; k < per; k++) {
      headings.push(heading);
      speeds.push(v);
      while (breakAt[piece + 1]! < chainage) piece++;
      const u = (chainage - breakAt[piece]!) / (breakAt[piece + 1]! - breakAt[piece]!);
      const curvature = breakCurvature[piece]! + u * (breakCurvature[piece + 1]! - breakCurvature[piece]!);
      if (k === 0) truth.curvaturePerM[i] = curvature;
      if (chainage > cruiseUntil) {
        cruise = between(f.speed);
        cruiseUntil = chainage + 200 + random() * 1500;
      }
      const toStop = nextStop - chainage;
      if (dwell > 0) {
        dwell -= step;
        v = 0;
        a = 0;
      } else {
        const wanted = Math.min(cruise, Math.max(0.3, Math.sqrt(Math.max(0, 2 * 0.55 * (toStop - 1.5 * v)))));
        const target = Math.max(-0.9, Math.min(0.7, (wanted - v) / 1.5));
        a += Math.max(-0.7 * step, Math.min(0.7 * step, target - a));
        v = Math.max(0, v + a * step);
        if (toStop < 0.3 || (v < 0.31 && toStop < 2 && a <= 0)) {
          dwell = 15 + 30 * random();
          nextStop = chainage + f.stopEvery * (0.5 + random());
          v = 0;
        }
      }
      const d = v * step;
      x += d * Math.cos(heading + (curvature * d) / 2);
      y += d * Math.sin(heading + (curvature * d) / 2);
      heading += curvature * d;
      chainage += d;
    }
  }

  const rhoP = Math.exp(-receiver.intervalS / receiver.wanderTimeS);
  const rhoD = Math.exp(-receiver.intervalS / receiver.dopplerTimeS);
  let wanderX = receiver.wanderM * normal();
  let wanderY = receiver.wanderM * normal();
  const half = receiver.dopplerMps / Math.SQRT2;
  let slowC = half * normal();
  let slowV = half * normal();
  const xM = column();
  const yM = column();
  const speedMps = new Float32Array(n);
  const courseRad = new Float32Array(n);
  const flags = new Uint8Array(n);
  let burst = 0;
  let gap = 0;
  let burstX = 0;
  let burstY = 0;
  const keep: number[] = [];
  for (let i = 0; i < n; i++) {
    wanderX = rhoP * wanderX + Math.sqrt(1 - rhoP * rhoP) * receiver.wanderM * normal();
    wanderY = rhoP * wanderY + Math.sqrt(1 - rhoP * rhoP) * receiver.wanderM * normal();
    slowC = rhoD * slowC + Math.sqrt(1 - rhoD * rhoD) * half * normal();
    slowV = rhoD * slowV + Math.sqrt(1 - rhoD * rhoD) * half * normal();
    let offsetX = 0;
    let offsetY = 0;
    let worse = 1;
    if (receiver.dirty) {
      if (burst <= 0 && random() < receiver.intervalS / 400) {
        burst = 5 + 15 * random();
        const size = 3 + 5 * random();
        const direction = random() * 7;
        burstX = size * Math.cos(direction);
        burstY = size * Math.sin(direction);
      }
      if (burst > 0) {
        burst -= receiver.intervalS;
        offsetX = burstX;
        offsetY = burstY;
        worse = 4;
      }
      if (random() < 0.002) offsetX += (random() < 0.5 ? -1 : 1) * (5 + 20 * random());
      if (gap <= 0 && random() < receiver.intervalS / 600) gap = 8 + 37 * random();
      if (gap > 0) gap -= receiver.intervalS;
    }
    if (gap <= 0) keep.push(i);
    xM[i] = truth.xM[i]! + wanderX + offsetX + receiver.whiteM * normal();
    yM[i] = truth.yM[i]! + wanderY + offsetY + receiver.whiteM * normal();
    const speed = truth.speedMps[i]!;
    const cross = worse * (slowC + half * normal());
    const along = worse * (slowV + half * normal());
    const lagged = headings[Math.max(0, i * per - Math.round(receiver.lagS / step))]!;
    const laggedSpeed = speeds[Math.max(0, i * per - Math.round(receiver.lagS / step))]!;
    speedMps[i] = Math.hypot(laggedSpeed + along, laggedSpeed < 0.3 ? cross : 0);
    const theta = lagged + Math.atan2(cross, Math.max(0.1, speed));
    courseRad[i] = receiver.hasCourse && speed > 1.2 ? Math.PI / 2 - theta : NaN;
    if (speed < 0.05 && (receiver.hasSpeed ? speedMps[i]! < 0.3 : true)) flags[i] = FLAG.STOPPED;
  }
  const pick = <T extends Float64Array | Float32Array | Uint8Array>(from: T): T => {
    const to = from.slice(0, keep.length) as T;
    for (let k = 0; k < keep.length; k++) to[k] = from[keep[k]!]!;
    return to;
  };
  const time = pick(timeS);
  const count = keep.length;
  const run: Run = {
    id: '1',
    recordingName: `${family}-${seed}`,
    startUtcS: 0,
    intervalS: receiver.intervalS,
    resolution: { positionM: 0, speedMps: 0, courseRad: 0, timeS: 0 },
    fixes: {
      count,
      timeS: time,
      latDeg: new Float64Array(count),
      lonDeg: new Float64Array(count),
      xM: pick(xM),
      yM: pick(yM),
      northRad: new Float64Array(count).fill(Math.PI / 2),
      elevationM: null,
      speedMps: receiver.hasSpeed ? pick(speedMps) : null,
      courseRad: receiver.hasCourse ? pick(courseRad) : null,
      accuracyM: null,
      flags: pick(flags),
      row: Uint32Array.from(keep, (i) => i + 1),
    },
    sensors: null,
    findings: [],
  };
  return {
    run,
    truth: {
      chainageM: pick(truth.chainageM),
      xM: pick(truth.xM),
      yM: pick(truth.yM),
      headingRad: pick(truth.headingRad),
      speedMps: pick(truth.speedMps),
      curvaturePerM: pick(truth.curvaturePerM),
    },
  };
}
