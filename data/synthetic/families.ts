import { arc, buildLine, clothoid, straight, type Piece, type SyntheticLine } from './line.ts';
import type { RandomStream } from './random.ts';
import type { SpeedLimit, SpeedPlan, StationStop } from './speed.ts';

export const FAMILY_NAMES = [
  'main',
  'secondary',
  'tram',
  'road',
  'reverse',
  'compound',
  'abrupt',
  'stop',
  'straights',
] as const;
export type FamilyName = (typeof FAMILY_NAMES)[number];

/** A line and how it is driven. */
export interface DrawnLine {
  readonly line: SyntheticLine;
  readonly plan: SpeedPlan;
}

type Range = readonly [low: number, high: number];

interface Family {
  readonly radiusM: Range;
  readonly arcM: Range;
  readonly transitionM: Range;
  /** Share of curves without transitions. */
  readonly abruptShare: number;
  readonly straightM: Range;
  readonly speedKmh: Range;
  /** Highest v^2/R, m/s^2: 1.6 is 150 mm of cant with 100 mm of deficiency. */
  readonly lateralMps2: number;
  readonly largestDeflectionRad: number;
  readonly accelerationMps2: number;
  readonly brakingMps2: number;
  readonly curvesPerStop: number;
  readonly dwellS: Range;
}

const MAIN: Family = {
  radiusM: [600, 3000],
  arcM: [150, 700],
  transitionM: [60, 160],
  abruptShare: 0,
  straightM: [250, 1500],
  speedKmh: [80, 160],
  lateralMps2: 1.6,
  largestDeflectionRad: 1.2,
  accelerationMps2: 0.4,
  brakingMps2: 0.5,
  curvesPerStop: 9,
  dwellS: [30, 90],
};
const SECONDARY: Family = {
  ...MAIN,
  radiusM: [200, 500],
  arcM: [70, 350],
  transitionM: [25, 80],
  straightM: [80, 500],
  speedKmh: [50, 80],
  largestDeflectionRad: 1.6,
  curvesPerStop: 7,
};
const TRAM: Family = {
  radiusM: [25, 100],
  arcM: [20, 100],
  transitionM: [4, 15],
  abruptShare: 0.35,
  straightM: [30, 220],
  speedKmh: [15, 30],
  lateralMps2: 1,
  largestDeflectionRad: 2,
  accelerationMps2: 0.8,
  brakingMps2: 0.9,
  curvesPerStop: 4,
  dwellS: [15, 40],
};
const ROAD: Family = {
  radiusM: [50, 300],
  arcM: [32, 180],
  transitionM: [12, 45],
  abruptShare: 0.1,
  straightM: [50, 450],
  speedKmh: [50, 90],
  lateralMps2: 3.5,
  largestDeflectionRad: 2,
  accelerationMps2: 1,
  brakingMps2: 1.3,
  curvesPerStop: 14,
  dwellS: [10, 40],
};

/** Realistic families of lines (common practice, no source). */
const FAMILIES: Readonly<Record<FamilyName, Family>> = {
  main: MAIN,
  secondary: SECONDARY,
  tram: TRAM,
  road: ROAD,
  reverse: SECONDARY,
  compound: { ...SECONDARY, arcM: [90, 300] },
  abrupt: { ...SECONDARY, radiusM: [250, 900], abruptShare: 1 },
  stop: SECONDARY,
  straights: { ...MAIN, straightM: [4000, 9000], curvesPerStop: 1 },
};

export const DEFAULT_CURVES: Readonly<Record<FamilyName, number>> = {
  main: 20,
  secondary: 24,
  tram: 24,
  road: 24,
  reverse: 24,
  compound: 24,
  abrupt: 24,
  stop: 20,
  straights: 6,
};

/** Laying pieces, with the speed limit of each curve and the stops noted beside. */
class Layout {
  readonly pieces: Piece[] = [];
  readonly limits: SpeedLimit[] = [];
  readonly stops: StationStop[] = [];
  chainageM = 0;
  headingRad = 0;

  add(piece: Piece): void {
    this.pieces.push(piece);
    this.chainageM += piece.lengthM;
    this.headingRad += (piece.lengthM * (piece.startCurvaturePerM + piece.endCurvaturePerM)) / 2;
  }

  /** Turns back towards the general direction of the line more often than away from it. */
  drawSign(random: RandomStream): number {
    if (Math.abs(this.headingRad) > 1.2) return -Math.sign(this.headingRad);
    return random.chance(0.5) ? 1 : -1;
  }
}

interface DrawnCurve {
  readonly radiusM: number;
  readonly arcM: number;
  readonly entryM: number;
  readonly exitM: number;
}

function drawCurve(family: Family, random: RandomStream): DrawnCurve {
  const abrupt = random.chance(family.abruptShare);
  for (;;) {
    const radiusM = random.logBetween(...family.radiusM);
    const arcM = random.logBetween(...family.arcM);
    const entryM = abrupt ? 0 : random.between(...family.transitionM);
    const exitM = abrupt ? 0 : random.chance(0.6) ? entryM : random.between(...family.transitionM);
    const deflection = (arcM + (entryM + exitM) / 2) / radiusM;
    if (deflection <= family.largestDeflectionRad) return { radiusM, arcM, entryM, exitM };
  }
}

