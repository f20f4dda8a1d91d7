import { quantileNormal95, studentFactor95 } from './intervals.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { AlignmentElement, Curve, CurveEnd, CurveShape, Estimate } from '../../shared/model/alignment.ts';
import { deflectionOf } from './choose-model.ts';
import type { StretchFit } from './fit-stretch.ts';
import { changeLength, levelAfter, levelBefore, SHORTEST_M, type Stretch } from './stretch-model.ts';

/** A curve must turn at least so much, rad, and stand out by so many standard deviations. */
const LEAST_DEFLECTION_RAD = 0.008;
const LEAST_SIGMA = 3.5;
/** One-sided 5 % level of the likelihood ratio at the boundary L = 0. */
const TRANSITION_CHI2 = 2.71;
/** Below this radius transitions up to 5 m are called abrupt, above it up to 15 m. */
const SHARP_RADIUS_M = 150;
const WELL_OBSERVED = 0.7;
/** Curves with less than this between them touch, m. */
const TOUCHING_M = 1;

/** What the curves of a fit need besides the fit itself. */
export interface CurveContext {
  readonly motion: Motion;
  /** Relative sd of the chainage's scale over an arc of n speed readings is scaleSdMps / (v sqrt(n)). */
  readonly scaleSdMps: number;
  readonly hasCourse: boolean;
  /** Sd of what remains of the lag of courses, s: shifts every change along the line. */
  readonly lagSdS: number;
  /** Degrees of freedom behind the noise levels, for Student's factor. */
  readonly noiseDof: number;
  readonly goodShare: (fit: StretchFit, fromM: number, toM: number) => number;
}

/** A fitted level together with its fit: what becomes a curve. */
interface Candidate {
  readonly fit: StretchFit;
  readonly level: number;
}

/** Levels that are told from straight, in order along the run. */
export function curveCandidates(fits: readonly StretchFit[]): Candidate[] {
  const found: Candidate[] = [];
  for (const fit of fits) {
    fit.stretch.levels.forEach((kappa, level) => {
      if (fit.stretch.straight[level]!) return;
      const { deflection, deflectionVariance, variance } = deflectionOf(fit, level);
      if (Math.abs(deflection) < LEAST_DEFLECTION_RAD) return;
      const sharp = Math.abs(kappa) >= LEAST_SIGMA * Math.sqrt(variance);
      if (!sharp && Math.abs(deflection) < LEAST_SIGMA * Math.sqrt(deflectionVariance)) return;
      found.push({ fit, level });
    });
  }
  return found;
}

/** Curves of the run, numbered from 1, with ends, intervals and remarks. */
export function buildCurves(candidates: readonly Candidate[], context: CurveContext): Curve[] {
  const numberOf = (fit: StretchFit, level: number): number | null => {
    const index = candidates.findIndex((c) => c.fit === fit && c.level === level);
    return index < 0 ? null : index + 1;
  };
  return candidates.map((candidate, i) => buildCurve(candidate, i + 1, context, numberOf));
}

function buildCurve(
  { fit, level }: Candidate,
  number: number,
  context: CurveContext,
  numberOf: (fit: StretchFit, level: number) => number | null,
): Curve {
  const { stretch, layout, covariance } = fit;
  const n = layout.size;
  const kappa = stretch.levels[level]!;
  const factor = studentFactor95(Math.min(context.noiseDof, Math.max(3, fit.observations - n) * 3));
  const { meanMps } = arcSpeed(context.motion, stretch.middles[level]!, stretch.middles[level + 1]!);
  const shiftSdM = context.lagSdS * meanMps;
  const entry = curveEnd(fit, level, level, 'entry', numberOf, factor, shiftSdM);
  const exit = curveEnd(fit, level, level + 1, 'exit', numberOf, factor, shiftSdM);
  const startM = entry.outerM;
  const endM = exit.outerM;
  const arcStartM = Math.min(entry.innerM, (entry.innerM + exit.innerM) / 2);
  const arcEndM = Math.max(exit.innerM, arcStartM);
  const speed = arcSpeed(context.motion, arcStartM, arcEndM);
  const scaleSd =
    context.scaleSdMps > 0
      ? context.scaleSdMps / (Math.max(1, speed.meanMps) * Math.sqrt(Math.max(1, speed.count)))
      : 0;
  const p = layout.level[level]!;
  const fitted = Math.sqrt(covariance[p * n + p]!);
  const sd = Math.hypot(fitted, kappa * scaleSd);
  const curvature: Estimate = { value: kappa, sd, low: kappa - factor * sd, high: kappa + factor * sd };
  const { deflection, deflectionVariance } = deflectionOf(fit, level);
  const turn = Math.abs(deflection);
  const turnSd = Math.sqrt(deflectionVariance);
  const hand = kappa > 0 ? 'left' : 'right';
  // omega = v kappa is measured by courses without the speed, positions scale both: the speed's scale enters once.
  const speedRelative = speed.meanMps > 0 ? speed.sdMps / speed.meanMps : 0;
  const lateralRelativeSd = Math.hypot(fitted / Math.abs(kappa), speedRelative);
  const observedShare = context.goodShare(fit, startM, endM);
  return {
    number,
    hand,
    shape: shapeOf(entry.end, exit.end, kappa),
    startM,
    endM,
    arcStartM,
    arcEndM,
    entry: entry.end,
    exit: exit.end,
    curvaturePerM: curvature,
    radiusM: radiusOf(curvature),
    deflectionRad: { value: turn, sd: turnSd, low: Math.max(0, turn - factor * turnSd), high: turn + factor * turnSd },
    lateralRelativeSd,
    speedMps: {
      value: speed.meanMps,
      sd: speed.sdMps,
      low: Math.max(0, speed.meanMps - quantileNormal95 * speed.sdMps),
      high: speed.meanMps + quantileNormal95 * speed.sdMps,
    },
    observedShare,
    chi2PerDof: fit.chi2PerDof,
    remarks: remarks(entry.end, exit.end, observedShare, fit.chi2PerDof, context.hasCourse),
  };
}

