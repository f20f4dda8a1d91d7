export { assessRun } from './assess-run.ts';
export { assessProfile } from './profile.ts';
export type { ProfileInput, ProfileAssessment } from './profile.ts';
export { adviseLine } from './line.ts';
export type { CurveAdvice, LineAdvice } from './line.ts';
export { applyTrial } from './trial.ts';
export type { Trial } from './trial.ts';
export { parseCantRegister } from './cant/parse-register.ts';
