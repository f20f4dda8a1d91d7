export { CRITERIA, criterionOf } from './criteria.ts';
export { compareLimitSets } from './compare.ts';
export { checkLimitSet } from './check.ts';
export { describeSource, limitFor } from './lookup.ts';
export { parseLimitSet, parseVehicle } from './parse.ts';
