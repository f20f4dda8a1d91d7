import type { Finding, Severity } from '../../model/finding.ts';
import type { Place } from '../../model/fault.ts';
import type { CantRegister } from '../../schema/cant-register.ts';
import type { Setup } from '../../schema/setup.ts';
import { equilibriumCantMm } from '../../curving/equilibrium-cant.ts';
import { intervalAt } from '../confidence.ts';
import type { CurveFacts } from '../curve-facts.ts';
import { num } from '../text.ts';
import type { ResolvedRegister } from './resolve.ts';
import { rangeOf } from './resolve.ts';

/** Equilibrium cant (mm) from which a curve without any cant is worth a question. */
const SHARP_MM = 60;
/** A registered cant up to this (mm) is taken for none. */
const NO_CANT_MM = 5;
const MOST_PLACES = 20;

function finding(code: string, severity: Severity, message: string, places: readonly Place[]): Finding {
  return {
    code,
    stage: 'assess',
    severity,
    message,
    count: places.length,
    dropped: 0,
    places: places.slice(0, MOST_PLACES),
  };
}

function placeOf(register: CantRegister, index: number): Place {
  const entry = register.entries[index]!;
  const range = rangeOf(register, entry);
  return {
    file: register.name,
    ...(entry.line === undefined ? {} : { line: entry.line }),
    ...(range === null ? {} : { chainageM: (range[0] + range[1]) / 2 }),
  };
}

function listed(texts: readonly string[]): string {
  return `${texts.slice(0, 5).join(', ')}${texts.length > 5 ? ' and others' : ''}`;
}

/**
 * Where a register contradicts itself or the run: cant on a straight, none on a sharp curve, more cant than balance
 * at any
 * recorded speed, silent on a curve, entries that disagree, adverse cant, values without meaning.
 */
export function registerFindings(
  register: CantRegister,
  resolved: ResolvedRegister,
  facts: readonly CurveFacts[],
  setup: Setup,
): Finding[] {
  const found: Finding[] = [];
  const curvePlace = (i: number): Place => ({ chainageM: Math.round(facts[i]!.passage.curve.arcStartM) });
  const name = (i: number): string => `curve ${String(facts[i]!.passage.curve.number)}`;
  const add = (code: string, severity: Severity, message: string, places: readonly Place[]): void => {
    if (places.length > 0) found.push(finding(code, severity, message, places));
  };

  const onStraight = resolved.unmatched.filter((i) => {
    const entry = register.entries[i]!;
    return Math.abs(entry.cantMm ?? 0) > NO_CANT_MM || Math.abs(entry.superelevationPct ?? 0) > 0.5;
  });
  add(
    'assess/cant-on-straight',
    'warning',
    'The register gives cant where the run shows no curve: its chainage may be offset or stretched against the run, it may run the other way, or the entry is wrong',
    onStraight.map((i) => placeOf(register, i)),
  );
  add(
    'assess/cant-unusable',
    'warning',
    setup.mode === 'road'
      ? 'Register entries without a superelevation in percent are left out'
      : 'Register entries without a possible cant in mm are left out',
    resolved.unusable.map((i) => placeOf(register, i)),
  );
  add(
    'assess/cant-entries-disagree',
    'warning',
    `Several register entries give different cant for one curve (${listed(
      resolved.conflicts.map((c) => `${name(c.passage)}: ${c.values.map((v) => num(v, 0)).join(' and ')}`),
    )}); the least is taken, the cautious side`,
    resolved.conflicts.map((c) => curvePlace(c.passage)),
  );
  const silent = facts.map((_, i) => i).filter((i) => resolved.cantByCurve[i] === null);
  add(
    'assess/cant-missing',
    'warning',
    `The register says nothing of ${listed(silent.map(name))}; the rule for unregistered cant holds there`,
    silent.map(curvePlace),
  );
  if (resolved.convention === 'hand') {
    found.push(
      finding(
        'assess/cant-signed-by-hand',
        'info',
        "The register's signs follow the hand of the curves; they are read as the raised rail, not as adverse cant",
        [{ file: register.name }],
      ),
    );
  }
  const adverse = facts.map((_, i) => i).filter((i) => (resolved.cantByCurve[i] ?? 0) < 0);
  add(
    'assess/cant-adverse',
    'serious',
    `Adverse cant is registered on ${listed(adverse.map(name))}: check the sign against the track`,
    adverse.map(curvePlace),
  );
  if (setup.mode === 'rail') found.push(...balanceFindings(resolved, facts, name, curvePlace));
  return found;
}

/** No cant on a sharp curve; more cant than balance at the highest recorded speed, beyond the interval. */
function balanceFindings(
  resolved: ResolvedRegister,
  facts: readonly CurveFacts[],
  name: (i: number) => string,
  place: (i: number) => Place,
): Finding[] {
  const bare: number[] = [];
  const excessive: number[] = [];
  facts.forEach((f, i) => {
    const cantMm = resolved.cantByCurve[i] ?? null;
    if (cantMm === null) return;
    const { low } = intervalAt(f.passage.curve.speedMps, f.z);
    const slowHonest = Math.max(Math.min(low, f.top.mps), 0);
    if (Math.abs(cantMm) <= NO_CANT_MM && equilibriumCantMm(slowHonest, f.lateralLowPerM, f.baseMm) > SHARP_MM)
      bare.push(i);
    if (cantMm > NO_CANT_MM && cantMm > equilibriumCantMm(f.top.mps, f.lateralHighPerM, f.baseMm)) excessive.push(i);
  });
  const found: Finding[] = [];
  if (bare.length > 0) {
    found.push(
      finding(
        'assess/no-cant-on-sharp-curve',
        'warning',
        `The register gives no cant on ${listed(bare.map(name))}, though the run calls for more than ${String(SHARP_MM)} mm for balance: check the entry`,
        bare.map(place),
      ),
    );
  }
  if (excessive.length > 0) {
    found.push(
      finding(
        'assess/cant-above-equilibrium',
        'warning',
        `The register gives more cant than balances the highest recorded speed on ${listed(excessive.map(name))}: check the entry, or the run was slower than the line is built for`,
        excessive.map(place),
      ),
    );
  }
  return found;
}
