import type { Finding } from '../../shared/model/finding.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { Run } from '../../shared/model/run.ts';
import { FLAG } from '../../shared/model/run.ts';
import type { Observations } from './observations.ts';
import { LEAST_SPEED_FOR_COURSE_MPS, USE } from './observations.ts';
import type { Suspects } from './screen.ts';
import type { Tuned } from './tuning.ts';

/** A variance factor above which a reading hardly counts. */
const DISTRUSTED = 9;
/** Share of the fixes (or of the time) from which it is worth a warning. */
const FEW = 0.02;
const MUCH_TIME = 0.1;

/** What the estimate noticed of the log: lags, distrusted readings, missing channels, time without fixes. Nothing is dropped here. */
export function describe(
  run: Run,
  observations: Observations,
  motion: Motion,
  suspects: Suspects,
  tuned: Tuned,
): Finding[] {
  const findings: Finding[] = [];
  const add = (code: string, severity: Finding['severity'], message: string, count: number): void => {
    findings.push({ code: `estimate/${code}`, stage: 'estimate', severity, message, count, dropped: 0, places: [] });
  };
  const { quality, positionVarianceFactor, dopplerVarianceFactor } = motion;
  const { count, use } = observations;
  const { flags, timeS, courseRad } = run.fixes;
  const percent = (share: number): string => `${(100 * share).toFixed(1)} %`;

  const { courseS, courseSdS, speedS, speedSdS } = tuned.lags;
  const lags: string[] = [];
  if (courseS !== 0) lags.push(`course by ${courseS.toFixed(2)} ± ${courseSdS.toFixed(2)} s`);
  if (speedS !== 0) lags.push(`speed by ${speedS.toFixed(2)} ± ${speedSdS.toFixed(2)} s`);
  if (lags.length > 0) {
    add(
      'lag-corrected',
      'info',
      `The receiver's readings lag behind its positions, ${lags.join(' and ')}: corrected`,
      count,
    );
  }

  let positions = 0;
  let doppler = 0;
  let courses = 0;
  let lostS = 0;
  for (let i = 0; i < count; i++) {
    if ((use[i]! & USE.POSITION) !== 0 && positionVarianceFactor[i]! > DISTRUSTED) positions++;
    if ((use[i]! & (USE.SPEED | USE.COURSE)) !== 0 && dopplerVarianceFactor[i]! > DISTRUSTED) doppler++;
    const courseGiven = courseRad !== null && Number.isFinite(courseRad[i]!);
    if (courseGiven && (use[i]! & (USE.COURSE | USE.STANDING)) === 0) courses++;
    if (i > 0 && (flags[i]! & (FLAG.GAP_BEFORE | FLAG.HELD)) !== 0) lostS += timeS[i]! - timeS[i - 1]!;
  }
  if (positions > 0) {
    add(
      'positions-distrusted',
      positions > FEW * count ? 'warning' : 'info',
      `${String(positions)} positions (${percent(positions / count)}) disagree with the motion around them or are marked weak, ` +
        `${String(suspects.positions)} of them single outliers: they count little`,
      positions,
    );
  }
  if (doppler > 0) {
    add(
      'doppler-distrusted',
      doppler > FEW * count ? 'warning' : 'info',
      `${String(doppler)} readings of speed or course (${percent(doppler / count)}) disagree with the motion around them: they count little`,
      doppler,
    );
  }
  if (courses > 0) {
    const kmh = (LEAST_SPEED_FOR_COURSE_MPS * 3.6).toFixed(1);
    add(
      'course-ignored',
      'info',
      `${String(courses)} courses are not used: slower than ${kmh} km/h, next to a gap, or given while the position was held`,
      courses,
    );
  }
  if (quality.courseShare === 0) {
    const given = quality.speedShare === 0 ? 'neither course nor speed' : 'speed but no course';
    add(
      'no-course',
      'warning',
      `The run has ${given}: curvature comes from positions, with intervals several times wider than course would give`,
      count,
    );
  }
  if (lostS > 0) {
    const share = lostS / (timeS[count - 1]! - timeS[0]!);
    add(
      'time-without-fixes',
      share > MUCH_TIME ? 'warning' : 'info',
      `${lostS.toFixed(0)} s (${percent(share)} of the run) without usable fixes: nothing is known of curves there`,
      Math.round(lostS),
    );
  }
  return findings;
}
