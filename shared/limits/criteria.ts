import type { Mode } from '../schema/common.ts';
import type { CriterionId } from '../schema/limit-set.ts';
import type { Unit } from '../units.ts';

/** What a criterion means, once for assessment, page and exports. */
export interface Criterion {
  readonly id: CriterionId;
  /** Name of the trade, English. */
  readonly name: string;
  readonly unit: Unit;
  readonly decimals: number;
  /** A `most` limit is exceeded from below, a `least` limit (shortest element) from above. */
  readonly sense: 'most' | 'least';
  readonly modes: readonly Mode[];
}

function criterion(
  id: CriterionId,
  name: string,
  unit: Unit,
  decimals: number,
  modes: readonly Mode[],
  sense: 'most' | 'least' = 'most',
): Criterion {
  return { id, name, unit, decimals, sense, modes };
}

const RAIL = ['rail'] as const;
const ROAD = ['road'] as const;
const BOTH = ['rail', 'road'] as const;

/** Every criterion, in the order of the curve sheet. */
export const CRITERIA: readonly Criterion[] = [
  criterion('speed', 'Speed', 'km/h', 1, BOTH),
  criterion('cant', 'Cant', 'mm', 0, RAIL),
  criterion('cant_deficiency', 'Cant deficiency', 'mm', 1, RAIL),
  criterion('cant_excess', 'Cant excess', 'mm', 1, RAIL),
  criterion('side_friction', 'Side friction demand', '1', 3, ROAD),
  criterion('ball_bank', 'Ball-bank angle', '°', 1, ROAD),
  criterion('lateral_track', 'Track-plane lateral acceleration', 'm/s²', 3, BOTH),
  criterion('lateral_body', 'Body lateral acceleration', 'm/s²', 3, BOTH),
  criterion('deficiency_rate', 'Rate of change of cant deficiency', 'mm/s', 1, RAIL),
  criterion('abrupt_deficiency_change', 'Abrupt change of cant deficiency', 'mm', 1, RAIL),
  criterion('jerk', 'Lateral jerk', 'm/s³', 3, BOTH),
  criterion('cant_rate', 'Rate of change of cant', 'mm/s', 1, RAIL),
  criterion('cant_gradient', 'Twist from cant run-off', 'mm/m', 2, RAIL),
  criterion('roll_rate', 'Roll velocity of the body', '°/s', 2, RAIL),
  criterion('vertical', 'Vertical acceleration', 'm/s²', 3, BOTH),
  criterion('element_length', 'Shortest element', 'm', 1, BOTH, 'least'),
  criterion('entry_deceleration', 'Deceleration at curve entry', 'm/s²', 2, BOTH),
  criterion('pct_seated', 'Comfort index, seated', '%', 1, RAIL),
  criterion('pct_standing', 'Comfort index, standing', '%', 1, RAIL),
];

const BY_ID = new Map(CRITERIA.map((c) => [c.id, c]));

/** Criterion of an id; every id of the schema has one. */
export function criterionOf(id: CriterionId): Criterion {
  return BY_ID.get(id)!;
}
