import { spawnSync } from 'node:child_process';
import { describe, expect, it } from 'vitest';
import type { CurveTableJson } from '../../server/report/curve-table-json.ts';
import { hasRecordings, RECORDINGS, ROOT, SKIP_REASON } from '../support/shared.ts';

/**
 * Facts of each recording as written in the recordings' own index: points, duration, distance between
 * fixes, 99th centile of speed. `leastCurves`: no index has them; fewer than this were a loss.
 */
interface Facts {
  readonly file: string;
  readonly mode: 'rail' | 'road';
  readonly points: number;
  readonly durationS: number;
  readonly km: number;
  readonly speed99Kmh: number;
  readonly leastCurves: number;
  /** Why distance and speed of the index cannot be compared; empty when they can. */
  readonly unlike?: string;
}

const RAIL: Facts[] = [
  {
    file: 'rail/be_log_28554_L36-A_to_L36C-A.csv',
    mode: 'rail',
    points: 606,
    durationS: 242,
    km: 3.37,
    speed99Kmh: 101.2,
    leastCurves: 1,
  },
  {
    file: 'rail/be_log_28876_L36-B.csv',
    mode: 'rail',
    points: 1132,
    durationS: 452,
    km: 5.52,
    speed99Kmh: 81.1,
    leastCurves: 2,
  },
  {
    file: 'rail/be_log_29083_L36-A.csv',
    mode: 'rail',
    points: 878,
    durationS: 352,
    km: 10.97,
    speed99Kmh: 266.9,
    leastCurves: 0,
    unlike: 'stretches of false fixes lie 85-200 m beside the track',
  },
  {
    file: 'rail/be_log_29304_L36-B_to_L36N-B.csv',
    mode: 'rail',
    points: 904,
    durationS: 361,
    km: 4.8,
    speed99Kmh: 115.6,
    leastCurves: 1,
  },
  {
    file: 'rail/be_log_29584_L36-A_to_L36C-A_to_L25N-B.csv',
    mode: 'rail',
    points: 1481,
    durationS: 592,
    km: 7.54,
    speed99Kmh: 90.5,
    leastCurves: 1,
    unlike: 'half of the log is propagated through a tunnel',
  },
  {
    file: 'rail/be_log_30908_L36C-B_to_L36-A.csv',
    mode: 'rail',
    points: 1243,
    durationS: 496,
    km: 5.67,
    speed99Kmh: 116.1,
    leastCurves: 0,
    unlike: 'stretches of false fixes lie 130-190 m beside the track',
  },
  {
    file: 'rail/be_log_31176_25N-B_to_L36C-B.csv',
    mode: 'rail',
    points: 714,
    durationS: 285,
    km: 4.13,
    speed99Kmh: 113.2,
    leastCurves: 1,
  },
  {
    file: 'rail/be_log_31241_L36-B_to_L36C-B_to_L25N-A.csv',
    mode: 'rail',
    points: 2310,
    durationS: 923,
    km: 8.25,
    speed99Kmh: 77.6,
    leastCurves: 1,
    unlike: 'several bad stretches through a tunnel',
  },
  {
    file: 'rail/in_20241209-151406.gpx',
    mode: 'rail',
    points: 4652,
    durationS: 5586,
    km: 50.94,
    speed99Kmh: 80.8,
    leastCurves: 8,
  },
  {
    file: 'rail/in_20250222-071621.gpx',
    mode: 'rail',
    points: 4084,
    durationS: 4678,
    km: 45.85,
    speed99Kmh: 79,
    leastCurves: 8,
  },
  {
    file: 'rail/in_20250806-183746.gpx',
    mode: 'rail',
    points: 3554,
    durationS: 4441,
    km: 35.58,
    speed99Kmh: 91.6,
    leastCurves: 5,
  },
  {
    file: 'rail/in_20250808-183542.gpx',
    mode: 'rail',
    points: 3607,
    durationS: 5182,
    km: 36.39,
    speed99Kmh: 85.9,
    leastCurves: 5,
  },
  {
    file: 'rail/it_20250706-175442.gpx',
    mode: 'rail',
    points: 7797,
    durationS: 10408,
    km: 215.04,
    speed99Kmh: 163.6,
    leastCurves: 5,
  },
];

