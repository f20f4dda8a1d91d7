import { describe, expect, it } from 'vitest';
import { curveGeometryLines } from '../../../shared/assess/index.ts';
import { passage } from './example.ts';

describe('geometry of a curve in words', () => {
  const lines = curveGeometryLines(passage({ radiusM: 500, entryM: 80, exitM: 0, arcM: 200, hand: 'right' }).curve);

  it('gives both degrees of curve and the versine on the chord', () => {
    // Check values: R 500 m is 3.492751 degrees by arc, 3.493292 by chord; a 20 m chord has 100.010 mm.
    expect(lines[0]).toContain('500.0 m');
    expect(lines[0]).toContain('turning right');
    expect(lines[1]).toBe('Degree of curve 3.493° (chord definition), 3.493° (arc definition).');
    expect(lines[2]).toBe('Versine on a chord of 20.0 m: 100.0 mm.');
  });

  it('describes the clothoid of a transition, and none where there is no transition', () => {
    // Check value clothoid.80_500: A 200, angle 4.583662 degrees, shift 0.533211 m.
    expect(lines[4]).toBe('Entry clothoid 80.0 m: A 200.0 m, angle 4.58°, shift 0.533 m.');
    expect(lines).toHaveLength(5);
  });
});