interface PlacedEnd {
  readonly end: CurveEnd;
  /** Tangent point on the far side of the change, and on the arc's side. */
  readonly outerM: number;
  readonly innerM: number;
}

function curveEnd(
  fit: StretchFit,
  level: number,
  change: number,
  side: 'entry' | 'exit',
  numberOf: (fit: StretchFit, level: number) => number | null,
  factor: number,
  shiftSdM: number,
): PlacedEnd {
  const { stretch, layout, covariance } = fit;
  const n = layout.size;
  const m = layout.middle[change]!;
  const kappa = stretch.levels[level]!;
  const other = side === 'entry' ? levelBefore(stretch, change) : levelAfter(stretch, change);
  const c = stretch.middles[change]!;
  const cSd = Math.hypot(Math.sqrt(Math.max(0, covariance[m * n + m]!)), shiftSdM);
  const u = stretch.squares[change]!;
  const uSd = Math.sqrt(Math.max(0, covariance[(m + 1) * n + m + 1]!));
  let length = changeLength(u) <= SHORTEST_M ? 0 : changeLength(u);
  let low = Math.sqrt(Math.max(0, u - factor * uSd));
  let high = Math.sqrt(Math.max(0, u + factor * uSd));
  const chi2 = uSd > 0 ? (u / uSd) ** 2 : 0;
  const short = Math.abs(1 / kappa) < SHARP_RADIUS_M ? 5 : 15;
  const kind = chi2 > TRANSITION_CHI2 && length > 0 ? 'transition' : high < short ? 'abrupt' : 'undetermined';
  let centre = c;
  const reverse = other * kappa < 0;
  if (reverse) {
    // A direct ramp between curves of opposite hand passes through zero: each has its share of it.
    const share = Math.abs(kappa) / (Math.abs(kappa) + Math.abs(other));
    const zero = side === 'entry' ? c + length / 2 - length * share : c - length / 2 + length * share;
    centre = side === 'entry' ? zero + (length * share) / 2 : zero - (length * share) / 2;
    length *= share;
    low *= share;
    high *= share;
  }
  if (kind === 'abrupt') length = 0;
  const neighbour = side === 'entry' ? level - 1 : level + 1;
  const beyond = side === 'entry' ? level - 2 : level + 2;
  const touching =
    other === 0 && stretch.straight[neighbour] === true && straightLength(stretch, neighbour) < TOUCHING_M;
  const joins = other !== 0 ? numberOf(fit, neighbour) : touching ? numberOf(fit, beyond) : null;
  const half = length / 2;
  return {
    end: {
      kind,
      lengthM: {
        value: length,
        sd: length > 0 ? uSd / (2 * Math.max(length, SHORTEST_M)) : Math.sqrt(uSd) / 2,
        low,
        high,
      },
      middleM: { value: centre, sd: cSd, low: centre - factor * cSd, high: centre + factor * cSd },
      fromCurvaturePerM: reverse ? 0 : other,
      joins,
    },
    outerM: side === 'entry' ? centre - half : centre + half,
    innerM: side === 'entry' ? centre + half : centre - half,
  };
}

