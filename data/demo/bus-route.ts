import { buildLine } from '../synthetic/line.ts';
import type { Origin } from '../synthetic/geodetic-path.ts';
import { placeCurves, type BuiltCurve, type Railway } from './railway.ts';

export const BUS_NAME = 'Route 7, Osmarra Harbour - Kell Heights';
export const BUS_ORIGIN: Origin = { latDeg: 44.262, lonDeg: -37.47 };
const BUS_HEADING_RAD = -0.6;

/** Street corner of a right angle: radius, speed of the bus; short transitions from steering. */
function corner(straightM: number, hand: 'left' | 'right', radiusM: number, speedKmh: number): BuiltCurve {
  const steeringM = 5;
  const arcM = (Math.PI / 2) * radiusM - steeringM;
  return { straightM, hand, radiusM, arcM, entryM: steeringM, exitM: steeringM, postedKmh: speedKmh, cantMm: 0 };
}

function bend(
  straightM: number,
  hand: 'left' | 'right',
  radiusM: number,
  arcM: number,
  transitionM: number,
  speedKmh: number,
): BuiltCurve {
  return { straightM, hand, radiusM, arcM, entryM: transitionM, exitM: transitionM, postedKmh: speedKmh, cantMm: 0 };
}

/** Lateral accelerations v^2/R from 0.7 (most) to 1.8 m/s^2 (first corner, roundabout). */
const BUS_CURVES: readonly BuiltCurve[] = [
  corner(250, 'left', 14, 17.5),
  bend(420, 'right', 120, 80, 20, 36),
  corner(300, 'left', 16, 13),
  corner(460, 'right', 12, 14.5),
  bend(260, 'right', 60, 50, 15, 34),
  bend(350, 'left', 90, 60, 15, 32),
  // A roundabout: in, around, out.
  bend(260, 'right', 25, 10, 6, 20),
  bend(0, 'left', 18, 28, 6, 20),
  bend(0, 'right', 25, 10, 6, 20),
  corner(520, 'right', 14, 12.5),
  bend(330, 'left', 150, 100, 25, 42),
  corner(400, 'left', 13, 13),
  bend(560, 'right', 200, 120, 30, 48),
  corner(450, 'right', 15, 17),
  bend(300, 'left', 80, 60, 15, 28),
];

export function layBusRoute(): Railway {
  const { pieces, curves } = placeCurves(BUS_CURVES, 350);
  const line = buildLine(pieces, BUS_HEADING_RAD);
  const inFrontOf = (number: number, beforeM: number) => Math.round(curves[number - 1]!.startM - beforeM);
  return {
    pieces,
    line,
    curves,
    stations: [
      { name: 'Osmarra Harbour', chainageM: 0 },
      { name: 'Salt Market', chainageM: inFrontOf(2, 200) },
      { name: 'Weir Street', chainageM: inFrontOf(4, 230) },
      { name: 'Dunmarrow Park', chainageM: inFrontOf(10, 260) },
      { name: 'Old Ropeworks', chainageM: inFrontOf(13, 280) },
      { name: 'Kell Heights', chainageM: Math.round(line.lengthM) },
    ],
  };
}
