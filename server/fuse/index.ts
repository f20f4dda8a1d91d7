import type { Curve } from '../../shared/model/alignment.ts';
import type { Line, LineCurve, LineMember } from '../../shared/model/line.ts';
import { combineCurvature, radiusFromCurvature } from './combine-curvature.ts';
import type { RunTrace } from './input.ts';
import { indexTrace, matchRun, toLineChainage, type TraceIndex } from './match-runs.ts';

export type { RunTrace } from './input.ts';

/** A run belongs to a line when at least this share of it, or of the line, lies on the other. */
const SHARE = 0.6;

/**
 * Groups runs into lines and combines their curves. The longest run not yet placed becomes the
 * reference of a line; every other run that shares at least 60 % of itself or of the reference
 * joins it, in either direction.
 *
 * @param traces one a run
 * @returns every run is a member of exactly one line, possibly alone
 */
export function fuseRuns(traces: readonly RunTrace[]): Line[] {
  const waiting = [...traces].sort((a, b) => lengthOf(b) - lengthOf(a));
  const lines: Line[] = [];
  while (waiting.length > 0) {
    const reference = waiting.shift()!;
    const index = indexTrace(reference);
    const members: LineMember[] = [selfMember(reference)];
    for (let i = waiting.length - 1; i >= 0; i--) {
      const member = joins(index, waiting[i]!);
      if (member === null) continue;
      members.push(member);
      waiting.splice(i, 1);
    }
    lines.push(lineOf(reference, members, traces));
  }
  return lines;
}

/** Puts the given runs into one line whatever they share: the user's own grouping. */
export function fuseAsOneLine(traces: readonly RunTrace[]): Line {
  const reference = [...traces].sort((a, b) => lengthOf(b) - lengthOf(a))[0]!;
  const index = indexTrace(reference);
  const members = traces
    .filter((trace) => trace !== reference)
    .map((trace) => matchRun(index, trace) ?? { ...selfMember(trace), overlap: 0, chainageM: [], lineChainageM: [] });
  return lineOf(reference, [selfMember(reference), ...members], traces);
}

function joins(index: TraceIndex, run: RunTrace): LineMember | null {
  const member = matchRun(index, run);
  if (member === null) return null;
  const onReference = Math.abs(member.lineChainageM.at(-1)! - member.lineChainageM[0]!) / lengthOf(index.trace);
  return member.overlap >= SHARE || (onReference >= SHARE && member.overlap >= SHARE / 2) ? member : null;
}

function lineOf(reference: RunTrace, members: readonly LineMember[], traces: readonly RunTrace[]): Line {
  return {
    id: reference.runId,
    referenceRunId: reference.runId,
    members,
    curves: lineCurves(members, new Map(traces.map((trace) => [trace.runId, trace.alignment.curves]))),
  };
}

interface Sighting {
  readonly runId: string;
  readonly curve: Curve;
  readonly startM: number;
  readonly endM: number;
  /** Curvature signed for the direction of the line. */
  readonly signed: number;
}

/** Curves of all members laid on the line's chainage and joined where arcs of one hand overlap by at least half the shorter. */
function lineCurves(members: readonly LineMember[], curvesOf: ReadonlyMap<string, readonly Curve[]>): LineCurve[] {
  const sightings: Sighting[] = [];
  for (const member of members) {
    for (const curve of curvesOf.get(member.runId) ?? []) {
      const a = toLineChainage(member, curve.entry.middleM.value);
      const b = toLineChainage(member, curve.exit.middleM.value);
      if (Number.isNaN(a) || Number.isNaN(b)) continue;
      sightings.push({
        runId: member.runId,
        curve,
        startM: Math.min(a, b),
        endM: Math.max(a, b),
        signed: curve.curvaturePerM.value * member.direction,
      });
    }
  }
  sightings.sort((p, q) => p.startM - q.startM);
  const groups: Sighting[][] = [];
  for (const sighting of sightings) {
    const group = groups.find(
      (g) => Math.sign(g[0]!.signed) === Math.sign(sighting.signed) && g.every((other) => overlaps(other, sighting)),
    );
    if (group === undefined) groups.push([sighting]);
    else group.push(sighting);
  }
  return groups.map((group, k) => lineCurve(group, k + 1));
}

function overlaps(a: Sighting, b: Sighting): boolean {
  const shared = Math.min(a.endM, b.endM) - Math.max(a.startM, b.startM);
  return shared >= 0.5 * Math.min(a.endM - a.startM, b.endM - b.startM) && a.runId !== b.runId;
}

function lineCurve(group: readonly Sighting[], number: number): LineCurve {
  const { estimate, consistency } = combineCurvature(
    group.map(({ signed }) => signed),
    group.map(({ curve }) => curve.curvaturePerM.sd),
  );
  return {
    number,
    hand: estimate.value >= 0 ? 'left' : 'right',
    startM: mean(group.map(({ startM }) => startM)),
    endM: mean(group.map(({ endM }) => endM)),
    seen: group.map(({ runId, curve }) => ({ runId, curve: curve.number })),
    curvaturePerM: estimate,
    radiusM: radiusFromCurvature(estimate),
    consistency,
  };
}

function selfMember(trace: RunTrace): LineMember {
  const ends = [trace.chainageM[0] ?? 0, trace.chainageM[trace.chainageM.length - 1] ?? 0];
  return { runId: trace.runId, direction: 1, overlap: 1, chainageM: ends, lineChainageM: ends };
}

function lengthOf(trace: RunTrace): number {
  return (trace.chainageM[trace.chainageM.length - 1] ?? 0) - (trace.chainageM[0] ?? 0);
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, v) => sum + v, 0) / values.length;
}
