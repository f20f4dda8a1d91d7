import type { z } from 'zod';
import type { Estimate } from '../model/alignment.ts';
import type { RunPassages } from '../model/passage.ts';
import type { RunPassagesWire } from '../schema/api.ts';

type Wire = z.infer<typeof RunPassagesWire>;
type WireCurve = Wire['passages'][number]['curve'];

function estimate(wire: WireCurve['radiusM']): Estimate {
  return { ...wire, high: wire.high ?? Infinity };
}

function end(wire: WireCurve['entry']): RunPassages['passages'][number]['curve']['entry'] {
  return { ...wire, lengthM: estimate(wire.lengthM), middleM: estimate(wire.middleM) };
}

/**
 * Passages as the assessment takes them from passages as JSON brings them: an upper end that is null there is
 * unbounded, a fit quality
 * that is null is not applicable. Without this an unbounded interval would be taken for a narrow one.
 */
export function passagesFromWire(wire: Wire): RunPassages {
  return {
    ...wire,
    passages: wire.passages.map((passage) => ({
      ...passage,
      curve: {
        ...passage.curve,
        entry: end(passage.curve.entry),
        exit: end(passage.curve.exit),
        curvaturePerM: estimate(passage.curve.curvaturePerM),
        radiusM: estimate(passage.curve.radiusM),
        deflectionRad: estimate(passage.curve.deflectionRad),
        speedMps: estimate(passage.curve.speedMps),
        chi2PerDof: passage.curve.chi2PerDof ?? NaN,
      },
    })),
  };
}
