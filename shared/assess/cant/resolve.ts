import type { Passage } from '../../model/passage.ts';
import type { CantEntry, CantRegister } from '../../schema/cant-register.ts';
import type { Setup } from '../../schema/setup.ts';
import { STANDARD_GRAVITY_MPS2 } from '../../units.ts';
import { equilibriumCantMm } from '../../curving/equilibrium-cant.ts';
import { distanceM } from './distance.ts';
import type { CurveCant } from '../curve-cant.ts';
import { UNKNOWN_CANT } from '../curve-cant.ts';

/** How the register's signs are read: cant in favour of the curve, or signed by the hand of the raised rail. */
type SignConvention = 'favour' | 'hand';

/** What a register says of the run's curves, and what is wrong with it. */
export interface ResolvedRegister {
  /** Cant in favour of the curve of each passage, mm (road: percent); null where the register is silent. */
  readonly cantByCurve: readonly (number | null)[];
  readonly convention: SignConvention;
  /** Entries that met no curve, by index. */
  readonly unmatched: readonly number[];
  /** Passages (by index) whose entries disagree, with the values. */
  readonly conflicts: readonly { readonly passage: number; readonly values: readonly number[] }[];
  /** Entries without a usable value for this mode. */
  readonly unusable: readonly number[];
}

/** An entry laid onto the run. */
interface Placed {
  readonly index: number;
  readonly value: number;
  readonly entry: CantEntry;
}

/** Run chainage of a register chainage: (c - offset) / stretch. */
function runChainageM(register: CantRegister, chainageM: number): number {
  return (chainageM - register.offsetM) / register.stretch;
}

/** Run chainages of an entry's range, in order; null for entries placed otherwise. */
export function rangeOf(register: CantRegister, entry: CantEntry): readonly [number, number] | null {
  const from = entry.fromM ?? entry.toM;
  const to = entry.toM ?? entry.fromM;
  if (from === undefined || to === undefined) return null;
  const a = runChainageM(register, from);
  const b = runChainageM(register, to);
  return a <= b ? [a, b] : [b, a];
}

/** Value of an entry in the unit of the mode: mm for rail, percent for road; null when it has none. */
function valueOf(entry: CantEntry, mode: Setup['mode'], baseMm: number): number | null {
  if (mode === 'road') return entry.superelevationPct ?? null;
  if (entry.cantMm !== undefined) return entry.cantMm;
  return entry.superelevationPct === undefined ? null : (entry.superelevationPct / 100) * baseMm;
}

/** Share of a curve's arc that an entry covers, 0..1; by number or by place all of it. */
function coverage(register: CantRegister, entry: CantEntry, passage: Passage): number {
  const { curve } = passage;
  if (entry.curve !== undefined) return entry.curve === curve.number ? 1 : 0;
  const range = rangeOf(register, entry);
  if (range !== null) {
    const [from, to] = range;
    // A single chainage, or a range within the curve's arc, names the curve it lies on.
    if (from === to) return from >= curve.startM && from <= curve.endM ? 1 : 0;
    const arc = Math.max(curve.arcEndM - curve.arcStartM, 1);
    const overlap = Math.min(to, Math.max(curve.arcEndM, curve.arcStartM + 1)) - Math.max(from, curve.arcStartM);
    return Math.max(overlap, 0) / arc;
  }
  return placeCoverage(entry, passage);
}

/**
 * Entries given by the positions of their ends meet the curve whose middle lies between them (within a third more
 * way, and 60 m).
 */
function placeCoverage(entry: CantEntry, passage: Passage): number {
  const { fromLatDeg, fromLonDeg } = entry;
  if (fromLatDeg === undefined || fromLonDeg === undefined) return 0;
  const from = [fromLatDeg, fromLonDeg] as const;
  const to = [entry.toLatDeg ?? fromLatDeg, entry.toLonDeg ?? fromLonDeg] as const;
  const way = distanceM(from, passage.middle) + distanceM(passage.middle, to);
  return way <= 1.3 * distanceM(from, to) + 60 ? 1 : 0;
}

/** Shares of an arc below this are overlaps at the edges, not statements about the curve. */
const LEAST_SHARE = 0.1;

/**
 * Lays a register onto the passages of a run. Where entries of one curve disagree the least cant is taken, the
 * cautious side
 * for passengers, and the conflict is reported.
 */
