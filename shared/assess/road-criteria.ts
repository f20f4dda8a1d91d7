import type { Vehicle } from '../schema/vehicle.ts';
import { degToRad, radToDeg, STANDARD_GRAVITY_MPS2 } from '../units.ts';
import { ballBankRad, sideFrictionForBallBank } from '../curving/ball-bank.ts';
import {
  sideFriction as demand,
  speedForSideFrictionMps,
  superelevationForSideFriction,
} from '../curving/side-friction.ts';
import type { CurveCase } from './lateral-frame.ts';
import { lateralInterval } from './lateral-frame.ts';
import type { Measured, Unmeasured } from './measured.ts';
import { NEVER_RAN } from './rail-criteria.ts';
import { num, radiusText } from './text.ts';

function superelevationText(curveCase: CurveCase): string {
  const { ratio } = curveCase.cant;
  return ratio === null ? '0 (superelevation unknown)' : num(ratio, 3);
}

export function sideFriction(curveCase: CurveCase): Measured | Unmeasured {
  const { facts, cant, isBound } = curveCase;
  const speed = facts.fastest;
  if (speed === null) return { criterion: 'side_friction', missing: NEVER_RAN };
  const e = cant.ratio ?? 0;
  return {
    criterion: 'side_friction',
    ...lateralInterval(facts, isBound, (k) => demand(speed.mps, k, e)),
    isBound,
    speedMps: speed.mps,
    speedSdMps: speed.sdMps,
    formula: 'f = (x - e) / (1 + e x), x = v² / (g R)',
    substituted: () => {
      const x = (speed.mps * speed.mps * facts.curvaturePerM) / STANDARD_GRAVITY_MPS2;
      return `with x = (${num(speed.mps, 2)} m/s)² / (${STANDARD_GRAVITY_MPS2} m/s² × ${radiusText(facts.radiusM)}) = ${num(x, 3)}, e = ${superelevationText(curveCase)}`;
    },
    remarks: [],
    speedFor: (limit, sure) => speedForSideFrictionMps(limit, sure ? facts.curvatureHighPerM : facts.curvaturePerM, e),
    cantFor: (limit) => 100 * superelevationForSideFriction(limit, speed.mps, facts.curvaturePerM),
  };
}

export function ballBank(curveCase: CurveCase, vehicle: Vehicle): Measured | Unmeasured {
  const { facts, cant, isBound } = curveCase;
  const speed = facts.fastest;
  const s = vehicle.rollCoefficient;
  if (speed === null) return { criterion: 'ball_bank', missing: NEVER_RAN };
  if (s === null) return { criterion: 'ball_bank', missing: "the vehicle's roll coefficient is not known" };
  const e = cant.ratio ?? 0;
  const friction = (limitDeg: number): number => sideFrictionForBallBank(degToRad(limitDeg), s);
  return {
    criterion: 'ball_bank',
    ...lateralInterval(facts, isBound, (k) => radToDeg(ballBankRad(speed.mps, k, e, s))),
    isBound,
    speedMps: speed.mps,
    speedSdMps: speed.sdMps,
    formula: 'α = (1 + s) atan f',
    substituted: () =>
      `(1 + ${num(s, 2)}) × atan ${num(demand(speed.mps, facts.curvaturePerM, e), 3)}, e = ${superelevationText(curveCase)}`,
    remarks: ['Steady reading of a curve; bumps and steering corrections move a real ball by several degrees.'],
    speedFor: (limit, sure) =>
      speedForSideFrictionMps(friction(limit), sure ? facts.curvatureHighPerM : facts.curvaturePerM, e),
    cantFor: (limit) => 100 * superelevationForSideFriction(friction(limit), speed.mps, facts.curvaturePerM),
  };
}
