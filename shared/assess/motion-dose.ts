import type { Profile } from '../model/motion.ts';
import { lateralMotionDose } from '../curving/motion-sickness.ts';

/**
 * Motion dose of a run from its lateral body acceleration, m/s^1.5: a relative indicator to compare runs and
 * vehicles, not a forecast of
 * sickness. timeS: seconds at each station; body: lateralBodyMps2 of the profile's assessment.
 * Steps of time that do not advance (a standstill folded into one station) are passed over.
 */
export function runMotionDose(timeS: Profile['timeS'] | readonly number[], body: ArrayLike<number>): number {
  const t: number[] = [];
  const a: number[] = [];
  for (let i = 0; i < timeS.length; i++) {
    const at = timeS[i]!;
    if (!Number.isFinite(at) || (t.length > 0 && at <= t[t.length - 1]!)) continue;
    t.push(at);
    a.push(body[i]!);
  }
  return lateralMotionDose(t, a);
}
