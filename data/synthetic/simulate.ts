import type { AlignmentElement } from '../../shared/model/alignment.ts';
import type { Recording } from '../../shared/model/recording.ts';
import type { Run } from '../../shared/model/run.ts';
import { DEFAULT_CURVES, drawLine, type DrawnLine, type FamilyName } from './families.ts';
import { developOnEllipsoid, type Origin } from './geodetic-path.ts';
import type { SyntheticLine } from './line.ts';
import { seededStream } from './random.ts';
import { observe, type Observation, type ReceiverErrors, type ReceiverOptions } from './receiver.ts';
import { planTravel, type Travel } from './speed.ts';

/** One end of a true curve: a change of curvature over `lengthM` (0 when abrupt). */
interface TrueCurveEnd {
  readonly lengthM: number;
  /** Chainage of the middle of the change, m. */
  readonly middleM: number;
  readonly fromCurvaturePerM: number;
  /** Number of the true curve joined without a straight between, or null. */
  readonly joins: number | null;
}

export interface TrueCurve {
  /** 1, 2, ... along the line. */
  readonly number: number;
  readonly curvaturePerM: number;
  readonly startM: number;
  readonly endM: number;
  readonly arcStartM: number;
  readonly arcEndM: number;
  readonly entry: TrueCurveEnd;
  readonly exit: TrueCurveEnd;
  /** Mean speed by distance over the circular part, m/s. */
  readonly arcSpeedMps: number;
  /** Largest v^2 |kappa| on the circular part, m/s^2. */
  readonly peakLateralMps2: number;
  /** Share of the time in the curve with good fixes, 0..1. */
  readonly observedShare: number;
}

export interface SimulatedTruth {
  readonly line: SyntheticLine;
  readonly elements: readonly AlignmentElement[];
  readonly curves: readonly TrueCurve[];
  readonly travel: Travel;
  readonly errors: ReceiverErrors;
  /** At each fix of the run. */
  readonly chainageM: Float64Array;
  readonly speedMps: Float64Array;
  readonly spoiled: Uint8Array;
  readonly bursts: Observation['bursts'];
  readonly gaps: Observation['gaps'];
}

export interface SimulatedRun {
  readonly run: Run;
  readonly truth: SimulatedTruth;
}

/** A place at sea: nothing there can be taken for a real line. */
const DEFAULT_ORIGIN: Origin = { latDeg: 41.5, lonDeg: -38.25 };
/** 2030-01-01 00:00:00 UTC. */
const DEFAULT_START_UTC_S = 1893456000;

/** Line, driving and receiver drawn from one seed: same arguments, same run to the last bit. */
export function simulateRun(
  family: FamilyName,
  receiver: ReceiverOptions,
  seed: number,
  options: { readonly curves?: number } = {},
): SimulatedRun {
  const random = seededStream(seed);
  const drawn = drawLine(family, options.curves ?? DEFAULT_CURVES[family], random);
  return simulatePassage(drawn, receiver, seed + 0x5bd1e995 * 4096, {
    name: `${family}-${String(seed)}`,
    origin: DEFAULT_ORIGIN,
    startUtcS: DEFAULT_START_UTC_S,
  });
}

/** One passage over a given line. */
export function simulatePassage(
  drawn: DrawnLine,
  receiver: ReceiverOptions,
  seed: number,
  place: { readonly name: string; readonly origin: Origin; readonly startUtcS: number; readonly northRad?: number },
): SimulatedRun {
  const random = seededStream(seed);
  const travel = planTravel(drawn.line, drawn.plan, random);
  const path = developOnEllipsoid(drawn.line, place.origin, place.northRad);
  const seen = observe(drawn.line, travel, path, receiver, random);
  return {
    run: {
      id: '1',
      recordingName: place.name,
      startUtcS: place.startUtcS,
      intervalS: 1 / receiver.rateHz,
      resolution: seen.resolution,
      fixes: seen.fixes,
      sensors: null,
      findings: [],
    },
    truth: {
      line: drawn.line,
      elements: drawn.line.elements,
      curves: trueCurves(drawn.line, travel, seen),
      travel,
      errors: seen.errors,
      chainageM: seen.trueChainageM,
      speedMps: seen.trueSpeedMps,
      spoiled: seen.spoiled,
      bursts: seen.bursts,
      gaps: seen.gaps,
    },
  };
}