const curveSpeedMps = (family: Family, radiusM: number) => Math.sqrt(family.lateralMps2 * radiusM);

/**
 * Draws one line of a family with its driving.
 *
 * @param curves number of circular curves (for `straights`: of straights between stops)
 */
export function drawLine(name: FamilyName, curves: number, random: RandomStream): DrawnLine {
  const family = FAMILIES[name];
  const layout = new Layout();
  const lineSpeedMps = random.between(...family.speedKmh) / 3.6;
  layout.add(straight(random.between(...family.straightM) + 150));
  let made = 0;
  let sinceStop = 0;
  while (made < curves) {
    const before = layout.chainageM;
    if (name === 'straights') {
      made += 1;
    } else if (name === 'reverse') {
      made += layReverse(layout, family, random);
    } else if (name === 'compound') {
      made += layCompound(layout, family, random);
    } else {
      made += laySimple(layout, family, drawCurve(family, random), random);
      if (name === 'stop' && random.chance(0.5)) stopInCurve(layout, before, random);
    }
    sinceStop += layout.chainageM > before || name === 'straights' ? 1 : 0;
    layout.add(straight(random.between(...family.straightM)));
    if (sinceStop >= family.curvesPerStop && made < curves) {
      const last = layout.pieces.at(-1)!;
      layout.stops.push({ chainageM: layout.chainageM - last.lengthM / 2, dwellS: random.between(...family.dwellS) });
      sinceStop = 0;
    }
  }
  layout.add(straight(150));
  return {
    line: buildLine(layout.pieces, random.between(0, 2 * Math.PI)),
    plan: {
      lineSpeedMps,
      limits: layout.limits,
      stops: layout.stops,
      accelerationMps2: family.accelerationMps2,
      brakingMps2: family.brakingMps2,
      ripple: 0.02,
      terminalDwellS: random.chance(0.7) ? random.between(10, 30) : null,
    },
  };
}

function laySimple(layout: Layout, family: Family, curve: DrawnCurve, random: RandomStream): number {
  const k = layout.drawSign(random) / curve.radiusM;
  const startM = layout.chainageM;
  layout.add(clothoid(curve.entryM, 0, k));
  layout.add(arc(curve.arcM, k));
  layout.add(clothoid(curve.exitM, k, 0));
  layout.limits.push({ startM, endM: layout.chainageM, speedMps: curveSpeedMps(family, curve.radiusM) });
  return 1;
}

function stopInCurve(layout: Layout, curveStartM: number, random: RandomStream): void {
  const share = random.between(0.35, 0.65);
  layout.stops.push({
    chainageM: curveStartM + share * (layout.chainageM - curveStartM),
    dwellS: random.between(20, 60),
  });
}

/** Two curves of opposite hand: half of them with a straight of 20 to 100 m between, half touching. */
function layReverse(layout: Layout, family: Family, random: RandomStream): number {
  const first = drawCurve(family, random);
  const second = drawCurve(family, random);
  const k1 = layout.drawSign(random) / first.radiusM;
  const k2 = -Math.sign(k1) / second.radiusM;
  const startM = layout.chainageM;
  layout.add(clothoid(first.entryM, 0, k1));
  layout.add(arc(first.arcM, k1));
  layout.add(clothoid(first.exitM, k1, 0));
  if (random.chance(0.5)) layout.add(straight(random.between(20, 100)));
  layout.add(clothoid(second.entryM, 0, k2));
  layout.add(arc(second.arcM, k2));
  layout.add(clothoid(second.exitM, k2, 0));
  const radiusM = Math.min(first.radiusM, second.radiusM);
  layout.limits.push({ startM, endM: layout.chainageM, speedMps: curveSpeedMps(family, radiusM) });
  return 2;
}

/** Two curves of one hand, radii in a ratio of 1.4 to 2.2, joined by a transition. */
function layCompound(layout: Layout, family: Family, random: RandomStream): number {
  const sharp = drawCurve(family, random);
  const ratio = random.between(1.4, 2.2);
  const sign = layout.drawSign(random);
  const radii = random.chance(0.5) ? [sharp.radiusM, sharp.radiusM * ratio] : [sharp.radiusM * ratio, sharp.radiusM];
  const k1 = sign / radii[0]!;
  const k2 = sign / radii[1]!;
  const startM = layout.chainageM;
  layout.add(clothoid(sharp.entryM, 0, k1));
  layout.add(arc(sharp.arcM, k1));
  layout.add(clothoid(random.between(20, 60), k1, k2));
  layout.add(arc(random.logBetween(...family.arcM), k2));
  layout.add(clothoid(sharp.exitM, k2, 0));
  layout.limits.push({ startM, endM: layout.chainageM, speedMps: curveSpeedMps(family, sharp.radiusM) });
  return 2;
}
