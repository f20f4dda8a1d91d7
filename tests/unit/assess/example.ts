import { readFileSync } from 'node:fs';
import type { Curve, CurveEnd, Estimate } from '../../../shared/model/alignment.ts';
import type { Passage, RunPassages } from '../../../shared/model/passage.ts';
import type { LimitSet } from '../../../shared/schema/limit-set.ts';
import type { Setup } from '../../../shared/schema/setup.ts';
import type { Vehicle } from '../../../shared/schema/vehicle.ts';
import { parseLimitSet, parseVehicle } from '../../../shared/limits/index.ts';
import { ROOT } from '../../support/shared.ts';

const Z = 1.959963984540054;

export function estimate(value: number, sd = 0): Estimate {
  return { value, sd, low: value - Z * sd, high: value + Z * sd };
}

/** A known curve for tests: everything that a test does not name has a plain value. */
export interface Example {
  number?: number;
  hand?: 'left' | 'right';
  startM?: number;
  radiusM?: number;
  entryM?: number;
  exitM?: number;
  arcM?: number;
  speedMps?: number | ((s: number) => number);
  speedSdMps?: number;
  relativeSd?: number;
  stepM?: number;
  entry?: Partial<CurveEnd>;
  exit?: Partial<CurveEnd>;
  accelerationMps2?: number;
}

function end(lengthM: number, middleM: number, over: Partial<CurveEnd> | undefined): CurveEnd {
  return {
    kind: lengthM > 0 ? 'transition' : 'abrupt',
    lengthM: estimate(lengthM),
    middleM: estimate(middleM),
    fromCurvaturePerM: 0,
    joins: null,
    ...over,
  };
}

export function passage(example: Example = {}): Passage {
  const { number = 1, hand = 'left', startM = 1000, radiusM = 700, entryM = 80, exitM = 80, arcM = 300 } = example;
  const { speedMps = 120 / 3.6, speedSdMps = 0, relativeSd = 0, stepM = 5, accelerationMps2 = 0 } = example;
  const arcStartM = startM + entryM;
  const arcEndM = arcStartM + arcM;
  const endM = arcEndM + exitM;
  const sign = hand === 'left' ? 1 : -1;
  const speedAt = typeof speedMps === 'number' ? (): number => speedMps : speedMps;
  const chainageM: number[] = [];
  for (let s = startM; s < endM - 1e-9; s += stepM) chainageM.push(s);
  chainageM.push(endM);
  const kappa = estimate(sign / radiusM, relativeSd / radiusM);
  const curve: Curve = {
    number,
    hand,
    shape: 'simple',
    startM,
    endM,
    arcStartM,
    arcEndM,
    entry: end(entryM, startM + entryM / 2, example.entry),
    exit: end(exitM, arcEndM + exitM / 2, example.exit),
    curvaturePerM: kappa,
    radiusM: {
      value: radiusM,
      sd: relativeSd * radiusM,
      low: radiusM / (1 + Z * relativeSd),
      high: radiusM / (1 - Z * relativeSd),
    },
    deflectionRad: estimate((arcM + (entryM + exitM) / 2) / radiusM),
    lateralRelativeSd: relativeSd,
    speedMps: estimate(speedAt((arcStartM + arcEndM) / 2), speedSdMps),
    observedShare: 1,
    chi2PerDof: 1,
    remarks: [],
  };
  return {
    curve,
    chainageM,
    speedMps: chainageM.map(speedAt),
    speedSdMps: chainageM.map(() => speedSdMps),
    accelerationMps2: chainageM.map(() => accelerationMps2),
    elevationM: chainageM.map(() => null),
    start: [51, 4],
    middle: [51.001, 4.002],
    end: [51.002, 4.004],
  };
}

export function run(passages: readonly Passage[]): RunPassages {
  const last = passages[passages.length - 1];
  return {
    run: 'example',
    lengthM: (last?.curve.endM ?? 0) + 1000,
    durationS: 600,
    intervalS: 1,
    hasCourse: true,
    passages,
  };
}

export function limitSet(id: string): LimitSet {
  return parseLimitSet(readFileSync(`${ROOT}data/limits/${id}.json`, 'utf8'), id);
}

export function vehicle(id: string): Vehicle {
  return parseVehicle(readFileSync(`${ROOT}data/vehicles/${id}.json`, 'utf8'), id);
}

export function setup(over: Partial<Setup> = {}): Setup {
  const mode = over.mode ?? 'rail';
  return {
    mode,
    limits: limitSet(mode === 'rail' ? 'conventional-train' : 'bus-coach-standing'),
    vehicle: vehicle(mode === 'rail' ? 'coach-conventional' : 'bus-city'),
    register: null,
    cantRule: { kind: 'constant', value: mode === 'rail' ? 110 : 2 },
    tier: 'normal',
    confidence: 0.95,
    ...over,
  };
}
