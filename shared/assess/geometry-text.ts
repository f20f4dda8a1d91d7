import type { Curve } from '../model/alignment.ts';
import { radToDeg } from '../units.ts';
import { arcElements } from '../curving/circular-arc.ts';
import { clothoid } from '../curving/clothoid.ts';
import { arcDegreeFromRadius, chordDegreeFromRadius } from '../curving/degree-of-curve.ts';
import { versineM } from '../curving/versine.ts';
import { num, radiusText } from './text.ts';

/** Below this a clothoid's figures say nothing, m. */
const SHORTEST_CLOTHOID_M = 1;

/**
 * Geometry of a curve as lines of its sheet: radius with its 95 % interval, degree of curve by both definitions,
 * versine on a chosen
 * chord, deflection and long chord, and the clothoids of its transitions.
 * chordM: the chord that the line's people measure versines on, m.
 */
export function curveGeometryLines(curve: Curve, chordM = 20): string[] {
  const { value: radiusM, low, high } = curve.radiusM;
  const arc = arcElements(radiusM, Math.max(curve.arcEndM - curve.arcStartM, 0) / radiusM);
  const lines = [
    `Radius ${radiusText(radiusM)} (95 % interval ${radiusText(low)} to ${radiusText(high)}), turning ${curve.hand}.`,
    `Degree of curve ${num(chordDegreeFromRadius(radiusM), 3)}° (chord definition), ${num(arcDegreeFromRadius(radiusM), 3)}° (arc definition).`,
    `Versine on a chord of ${num(chordM, 1)} m: ${num(1000 * versineM(chordM, radiusM), 1)} mm.`,
    `Circular part ${num(arc.arcM, 1)} m, its chord ${num(arc.chordM, 1)} m; deflection with transitions ${num(radToDeg(curve.deflectionRad.value), 2)}°.`,
  ];
  for (const place of ['entry', 'exit'] as const) {
    const lengthM = curve[place].lengthM.value;
    if (lengthM < SHORTEST_CLOTHOID_M || curve[place].fromCurvaturePerM !== 0) continue;
    const c = clothoid(lengthM, radiusM);
    lines.push(
      `${place === 'entry' ? 'Entry' : 'Exit'} clothoid ${num(lengthM, 1)} m: A ${num(c.parameterM, 1)} m, angle ${num(radToDeg(c.angleRad), 2)}°, shift ${num(c.shiftM, 3)} m.`,
    );
  }
  return lines;
}
