import { describe, expect, it } from 'vitest';
import { estimateMotion } from '../../../server/estimate/index.ts';
import type { Run } from '../../../shared/model/run.ts';
import { SKIP_REASON, hasRecordings } from '../../support/shared.ts';
import type { RecordedDrive } from './recorded-drive.ts';
import { readBlackBox, readFiftyHertz } from './recorded-drive.ts';

// Truth from outside: accelerometer and gyroscope that stand in the same rows as the receiver's fixes. Their noise, the car's roll
// and the crossfall of the road bound any correlation well below 1; the naive figure from the same rows is the measure.

const wrap = (angle: number): number => angle - 2 * Math.PI * Math.round(angle / (2 * Math.PI));

interface Comparison {
  readonly fixes: number;
  readonly correlation: number;
  /** R.m.s. of the difference after its mean (tilt of the sensor), m/s^2. */
  readonly rmsMps2: number;
}

function compare(estimate: readonly number[], measured: readonly number[]): Comparison {
  const n = estimate.length;
  const mean = (values: readonly number[]): number => values.reduce((sum, value) => sum + value, 0) / n;
  const meanE = mean(estimate);
  const meanM = mean(measured);
  let em = 0;
  let ee = 0;
  let mm = 0;
  let square = 0;
  for (let i = 0; i < n; i++) {
    const e = estimate[i]! - meanE;
    const m = measured[i]! - meanM;
    em += e * m;
    ee += e * e;
    mm += m * m;
    square += (e - m) ** 2;
  }
  return { fixes: n, correlation: em / Math.sqrt(ee * mm), rmsMps2: Math.sqrt(square / n) };
}

/** Lateral acceleration from the motion, and naively as v d(course)/dt by central difference, where both exist. */
function lateral(drive: RecordedDrive) {
  const { fixes } = drive.run;
  const { motion } = estimateMotion(drive.run);
  const ours: number[] = [];
  const naive: number[] = [];
  const accelerometer: number[] = [];
  const gyroscope: number[] = [];
  const course = fixes.courseRad!;
  for (let i = 1; i + 1 < fixes.count; i++) {
    const span = fixes.timeS[i + 1]! - fixes.timeS[i - 1]!;
    if (!Number.isFinite(course[i - 1]! + course[i]! + course[i + 1]!) || span > 3) continue;
    ours.push(motion.speedMps[i]! ** 2 * motion.curvaturePerM[i]!);
    naive.push((-fixes.speedMps![i]! * wrap(course[i + 1]! - course[i - 1]!)) / span);
    accelerometer.push(drive.accelerometerMps2[i]!);
    gyroscope.push(drive.gyroscopeMps2[i]!);
  }
  return {
    accelerometer: { ours: compare(ours, accelerometer), naive: compare(naive, accelerometer) },
    gyroscope: { ours: compare(ours, gyroscope), naive: compare(naive, gyroscope) },
    motion,
  };
}

const DRIVES: readonly (readonly [string, (file: string) => RecordedDrive])[] = [
  ['us_nds_drive8.csv', readBlackBox],
  ['us_nds_drive9.csv', readBlackBox],
  ['us_nds_drive15.csv', readBlackBox],
  ['us_nds_drive31.csv', readBlackBox],
  ['de_balzer_2014-02-14.csv', readFiftyHertz],
];

const text = ({ correlation, rmsMps2 }: Comparison): string => `${correlation.toFixed(3)} / ${rmsMps2.toFixed(3)}`;

describe.skipIf(!hasRecordings)(
  `lateral acceleration of cars with their own sensors (skipped when ${SKIP_REASON})`,
  () => {
    it.each(DRIVES)('%s: closer to accelerometer and gyroscope than v d(course)/dt', (file, read) => {
      const { accelerometer, gyroscope, motion } = lateral(read(file));
      console.log(
        `${file} (${String(accelerometer.ours.fixes)} fixes), correlation / rms m/s2: accelerometer ours ${text(accelerometer.ours)}` +
          ` naive ${text(accelerometer.naive)}; gyroscope ours ${text(gyroscope.ours)} naive ${text(gyroscope.naive)};` +
          ` lag ${motion.quality.noise.lagS.toFixed(2)} s`,
      );
      for (const { ours, naive } of [accelerometer, gyroscope]) {
        expect(ours.correlation).toBeGreaterThan(naive.correlation);
        expect(ours.rmsMps2).toBeLessThan(naive.rmsMps2);
      }
    });

    it('no lateral acceleration beyond what cars reach is claimed from a motorway drive', () => {
      const { motion } = lateral(readBlackBox('us_nds_drive31.csv'));
      const peak = motion.curvaturePerM.reduce(
        (most, k, i) => Math.max(most, Math.abs(k) * motion.speedMps[i]! ** 2),
        0,
      );
      // The car's own accelerometer shows 4.7 m/s^2 at most in this drive (0.479 g), tilt included.
      expect(peak).toBeLessThan(6);
    });

    it('without course a drive is worse known, and says so', () => {
      const { run } = readBlackBox('us_nds_drive9.csv');
      const bare: Run = { ...run, fixes: { ...run.fixes, courseRad: null, speedMps: null } };
      const withCourse = estimateMotion(run).motion.quality;
      const without = estimateMotion(bare);
      expect(without.motion.quality.smallestCurvaturePerM).toBeGreaterThan(withCourse.smallestCurvaturePerM);
      expect(without.findings.map((finding) => finding.code)).toContain('estimate/no-course');
    });
  },
);
