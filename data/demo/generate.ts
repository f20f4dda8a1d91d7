import { existsSync, mkdirSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { developOnEllipsoid, type Origin } from '../synthetic/geodetic-path.ts';
import { buildLine, type SyntheticLine } from '../synthetic/line.ts';
import { gaussMarkov, seededStream } from '../synthetic/random.ts';
import type { ReceiverErrors } from '../synthetic/receiver.ts';
import { simulatePassage, type SimulatedRun } from '../synthetic/simulate.ts';
import type { SpeedPlan, StationStop } from '../synthetic/speed.ts';
import { BUS_NAME, BUS_ORIGIN, layBusRoute } from './bus-route.ts';
import { writeCsv, writeGpx, writeNmea, type LogDetails, type Mark } from './formats.ts';
import {
  LINE_NAME,
  OPERATOR,
  RAIL_ORIGIN,
  REGISTER_MISSING,
  REGISTER_WRONG,
  SIGNAL_STOP_CURVE,
  TUNNEL,
  layRailway,
  reversePieces,
  type Railway,
} from './railway.ts';

const SEED = 20250311;
const CREATOR = 'Bendbook demonstration';

/** How one day's run was driven and recorded. */
interface DemoRun {
  readonly file: string;
  readonly title: string;
  readonly mode: 'rail' | 'road';
  readonly up: boolean;
  readonly start: string;
  readonly rateHz: number;
  /** Share of the posted speed that was driven. */
  readonly pace: number;
  readonly condition: 'clean' | 'phone';
  readonly errors: Partial<ReceiverErrors>;
  /** Metres after the tunnel until the receiver has a fix again. */
  readonly reacquireM: number;
  readonly signalStop: boolean;
  readonly dwellS: readonly number[];
}

const RUNS: readonly DemoRun[] = [
  {
    file: 'rail-cab-2025-03-11.nmea',
    title: 'Cab logger, 11 March, towards Osmarra, 10 Hz',
    mode: 'rail',
    up: false,
    start: '2025-03-11T07:42:10Z',
    rateHz: 10,
    pace: 1,
    condition: 'clean',
    errors: { sigmaWhiteM: 0.4, sigmaWanderM: 1.2, wanderTimeS: 150, lagS: 0.1, coordinateDecimals: 8 },
    reacquireM: 20,
    signalStop: false,
    dwellS: [40, 55],
  },
  {
    file: 'rail-phone-2025-03-19.gpx',
    title: 'Telephone of a passenger, 19 March, towards Osmarra',
    mode: 'rail',
    up: false,
    start: '2025-03-19T16:05:33Z',
    rateHz: 1,
    pace: 0.97,
    condition: 'phone',
    errors: {
      sigmaWhiteM: 0.9,
      sigmaWanderM: 2.4,
      wanderTimeS: 120,
      lagS: 0.5,
      coordinateDecimals: 6,
      burstsPerHour: 0,
      gapsPerHour: 0,
    },
    reacquireM: 170,
    signalStop: true,
    dwellS: [70, 45],
  },
  {
    file: 'rail-tracker-2025-04-02.csv',
    title: 'Tracker of the unit, 2 April, towards Osmarra',
    mode: 'rail',
    up: false,
    start: '2025-04-02T11:18:00Z',
    rateHz: 1,
    pace: 1.02,
    condition: 'clean',
    errors: { sigmaWhiteM: 0.6, sigmaWanderM: 1.8, wanderTimeS: 100, lagS: 0, coordinateDecimals: 6 },
    reacquireM: 40,
    signalStop: false,
    dwellS: [50, 60],
  },
  {
    file: 'rail-return-2025-04-02.gpx',
    title: 'Tracker of the unit, 2 April, towards Fennick Head',
    mode: 'rail',
    up: true,
    start: '2025-04-02T12:03:20Z',
    rateHz: 1,
    pace: 0.99,
    condition: 'clean',
    errors: { sigmaWhiteM: 0.6, sigmaWanderM: 1.8, wanderTimeS: 100, lagS: 0, coordinateDecimals: 6 },
    reacquireM: 40,
    signalStop: false,
    dwellS: [35, 65],
  },
  {
    file: 'bus-route-7-2025-03-27.gpx',
    title: `${BUS_NAME}, 27 March`,
    mode: 'road',
    up: false,
    start: '2025-03-27T09:30:05Z',
    rateHz: 1,
    pace: 1,
    condition: 'clean',
    errors: { sigmaWhiteM: 0.6, sigmaWanderM: 1.6, wanderTimeS: 90, lagS: 0, coordinateDecimals: 6 },
    reacquireM: 0,
    signalStop: false,
    dwellS: [22, 35, 28, 40],
  },
];

/** Gradients of an invented coast: two rises, a few metres each. */
const heightM = (chainageM: number) =>
  18 + 22 * Math.sin(chainageM / 2100) + 6 * Math.sin(chainageM / 640 + 1) + 0.0012 * chainageM;

interface DrivenLine {
  readonly line: SyntheticLine;
  readonly origin: Origin;
  readonly northRad: number;
}

/** The track as this run meets it: from the other end when it goes up. */
function turn(railway: Railway, origin: Origin, up: boolean): DrivenLine {
  if (!up) return { line: railway.line, origin, northRad: Math.PI / 2 };
  const path = developOnEllipsoid(railway.line, origin);
  const end = railway.line.lengthM;
  const [latDeg, lonDeg] = path.toGeodetic(end, ...railway.line.positionAt(end));
  return {
    line: buildLine(reversePieces(railway.pieces), railway.line.headingAt(end) + Math.PI),
    origin: { latDeg, lonDeg },
    northRad: path.northAt(end),
  };
}

function drivingPlan(railway: Railway, run: DemoRun, lengthM: number): SpeedPlan {
  const rail = run.mode === 'rail';
  const own = (chainageM: number) => (run.up ? lengthM - chainageM : chainageM);
  const stops: StationStop[] = railway.stations
    .slice(1, -1)
    .map((station, i) => ({ chainageM: own(station.chainageM), dwellS: run.dwellS[i]! }));
  if (run.signalStop) {
    const at = railway.curves[SIGNAL_STOP_CURVE - 1]!;
    stops.push({ chainageM: own((at.arcStartM + at.arcEndM) / 2), dwellS: 75 });
  }
  return {
    lineSpeedMps: (run.pace * (rail ? 120 : 48)) / 3.6,
    limits: railway.curves.map((curve) => {
      const ends = [own(curve.startM), own(curve.endM)];
      return {
        startM: Math.min(...ends),
        endM: Math.max(...ends),
        speedMps: (run.pace * curve.postedKmh) / 3.6,
      };
    }),
    stops,
    accelerationMps2: rail ? 0.45 : 0.9,
    brakingMps2: rail ? 0.55 : 1.1,
    ripple: 0.015,
    terminalDwellS: 15,
  };
}

function recordRun(railway: Railway, run: DemoRun, index: number): SimulatedRun {
  const driven = turn(railway, run.mode === 'rail' ? RAIL_ORIGIN : BUS_ORIGIN, run.up);
  const { lengthM } = driven.line;
  const tunnelCurve = railway.curves[TUNNEL.curve - 1];
  const tunnels = [];
  if (run.mode === 'rail' && tunnelCurve) {
    const from = tunnelCurve.startM - TUNNEL.beforeM;
    const to = tunnelCurve.arcStartM + TUNNEL.intoArcM;
    tunnels.push(
      run.up
        ? { startM: lengthM - to, endM: lengthM - from + run.reacquireM }
        : { startM: from, endM: to + run.reacquireM },
    );
  }
  return simulatePassage(
    { line: driven.line, plan: drivingPlan(railway, run, lengthM) },
    { rateHz: run.rateHz, course: true, condition: run.condition, errors: run.errors, tunnels },
    SEED + 101 * index,
    {
      name: run.file,
      origin: driven.origin,
      northRad: driven.northRad,
      startUtcS: Date.parse(run.start) / 1000,
    },
  );
}

function logDetails(sim: SimulatedRun, run: DemoRun, lengthM: number, index: number): LogDetails {
  const random = seededStream(SEED + 7 * index + 1);
  const { timeS } = sim.run.fixes;
  const drift = gaussMarkov(random, timeS, 2.5, 120);
  const noise = Float64Array.from(timeS, () => 0.4 * random.normal());
  const sky = gaussMarkov(random, timeS, 1.2, 60);
  return {
    title: `${run.mode === 'rail' ? LINE_NAME : BUS_NAME}, ${run.start.slice(0, 10)}`,
    creator: CREATOR,
    repeatCourse: run.condition === 'phone',
    elevationM: (i) => {
      const s = sim.truth.chainageM[i]!;
      return heightM(run.up ? lengthM - s : s) + drift[i]! + noise[i]!;
    },
    satellites: (i) => Math.round(Math.min(14, Math.max(7, 11 + sky[i]!))),
    hdop: (i) => Math.max(0.6, 0.9 - 0.1 * sky[i]!),
  };
}

function stationMarks(railway: Railway, origin: Origin): Mark[] {
  const path = developOnEllipsoid(railway.line, origin);
  return railway.stations.map(({ name, chainageM }) => {
    const s = Math.min(chainageM, railway.line.lengthM);
    const [latDeg, lonDeg] = path.toGeodetic(s, ...railway.line.positionAt(s));
    return { name, latDeg, lonDeg };
  });
}

function writeRegister(railway: Railway): string {
  const lines = [
    `# Cant register of an invented line, ${LINE_NAME}: chainage from Fennick Head, circular part of each curve.`,
    'from_m,to_m,cant_mm,note',
  ];
  for (const curve of railway.curves) {
    if (curve.number === REGISTER_MISSING) continue;
    const cantMm = curve.number === REGISTER_WRONG.curve ? REGISTER_WRONG.cantMm : curve.cantMm;
    const note = curve.entryM === 0 ? 'no transitions' : '';
    lines.push(`${curve.arcStartM.toFixed(0)},${curve.arcEndM.toFixed(0)},${String(cantMm)},${note}`);
  }
  lines.push('');
  return lines.join('\n');
}

const rounded = (value: number, digits: number) => Number(value.toFixed(digits));

function describeLine(railway: Railway) {
  return {
    lengthM: rounded(railway.line.lengthM, 3),
    stations: railway.stations,
    elements: railway.line.elements.map((element) => ({
      kind: element.kind,
      startM: rounded(element.startM, 3),
      endM: rounded(element.endM, 3),
      startCurvaturePerM: rounded(element.startCurvaturePerM, 9),
      endCurvaturePerM: rounded(element.endCurvaturePerM, 9),
    })),
    curves: railway.curves.map((curve) => ({
      number: curve.number,
      hand: curve.hand,
      radiusM: curve.radiusM,
      startM: rounded(curve.startM, 3),
      arcStartM: rounded(curve.arcStartM, 3),
      arcEndM: rounded(curve.arcEndM, 3),
      endM: rounded(curve.endM, 3),
      postedKmh: curve.postedKmh,
      cantMm: curve.cantMm,
    })),
  };
}

function describeRun(sim: SimulatedRun, run: DemoRun, railway: Railway) {
  const { travel, errors, line } = sim.truth;
  const own = (chainageM: number) => (run.up ? line.lengthM - chainageM : chainageM);
  return {
    file: run.file,
    direction: run.up ? 'against the chainage' : 'with the chainage',
    fixes: sim.run.fixes.count,
    durationS: rounded(travel.durationS, 1),
    errors: {
      sigmaWhiteM: rounded(errors.sigmaWhiteM, 3),
      sigmaWanderM: rounded(errors.sigmaWanderM, 3),
      wanderTimeS: rounded(errors.wanderTimeS, 1),
      sigmaDopplerWhiteMps: rounded(errors.sigmaDopplerWhiteMps, 4),
      sigmaDopplerSlowMps: rounded(errors.sigmaDopplerSlowMps, 4),
      lagS: errors.lagS,
    },
    arcSpeedsKmh: railway.curves.map((curve) => {
      const speeds = Array.from({ length: 21 }, (_, k) =>
        travel.speedAt(own(curve.arcStartM + ((curve.arcEndM - curve.arcStartM) * k) / 20)),
      );
      return {
        curve: curve.number,
        mean: rounded((3.6 * speeds.reduce((sum, v) => sum + v, 0)) / speeds.length, 2),
        highest: rounded(3.6 * Math.max(...speeds), 2),
      };
    }),
  };
}

/** All files of the demonstration by name, the same on every machine. */
export function makeDemo(): Map<string, string> {
  const railway = layRailway();
  const bus = layBusRoute();
  const files = new Map<string, string>();
  const described = RUNS.map((run, index) => {
    const own = run.mode === 'rail' ? railway : bus;
    const sim = recordRun(own, run, index);
    const details = logDetails(sim, run, own.line.lengthM, index);
    const marks = stationMarks(own, run.mode === 'rail' ? RAIL_ORIGIN : BUS_ORIGIN);
    if (run.file.endsWith('.nmea')) files.set(run.file, writeNmea(sim.run, details));
    else if (run.file.endsWith('.csv')) files.set(run.file, writeCsv(sim.run, details));
    else files.set(run.file, writeGpx(sim.run, run.condition === 'phone' ? '1.1' : '1.0', details, marks));
    return describeRun(sim, run, own);
  });
  files.set('cant-register.csv', writeRegister(railway));
  files.set(
    'demo.json',
    json({
      operator: OPERATOR,
      line: LINE_NAME,
      recordings: RUNS.map(({ file, mode, title }) => ({ file, mode, title })),
      register: { file: 'cant-register.csv', name: `${LINE_NAME} (demonstration)` },
      note: 'Operator, places and line are invented; the logs are simulated over a line of known geometry. One row of the cant register is missing and one is wrong.',
    }),
  );
  files.set(
    'truth.json',
    json({
      note: 'Geometry and driving from which the demonstration logs were made. Chainages in m from the first station.',
      rail: {
        ...describeLine(railway),
        register: {
          missingCurve: REGISTER_MISSING,
          wrongCurve: REGISTER_WRONG.curve,
          writtenMm: REGISTER_WRONG.cantMm,
        },
        tunnel: {
          startM: rounded(railway.curves[TUNNEL.curve - 1]!.startM - TUNNEL.beforeM, 1),
          endM: rounded(railway.curves[TUNNEL.curve - 1]!.arcStartM + TUNNEL.intoArcM, 1),
        },
        signalStopInCurve: SIGNAL_STOP_CURVE,
      },
      bus: describeLine(bus),
      runs: described,
    }),
  );
  return files;
}

const json = (value: unknown) => `${JSON.stringify(value, null, 1)}\n`;

/** data/demo of the checkout, also when this runs compiled from a folder beside it. */
function demoFolder(): string {
  let folder = dirname(fileURLToPath(import.meta.url));
  while (!existsSync(join(folder, 'package.json'))) {
    const above = dirname(folder);
    if (above === folder) throw new Error('No package.json above this file: run from within a checkout');
    folder = above;
  }
  return join(folder, 'data', 'demo');
}

if (process.argv[1] !== undefined && import.meta.url === pathToFileURL(process.argv[1]).href) {
  const folder = demoFolder();
  mkdirSync(folder, { recursive: true });
  let bytes = 0;
  for (const [name, text] of makeDemo()) {
    writeFileSync(join(folder, name), text);
    bytes += Buffer.byteLength(text);
  }
  process.stdout.write(`Demonstration written to ${folder}: ${(bytes / 1e6).toFixed(2)} MB\n`);
}
