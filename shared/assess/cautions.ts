import type { LimitSet } from '../schema/limit-set.ts';
import type { Setup } from '../schema/setup.ts';

/** Hold for every output, whatever the setup. */
const ALWAYS = [
  'Derived from satellite positioning. It does not replace track-geometry measurement, a road survey or an instrumented ride test.',
  "The limits shown are starting points. The operator's and the regulator's own limits and local rules govern.",
  'A change of speed, cant or alignment is a decision for the competent, authorised and where required licensed people of that line or road.',
  'Nothing here clears a vehicle against derailment, overturning or skidding, and no figure invites running faster.',
  'Intervals are those of the measurement; short jolts, turnouts and track irregularities lie below what such a log can see.',
  'Recordings hold positions of people and vehicles: treat them as personal data.',
] as const;

/** What every screen and export must say under a setup, most general first. */
export function cautionsFor(setup: Setup, hasUnknownCant: boolean): string[] {
  const cautions: string[] = [...ALWAYS];
  if (setup.mode === 'rail') {
    cautions.push(
      'Cant cannot be seen by satellite positioning: it comes from the register or rule named, or is unknown.',
    );
  } else {
    cautions.push(
      'Side friction limits are comfort values of design, not what tyres can give; wet, ice, load height and standing passengers are not covered.',
    );
  }
  if (hasUnknownCant) {
    cautions.push(
      'Where cant is unknown, figures hold for zero cant and are upper bounds; the verdict says what cant would be needed.',
    );
  }
  cautions.push(
    'Body motion and comfort indices are modelled from the vehicle figures given, not measured in the vehicle.',
  );
  if (fromMemory(setup.limits) > 0) {
    cautions.push(
      `${String(fromMemory(setup.limits))} of the limits in "${setup.limits.name}" were recalled, not read in the document named: check them before use.`,
    );
  }
  return [...cautions, ...setup.limits.cautions];
}

function fromMemory(set: LimitSet): number {
  return set.limits.filter((limit) => limit.source.status === 'memory').length;
}
