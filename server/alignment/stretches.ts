import type { Motion } from '../../shared/model/motion.ts';
import { KIND, type CurvatureGrid, type Segment } from './segment.ts';
import type { Stretch } from './stretch-model.ts';

/** Straights shorter than this, or than one and a half correlation lengths, do not part two stretches. */
const PARTING_STRAIGHT_M = 25;
/** Of the straight beyond a stretch at most so much is used. */
const LONGEST_APPROACH_M = 300;
/** A level shorter than this is not worth a parameter of its own at the start, m. */
const SHORTEST_LEVEL_M = 2;
/** Stretches of more levels than this are cut: the work grows with the square. */
const MOST_LEVELS = 14;

/** The segments between two straights as starting values of stretches, with their windows of fixes. */
export function stretchesFrom(segments: readonly Segment[], grid: CurvatureGrid, motion: Motion): Stretch[] {
  const parting = Math.max(PARTING_STRAIGHT_M, 1.5 * grid.correlationM);
  const groups: Segment[][] = [];
  let current: Segment[] = [];
  const close = () => {
    while (current.at(-1)?.kind === KIND.STRAIGHT) current.pop();
    if (current.length > 0) groups.push(current);
    current = [];
  };
  for (const segment of segments) {
    const straight = segment.kind === KIND.STRAIGHT;
    if (
      straight &&
      (segment.toM - segment.fromM >= parting || current.filter(({ kind }) => kind === KIND.ARC).length >= MOST_LEVELS)
    )
      close();
    else if (!straight || current.length > 0) current.push(segment);
  }
  close();
  const end = motion.chainageM[motion.count - 1]!;
  const bounds = groups.map((group) => [group[0]!.fromM, group.at(-1)!.toM] as const);
  return groups.flatMap((group, i) => {
    const before = i > 0 ? (bounds[i - 1]![1] + bounds[i]![0]) / 2 : 0;
    const after = i + 1 < groups.length ? (bounds[i]![1] + bounds[i + 1]![0]) / 2 : end;
    const fromM = Math.max(before, bounds[i]![0] - LONGEST_APPROACH_M);
    const toM = Math.min(after, bounds[i]![1] + LONGEST_APPROACH_M);
    const stretch = stretchOf(group, fromM, toM, grid.correlationM);
    return stretch === null ? [] : [stretch];
  });
}

/** Levels and changes of one group of segments. */
function stretchOf(group: readonly Segment[], fromM: number, toM: number, correlationM: number): Stretch | null {
  const stretch: Stretch = { levels: [], straight: [], middles: [], squares: [], fromM, toM };
  const abrupt = Math.max(2, 0.3 * correlationM);
  let pending: Segment[] = [];
  const change = (atM: number) => {
    const first = pending[0];
    if (first === undefined) {
      stretch.middles.push(atM);
      stretch.squares.push(abrupt ** 2);
    } else {
      const a = first.fromM;
      const b = pending.at(-1)!.toM;
      stretch.middles.push((a + b) / 2);
      stretch.squares.push(Math.max(abrupt, 0.8 * (b - a)) ** 2);
    }
    pending = [];
  };
  for (const segment of group) {
    if (segment.kind === KIND.ARC || segment.kind === KIND.STRAIGHT) {
      if (segment.kind === KIND.ARC && segment.toM - segment.fromM < SHORTEST_LEVEL_M) continue;
      change(segment.fromM);
      stretch.levels.push(segment.curvaturePerM);
      stretch.straight.push(segment.kind === KIND.STRAIGHT);
    } else pending.push(segment);
  }
  if (stretch.levels.length === 0) return null;
  change(group.at(-1)!.toM);
  return stretch;
}
