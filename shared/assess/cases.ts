import type { RunPassages } from '../model/passage.ts';
import type { Setup } from '../schema/setup.ts';
import { curveFacts, cantBaseMm } from './curve-facts.ts';
import type { CurveCase } from './lateral-frame.ts';
import { ratioOf } from './lateral-frame.ts';
import type { ResolvedRegister } from './cant/resolve.ts';
import { cantOfCurves, resolveRegister } from './cant/resolve.ts';

/** All curves of a run with their cant, ready for the criteria, and what the register said. */
export function curveCases(run: RunPassages, setup: Setup): { cases: CurveCase[]; resolved: ResolvedRegister | null } {
  const { passages } = run;
  const baseMm = cantBaseMm(setup);
  const { mode } = setup;
  const resolved = setup.register === null ? null : resolveRegister(setup.register, passages, mode, baseMm);
  const cants = cantOfCurves(setup, passages, baseMm, resolved);
  const indexOf = new Map(passages.map((p, i) => [p.curve.number, i]));
  const cases = passages.map((passage, i): CurveCase => {
    const facts = curveFacts(passage, setup);
    const cant = cants[i]!;
    const own = ratioOf(cant, mode, baseMm);
    // Beyond a straight or a reverse point cant is zero; a neighbour of the same hand keeps its own, or this one's if
    // unknown.
    const beyond = facts.ends.map((end) => {
      if (end.sameHandNeighbour === null) return 0;
      const index = indexOf.get(end.sameHandNeighbour);
      const neighbour = index === undefined ? undefined : cants[index];
      return neighbour === undefined || neighbour.source === 'unknown' ? own : ratioOf(neighbour, mode, baseMm);
    });
    return {
      mode,
      facts,
      cant,
      cantRatio: own,
      beyondRatio: [beyond[0]!, beyond[1]!],
      isBound: cant.source === 'unknown',
    };
  });
  return { cases, resolved };
}
