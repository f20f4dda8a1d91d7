import type { Finding } from '../model/finding.ts';
import type { RunPassages } from '../model/passage.ts';
import type { Setup } from '../schema/setup.ts';
import { mpsToKmh } from '../units.ts';
import { criticalSpeedMps, resonanceBand, resonantStretches } from '../curving/resonance.ts';
import type { ProfileInput } from './profile.ts';
import { num } from './text.ts';

/** Reverse curves this alike in spacing (relative) excite as one row. */
const ALIKE = 0.25;

function finding(code: string, message: string, chainagesM: readonly number[]): Finding {
  return {
    code,
    stage: 'assess',
    severity: 'info',
    message,
    count: chainagesM.length,
    dropped: 0,
    places: chainagesM.slice(0, 20).map((chainageM) => ({ chainageM: Math.round(chainageM) })),
  };
}

function avoidText(criticalMps: number, dampingRatio: number): string {
  const [low, high] = resonanceBand(dampingRatio);
  return `${num(mpsToKmh(low * criticalMps), 0)} to ${num(mpsToKmh(high * criticalMps), 0)} km/h`;
}

/**
 * Where the excitation met the roll's natural frequency on this run: irregularities at the spacings that the setup
 * names, and
 * rows of at least three reverse curves. Each finding says the speeds to avoid. Empty when the vehicle's frequency or
 * damping is not
 * known: a scenario needs both.
 */
export function resonanceFindings(profile: ProfileInput, passages: RunPassages, setup: Setup): Finding[] {
  const { rollFrequencyHz, dampingRatio } = setup.vehicle;
  if (rollFrequencyHz === null || dampingRatio === null) return [];
  const found: Finding[] = [];
  for (const spacingM of setup.irregularitiesM ?? []) {
    const stretches = resonantStretches(profile.chainageM, profile.speedMps, spacingM, rollFrequencyHz, dampingRatio);
    const critical = criticalSpeedMps(spacingM, rollFrequencyHz, dampingRatio);
    if (stretches.length === 0) continue;
    found.push(
      finding(
        'assess/resonance-irregularities',
        `Irregularities every ${num(spacingM, 1)} m meet the roll frequency of ${num(rollFrequencyHz, 2)} Hz on ${String(stretches.length)} stretches; speeds to avoid there: ${avoidText(critical, dampingRatio)}`,
        stretches.map((stretch) => stretch.fromM),
      ),
    );
  }
  for (const row of reverseRows(passages)) {
    const critical = criticalSpeedMps(row.wavelengthM, rollFrequencyHz, dampingRatio);
    const [low, high] = resonanceBand(dampingRatio);
    if (critical === 0 || row.speedMps < low * critical || row.speedMps > high * critical) continue;
    found.push(
      finding(
        'assess/resonance-reverse-curves',
        `Curves ${row.curves.join(', ')} alternate every ${num(row.wavelengthM / 2, 0)} m and were passed near the roll's resonance; speeds to avoid: ${avoidText(critical, dampingRatio)}`,
        [row.fromM],
      ),
    );
  }
  return found;
}

interface ReverseRow {
  readonly curves: readonly number[];
  readonly fromM: number;
  /** Two half waves: from one left-hand curve to the next, m. */
  readonly wavelengthM: number;
  readonly speedMps: number;
}

/** Rows of three and more curves that alternate in hand at a steady spacing. */
function reverseRows(passages: RunPassages): ReverseRow[] {
  const centres = passages.passages.map(({ curve }) => ({
    number: curve.number,
    hand: curve.hand,
    at: (curve.startM + curve.endM) / 2,
    speed: curve.speedMps.value,
  }));
  const rows: ReverseRow[] = [];
  let first = 0;
  for (let i = 1; i <= centres.length; i++) {
    const here = centres[i];
    const before = centres[i - 1]!;
    const firstGap = i > first + 1 ? centres[first + 1]!.at - centres[first]!.at : null;
    const goesOn =
      here !== undefined &&
      here.hand !== before.hand &&
      (firstGap === null || Math.abs(here.at - before.at - firstGap) <= ALIKE * firstGap);
    if (goesOn) continue;
    if (i - first >= 3) {
      const members = centres.slice(first, i);
      const gap = (before.at - centres[first]!.at) / (members.length - 1);
      rows.push({
        curves: members.map((m) => m.number),
        fromM: centres[first]!.at,
        wavelengthM: 2 * gap,
        speedMps: members.reduce((sum, m) => sum + m.speed, 0) / members.length,
      });
      // The last curve may begin the next row.
      first = i - 1;
      if (here !== undefined && here.hand === before.hand) first = i;
    } else {
      first = here !== undefined && here.hand !== before.hand ? i - 1 : i;
    }
  }
  return rows;
}