/** What the changes on both sides leave of level k, m. */
function straightLength({ middles, squares }: Stretch, k: number): number {
  return middles[k + 1]! - middles[k]! - (changeLength(squares[k]!) + changeLength(squares[k + 1]!)) / 2;
}

function shapeOf(entry: CurveEnd, exit: CurveEnd, kappa: number): CurveShape {
  for (const end of [entry, exit]) {
    if (end.joins === null) continue;
    if (end.fromCurvaturePerM * kappa > 0) return 'compound';
  }
  if (entry.joins !== null || exit.joins !== null) return 'reverse';
  return entry.kind === 'abrupt' && exit.kind === 'abrupt' ? 'abrupt' : 'simple';
}

function radiusOf(k: Estimate): Estimate {
  const size = Math.abs(k.value);
  const [weak, strong] = k.value > 0 ? [k.low, k.high] : [-k.high, -k.low];
  return { value: 1 / size, sd: k.sd / (size * size), low: 1 / strong, high: weak > 0 ? 1 / weak : Infinity };
}

/** Mean speed over a range of chainage by distance, its sd, and the count of fixes in it. */
function arcSpeed(motion: Motion, fromM: number, toM: number): { meanMps: number; sdMps: number; count: number } {
  const { chainageM, speedMps, speedSdMps, count } = motion;
  let [low, high] = [0, count];
  while (low < high) {
    const middle = (low + high) >> 1;
    if (chainageM[middle]! < fromM) low = middle + 1;
    else high = middle;
  }
  let [weight, sum, sd, fixes] = [0, 0, 0, 0];
  for (let i = Math.max(0, low - 1); i + 1 < count && chainageM[i]! < toM; i++) {
    const a = Math.max(fromM, chainageM[i]!);
    const b = Math.min(toM, chainageM[i + 1]!);
    if (b <= a) continue;
    const v = (speedMps[i]! + speedMps[i + 1]!) / 2;
    weight += b - a;
    sum += (b - a) * v;
    sd += ((b - a) * (speedSdMps[i]! + speedSdMps[i + 1]!)) / 2;
    fixes++;
  }
  if (weight === 0) {
    const i = Math.min(count - 1, low);
    return { meanMps: speedMps[i]!, sdMps: speedSdMps[i]!, count: 1 };
  }
  return { meanMps: sum / weight, sdMps: sd / weight, count: fixes };
}

function remarks(
  entry: CurveEnd,
  exit: CurveEnd,
  observedShare: number,
  chi2PerDof: number,
  hasCourse: boolean,
): string[] {
  const out: string[] = [];
  const open = [entry, exit].filter(({ kind }) => kind === 'undetermined');
  if (open.length > 0) {
    const bound = Math.max(...open.map(({ lengthM }) => lengthM.high));
    const side = open.length === 2 ? 'entry and exit' : open[0] === entry ? 'entry' : 'exit';
    out.push(
      `The length of the ${side} transition is not resolved (at most ${bound.toFixed(0)} m); ` +
        (hasCourse ? 'a higher rate or more runs would decide it' : 'a log with course would decide it'),
    );
  }
  if (observedShare < WELL_OBSERVED) {
    out.push(
      `Only ${(100 * observedShare).toFixed(0)} % of the passage was seen by good fixes: another run would decide`,
    );
  }
  if (chi2PerDof >= 3) out.push('The fixes do not fit any curve well: do not rely on the interval');
  return out;
}

/** Elements over the whole run: straights between curves, transitions and arcs; contiguous, in order. */
export function elementsOf(curves: readonly Curve[], lengthM: number): AlignmentElement[] {
  const elements: AlignmentElement[] = [];
  let at = 0;
  const add = (kind: AlignmentElement['kind'], toM: number, from: number, to: number) => {
    const end = Math.min(lengthM, Math.max(at, toM));
    if (end - at < 1e-6) return;
    elements.push({ kind, startM: at, endM: end, startCurvaturePerM: from, endCurvaturePerM: to });
    at = end;
  };
  curves.forEach((curve, i) => {
    const kappa = curve.curvaturePerM.value;
    const previous = curves[i - 1];
    const shared = curve.entry.joins !== null && curve.entry.fromCurvaturePerM !== 0;
    if (!shared) {
      add('straight', curve.startM, 0, 0);
      add('transition', curve.arcStartM, 0, kappa);
    } else if (previous === undefined) add('transition', curve.arcStartM, curve.entry.fromCurvaturePerM, kappa);
    add('arc', curve.arcEndM, kappa, kappa);
    add('transition', curve.endM, kappa, curve.exit.joins === null ? 0 : curve.exit.fromCurvaturePerM);
  });
  add('straight', lengthM, 0, 0);
  return elements;
}