/** The same fixes as a recording, as a file would give them to the cleaning stage. */
export function asRecording(run: Run): Recording {
  const { fixes } = run;
  return {
    name: run.recordingName,
    format: 'csv',
    bytes: 0,
    encoding: 'utf-8',
    title: run.recordingName,
    fixes: {
      count: fixes.count,
      utcS: fixes.timeS.map((t) => t + run.startUtcS),
      latDeg: fixes.latDeg,
      lonDeg: fixes.lonDeg,
      elevationM: fixes.elevationM,
      speedMps: fixes.speedMps,
      courseRad: fixes.courseRad,
      accuracyM: fixes.accuracyM,
      hdop: null,
      satellites: null,
      fixQuality: null,
      speedAccuracyMps: null,
      courseAccuracyRad: null,
      segment: new Uint32Array(fixes.count),
      row: fixes.row,
    },
    sensors: null,
    waypoints: [],
    columns: [],
    findings: [],
  };
}

function trueCurves(line: SyntheticLine, travel: Travel, seen: Observation): TrueCurve[] {
  const { elements } = line;
  const arcs = elements.flatMap((element, index) => (element.kind === 'arc' ? [index] : []));
  const numberOf = new Map(arcs.map((index, i) => [index, i + 1]));

  /** The change of curvature beside an arc; `side` -1 before, +1 after. */
  function endOf(index: number, side: -1 | 1): TrueCurveEnd {
    const own = elements[index]!;
    const next = elements[index + side];
    const borderM = side < 0 ? own.startM : own.endM;
    if (!next) return { lengthM: 0, middleM: borderM, fromCurvaturePerM: 0, joins: null };
    if (next.kind !== 'transition') {
      return {
        lengthM: 0,
        middleM: borderM,
        fromCurvaturePerM: next.startCurvaturePerM,
        joins: numberOf.get(index + side) ?? null,
      };
    }
    const beyond = elements[index + 2 * side];
    // A reverse curve without a straight: the neighbour's transition follows at once; each keeps its own.
    const touching = beyond?.kind === 'transition' ? numberOf.get(index + 3 * side) : numberOf.get(index + 2 * side);
    return {
      lengthM: next.endM - next.startM,
      middleM: (next.startM + next.endM) / 2,
      fromCurvaturePerM: side < 0 ? next.startCurvaturePerM : next.endCurvaturePerM,
      joins: touching ?? null,
    };
  }

  return arcs.map((index, i) => {
    const own = elements[index]!;
    const entry = endOf(index, -1);
    const exit = endOf(index, 1);
    const startM = own.startM - entry.lengthM;
    const endM = own.endM + exit.lengthM;
    const speeds = Array.from({ length: 101 }, (_, k) =>
      travel.speedAt(own.startM + ((own.endM - own.startM) * k) / 100),
    );
    return {
      number: i + 1,
      curvaturePerM: own.startCurvaturePerM,
      startM,
      endM,
      arcStartM: own.startM,
      arcEndM: own.endM,
      entry,
      exit,
      arcSpeedMps: speeds.reduce((sum, v) => sum + v, 0) / speeds.length,
      peakLateralMps2: Math.max(...speeds) ** 2 * Math.abs(own.startCurvaturePerM),
      observedShare: observedShare(travel.timeAt(startM), travel.timeAt(endM), seen),
    };
  });
}

/** Share of a span of time outside gaps and bursts. */
function observedShare(fromS: number, toS: number, seen: Observation): number {
  let lost = 0;
  for (const [a, b] of [...seen.gaps, ...seen.bursts]) lost += Math.max(0, Math.min(b, toS) - Math.max(a, fromS));
  return Math.max(0, 1 - lost / Math.max(toS - fromS, 1e-9));
}