export function resolveRegister(
  register: CantRegister,
  passages: readonly Passage[],
  mode: Setup['mode'],
  baseMm: number,
): ResolvedRegister {
  const unusable: number[] = [];
  const placed: Placed[] = [];
  register.entries.forEach((entry, index) => {
    const value = valueOf(entry, mode, baseMm);
    if (value === null || (mode === 'rail' && Math.abs(value) > baseMm / 2)) unusable.push(index);
    else placed.push({ index, value, entry });
  });

  const met = new Set<number>();
  const byCurve = passages.map((passage) => {
    const here: Placed[] = [];
    for (const p of placed) {
      if (coverage(register, p.entry, passage) >= LEAST_SHARE) {
        here.push(p);
        met.add(p.index);
      }
    }
    return here;
  });
  // An entry by chainage may run past a curve too short for a share of it, or cover only its transition.
  for (const p of placed) {
    const range = rangeOf(register, p.entry);
    if (range !== null && passages.some(({ curve }) => range[0] <= curve.endM && range[1] >= curve.startM))
      met.add(p.index);
  }

  const convention = signConvention(byCurve, passages);
  const direction = convention === 'hand' ? handSense(byCurve, passages) : 1;
  const conflicts: { passage: number; values: number[] }[] = [];
  const cantByCurve = byCurve.map((here, i) => {
    if (here.length === 0) return null;
    const hand = passages[i]!.curve.hand === 'left' ? 1 : -1;
    const values = here.map((p) => (convention === 'hand' ? p.value * hand * direction : p.value));
    if (Math.max(...values) - Math.min(...values) > 1e-9) conflicts.push({ passage: i, values });
    return Math.min(...values);
  });
  return {
    cantByCurve,
    convention,
    unmatched: placed.filter((p) => !met.has(p.index)).map((p) => p.index),
    conflicts,
    unusable,
  };
}

/**
 * Sum over curves of sign(value) x hand: its sign tells which hand a positive value raises, its size how
 * consistently.
 */
function handVotes(
  byCurve: readonly Placed[][],
  passages: readonly Passage[],
): { sum: number; count: number; negative: number } {
  let sum = 0;
  let count = 0;
  let negative = 0;
  byCurve.forEach((here, i) => {
    const value = here[0]?.value ?? 0;
    if (value === 0) return;
    sum += Math.sign(value) * (passages[i]!.curve.hand === 'left' ? 1 : -1);
    count += 1;
    if (value < 0) negative += 1;
  });
  return { sum, count, negative };
}

function handSense(byCurve: readonly Placed[][], passages: readonly Passage[]): 1 | -1 {
  return handVotes(byCurve, passages).sum >= 0 ? 1 : -1;
}

/**
 * A register is signed by hand when it has both signs and they follow the curves' hands on at least nine in ten of
 * three or
 * more curves; otherwise a negative value is adverse cant.
 */
function signConvention(byCurve: readonly Placed[][], passages: readonly Passage[]): SignConvention {
  const { sum, count, negative } = handVotes(byCurve, passages);
  const follows = count >= 3 && negative > 0 && negative < count && Math.abs(sum) >= 0.8 * count;
  return follows ? 'hand' : 'favour';
}

/** Cant that the setup's rule assumes on a curve without a registered value. */
function assumedCant(setup: Setup, passage: Passage, baseMm: number): CurveCant {
  const rule = setup.cantRule;
  if (rule.kind === 'unknown') return UNKNOWN_CANT;
  if (rule.kind === 'constant') return asCant('assumed', rule.value, setup.mode);
  const speed = rule.speedKmh / 3.6;
  const kappa = Math.abs(passage.curve.curvaturePerM.value);
  if (setup.mode === 'rail') {
    return asCant('assumed', Math.min(rule.share * equilibriumCantMm(speed, kappa, baseMm), rule.capMm), 'rail');
  }
  // On roads the cap reads as percent: a superelevation has no base to carry millimetres.
  const balance = (speed * speed * kappa) / STANDARD_GRAVITY_MPS2;
  return asCant('assumed', Math.min(100 * rule.share * balance, rule.capMm), 'road');
}

/** A value of the mode's unit as a curve's cant. */
function asCant(source: CurveCant['source'], value: number, mode: Setup['mode']): CurveCant {
  return mode === 'rail' ? { source, mm: value, ratio: null } : { source, mm: null, ratio: value / 100 };
}

/** Cant of each passage: one being tried, else the register's where it speaks, else the rule's. */
export function cantOfCurves(
  setup: Setup,
  passages: readonly Passage[],
  baseMm: number,
  resolved: ResolvedRegister | null,
): CurveCant[] {
  return passages.map((passage, i) => {
    const tried = setup.cantTrials?.find((trial) => trial.curve === passage.curve.number);
    if (tried !== undefined) return asCant('assumed', tried.value, setup.mode);
    const value = resolved?.cantByCurve[i] ?? null;
    return value === null ? assumedCant(setup, passage, baseMm) : asCant('registered', value, setup.mode);
  });
}