const ROAD: Facts[] = [
  {
    file: 'road/us_nds_drive8.csv',
    mode: 'road',
    points: 1382,
    durationS: 1381,
    km: 8.55,
    speed99Kmh: 98.9,
    leastCurves: 4,
  },
  {
    file: 'road/us_nds_drive15.csv',
    mode: 'road',
    points: 1818,
    durationS: 1890,
    km: 15.85,
    speed99Kmh: 81.5,
    leastCurves: 8,
  },
  {
    file: 'road/us_nds_drive31.csv',
    mode: 'road',
    points: 2473,
    durationS: 2519,
    km: 52.25,
    speed99Kmh: 126.8,
    leastCurves: 8,
  },
  {
    file: 'road/us_nds_drive9.csv',
    mode: 'road',
    points: 562,
    durationS: 605,
    km: 3.67,
    speed99Kmh: 47.9,
    leastCurves: 3,
  },
  {
    file: 'road/de_balzer_2014-02-14.csv',
    mode: 'road',
    points: 1500,
    durationS: 30,
    km: 0.44,
    speed99Kmh: 70.5,
    leastCurves: 0,
    unlike: '1,500 rows of sensors hold some 300 fixes',
  },
  {
    file: 'road/ca_dg100_highway.gpx',
    mode: 'road',
    points: 12027,
    durationS: NaN,
    km: 317.75,
    speed99Kmh: 121.6,
    leastCurves: 40,
    unlike: 'several trips over 84 days',
  },
  {
    file: 'road/nl_sbn-v13_delft.gpx',
    mode: 'road',
    points: 3453,
    durationS: 3541,
    km: 37.44,
    speed99Kmh: 97.5,
    leastCurves: 20,
  },
  {
    file: 'road/us_virb_car.fit',
    mode: 'road',
    points: 145,
    durationS: 144,
    km: 1.72,
    speed99Kmh: 70.8,
    leastCurves: 1,
  },
  {
    file: 'road/cz_adddate.nmea',
    mode: 'road',
    points: 500,
    durationS: 499,
    km: 7.51,
    speed99Kmh: 142.9,
    leastCurves: 0,
  },
  {
    file: 'road/logger-speed-1hz.gpx',
    mode: 'road',
    points: 1199,
    durationS: NaN,
    km: 10.5,
    speed99Kmh: NaN,
    leastCurves: 5,
  },
  {
    file: 'road/logger-speed-1hz.csv',
    mode: 'road',
    points: 1199,
    durationS: NaN,
    km: 10.5,
    speed99Kmh: NaN,
    leastCurves: 5,
  },
  {
    file: 'road/receiver-2s-positions.gpx',
    mode: 'road',
    points: 958,
    durationS: NaN,
    km: 16.7,
    speed99Kmh: NaN,
    leastCurves: 5,
    unlike: 'two segments, time runs back 355 s',
  },
];

function assess(facts: Facts): { status: number | null; table: CurveTableJson | null; stderr: string } {
  const result = spawnSync(
    process.execPath,
    ['bin/bendbook.mjs', 'assess', `${RECORDINGS}${facts.file}`, '--mode', facts.mode, '--format', 'json'],
    { cwd: ROOT, encoding: 'utf8', maxBuffer: 1 << 28 },
  );
  return {
    status: result.status,
    table: result.status === 0 ? (JSON.parse(result.stdout) as CurveTableJson) : null,
    stderr: result.stderr,
  };
}

describe.skipIf(!hasRecordings)(`real recordings through the command line (skipped when ${SKIP_REASON})`, () => {
  it.each([...RAIL, ...ROAD])('$file: points, duration, distance, speed and curves are plausible', (facts) => {
    const { status, table, stderr } = assess(facts);
    expect(status, stderr).toBe(0);
    const runs = table!.runs;
    const sum = (pick: (run: (typeof runs)[number]) => number) => runs.reduce((total, run) => total + pick(run), 0);
    const dropped = runs[0]!.findings.reduce((total, finding) => total + finding.dropped, 0);
    // Every point is either in a run or counted as dropped.
    expect(sum(({ fixCount }) => fixCount) + dropped).toBeGreaterThanOrEqual(
      facts.unlike === undefined ? 0.99 * facts.points : 0,
    );
    expect(sum(({ fixCount }) => fixCount)).toBeLessThanOrEqual(facts.points);
    if (facts.unlike === undefined) {
      expect(sum(({ fixCount }) => fixCount)).toBeGreaterThan(0.9 * facts.points);
      if (Number.isFinite(facts.durationS))
        expect(sum(({ durationS }) => durationS)).toBeLessThanOrEqual(facts.durationS + 2);
      if (Number.isFinite(facts.durationS))
        expect(sum(({ durationS }) => durationS)).toBeGreaterThan(0.85 * facts.durationS);
      // The index adds up distances between noisy fixes, standing included: the line may be shorter, hardly longer.
      expect(sum(({ lengthM }) => lengthM) / 1000).toBeGreaterThan(0.88 * facts.km);
      expect(sum(({ lengthM }) => lengthM) / 1000).toBeLessThan(1.03 * facts.km);
      if (Number.isFinite(facts.speed99Kmh)) {
        const top = Math.max(...runs.map(({ topSpeedKmh }) => topSpeedKmh));
        expect(top).toBeGreaterThan(0.93 * facts.speed99Kmh);
        // The index gives the 99th centile: one second in a hundred is faster.
        expect(top).toBeLessThan(1.3 * facts.speed99Kmh);
      }
    }
    const curves = table!.curves;
    expect(curves.length).toBeGreaterThanOrEqual(facts.leastCurves);
    for (const curve of curves) {
      // A curve whose whole interval lies below what the vehicle can turn would be an artefact; a wide interval is honest.
      expect(curve.radius_high_m ?? Infinity).toBeGreaterThan(facts.mode === 'rail' ? 60 : 4);
      // No train was pushed sideways at 2.5 m/s², no car at 10: an exceedance beyond would be an artefact.
      if (curve.verdict === 'over') {
        expect(Math.abs(curve.lateral_track_low_ms2 ?? 0)).toBeLessThan(facts.mode === 'rail' ? 2.5 : 10);
      }
      expect(curve.end_m).toBeGreaterThan(curve.start_m);
    }
  });
});
