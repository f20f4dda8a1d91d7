import { readdirSync } from 'node:fs';
import { median, quantile } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import type { Alignment, Curve } from '../../shared/model/alignment.ts';
import type { Motion } from '../../shared/model/motion.ts';
import type { Run } from '../../shared/model/run.ts';
import { fitAlignment } from '../../server/alignment/index.ts';
import { cleanRecording, planeToGeodetic } from '../../server/clean/index.ts';
import { estimateMotion } from '../../server/estimate/index.ts';
import { ingestFile } from '../../server/ingest/index.ts';
import { hasRecordings, RECORDINGS, SKIP_REASON } from '../support/shared.ts';
import { fitCircle, readCentreLines, type CentreLines } from './centre-line.ts';

/** Real logs against what is known of the places where they were made. */
interface FittedRun {
  readonly run: Run;
  readonly motion: Motion;
  readonly alignment: Alignment;
  /** Quality of each fix of the run: 4 is fixed RTK. */
  readonly quality: readonly number[];
}

async function fitFile(path: string): Promise<FittedRun[]> {
  const { recordings } = await ingestFile(path, { name: path.split('/').at(-1)! });
  return recordings.flatMap((recording) => {
    const rowIndex = new Map(Array.from(recording.fixes.row, (row, i) => [row, i]));
    return cleanRecording(recording).runs.map((run) => {
      const fit = fitAlignment(run, estimateMotion(run).motion);
      return {
        run,
        motion: fit.motion,
        alignment: fit.alignment,
        quality: Array.from(run.fixes.row, (row) => recording.fixes.fixQuality?.[rowIndex.get(row)!] ?? 255),
      };
    });
  });
}

const FIXED = 4;

function smoothedPlace({ run, motion }: FittedRun, i: number, lines: CentreLines): readonly [number, number] {
  const place = planeToGeodetic(run.fixes, i, motion.xM[i]! - run.fixes.xM[i]!, motion.yM[i]! - run.fixes.yM[i]!);
  return lines.toPlane(place.latDeg, place.lonDeg);
}

/** A fitted curve beside the circle through the surveyed centre line along its arc. */
interface Compared {
  readonly label: string;
  readonly curve: Curve;
  readonly surveyedM: number;
  /** What 5 cm in the middle of the arc do to the surveyed radius, m: 8 R^2 / L^2 times as much. */
  readonly surveySdM: number;
}

const SURVEY_SD_M = 0.05;

/**
 * Curves passed over fixed-RTK fixes where the centre line itself is an arc (its points within 12 cm of a circle) and turns
 * enough (0.1 rad) for its radius to be known.
 */
function compareRadii(fitted: FittedRun, lines: CentreLines, label: string): Compared[] {
  return fitted.alignment.curves.flatMap((curve) => {
    const arcM = curve.arcEndM - curve.arcStartM;
    const points: (readonly [number, number])[] = [];
    let seen = 0;
    let fixed = 0;
    for (let i = 0; i < fitted.motion.count; i += 1) {
      const s = fitted.motion.chainageM[i]!;
      if (s < curve.arcStartM + 0.1 * arcM || s > curve.arcEndM - 0.1 * arcM) continue;
      seen += 1;
      if (fitted.quality[i] === FIXED) fixed += 1;
      const near = lines.nearest(...smoothedPlace(fitted, i, lines));
      if (near.distanceM < 4) points.push([near.xM, near.yM]);
    }
    if (seen < 8 || fixed < 0.9 * seen || points.length < 0.9 * seen) return [];
    const circle = fitCircle(points);
    if (circle.rmsM > 0.12 || (0.8 * arcM) / circle.radiusM < 0.1) return [];
    const surveySdM = (8 * circle.radiusM ** 2 * SURVEY_SD_M) / (0.8 * arcM) ** 2;
    return [{ label, curve, surveyedM: circle.radiusM, surveySdM }];
  });
}

describe.skipIf(!hasRecordings)(
  `trains near an airport against surveyed centre lines (skipped when ${SKIP_REASON})`,
  () => {
    /** Median distance of the fixed-RTK fixes from the nearest track as measured in the index of the recordings, m. */
    const MEASURED: Readonly<Record<string, number>> = {
      'be_log_28554_L36-A_to_L36C-A.csv': 1.01,
      'be_log_28876_L36-B.csv': 1.68,
      'be_log_29304_L36-B_to_L36N-B.csv': 2.14,
      'be_log_29584_L36-A_to_L36C-A_to_L25N-B.csv': 0.77,
      'be_log_31176_25N-B_to_L36C-B.csv': 1.17,
      'be_log_31241_L36-B_to_L36C-B_to_L25N-A.csv': 1.73,
    };
    const names = hasRecordings ? readdirSync(`${RECORDINGS}rail`).filter((name) => name in MEASURED) : [];
    const fits = new Map<string, Promise<FittedRun[]>>();
    const fitOf = (name: string) => {
      let fit = fits.get(name);
      if (!fit) fits.set(name, (fit = fitFile(`${RECORDINGS}rail/${name}`)));
      return fit;
    };
    const readLines = () => readCentreLines(`${RECORDINGS}known-geometry/be_network_airport.geojson`);

    for (const name of names) {
      it(`${name}: the smoothed positions lie as near the tracks as the fixed-RTK fixes themselves`, async () => {
        const lines = readLines();
        const raw: number[] = [];
        const smoothed: number[] = [];
        for (const fitted of await fitOf(name)) {
          for (let i = 0; i < fitted.run.fixes.count; i += 1) {
            if (fitted.quality[i] !== FIXED) continue;
            const { latDeg, lonDeg } = fitted.run.fixes;
            raw.push(lines.nearest(...lines.toPlane(latDeg[i]!, lonDeg[i]!)).distanceM);
            smoothed.push(lines.nearest(...smoothedPlace(fitted, i, lines)).distanceM);
          }
        }
        expect(raw.length).toBeGreaterThan(250);
        expect(Math.abs(median(raw) - MEASURED[name]!)).toBeLessThan(0.1);
        expect(median(smoothed)).toBeLessThan(median(raw) + 0.05);
        expect(quantile(smoothed, 0.95)).toBeLessThan(1.05 * quantile(raw, 0.95) + 0.1);
      });
    }

    it('radii agree with circles through the centre lines, within the intervals shown', async () => {
      const lines = readLines();
      const compared: Compared[] = [];
      for (const name of names) {
        for (const fitted of await fitOf(name)) compared.push(...compareRadii(fitted, lines, name));
      }
      const list = compared.map(
        ({ label, curve, surveyedM }) =>
          `${label} at ${curve.arcStartM.toFixed(0)} m: R ${curve.radiusM.value.toFixed(0)} [${curve.radiusM.low.toFixed(0)}, ${curve.radiusM.high.toFixed(0)}], surveyed ${surveyedM.toFixed(0)}`,
      );
      expect(compared.length, list.join('\n')).toBeGreaterThanOrEqual(8);
      const errors = compared.map(({ curve, surveyedM }) => Math.abs(curve.radiusM.value / surveyedM - 1));
      expect(median(errors), list.join('\n')).toBeLessThan(0.025);
      const held = compared.filter(
        ({ curve, surveyedM, surveySdM }) =>
          surveyedM > curve.radiusM.low - 2 * surveySdM && surveyedM < curve.radiusM.high + 2 * surveySdM,
      );
      // 95 % with three standard errors of so few curves.
      const lowest = 0.95 - 3 * Math.sqrt((0.95 * 0.05) / compared.length);
      expect(held.length / compared.length, list.join('\n')).toBeGreaterThan(lowest);
    });

    it('no curve in the tunnel, without a fix, is given a tight interval that the centre line contradicts', async () => {
      const lines = readLines();
      const wrong: string[] = [];
      for (const name of names) {
        for (const fitted of await fitOf(name)) {
          for (const curve of fitted.alignment.curves) {
            if (curve.observedShare < 0.7) continue;
            const inside = fitted.quality.filter((_, i) => {
              const s = fitted.motion.chainageM[i]!;
              return s >= curve.arcStartM && s <= curve.arcEndM;
            });
            if (inside.length < 8 || inside.some((quality) => quality === FIXED)) continue;
            const points = Array.from({ length: fitted.motion.count }, (_, i) => i)
              .filter(
                (i) => fitted.motion.chainageM[i]! >= curve.arcStartM && fitted.motion.chainageM[i]! <= curve.arcEndM,
              )
              .map((i) => lines.nearest(...smoothedPlace(fitted, i, lines)));
            if (points.some((near) => near.distanceM > 6)) continue;
            const { radiusM } = fitCircle(points.map((near) => [near.xM, near.yM] as const));
            const { low, high, value } = curve.radiusM;
            if (high / low < 1.1 && (radiusM < low / 1.1 || radiusM > high * 1.1)) {
              wrong.push(
                `${name} at ${curve.arcStartM.toFixed(0)} m: R ${value.toFixed(0)} [${low.toFixed(0)}, ${high.toFixed(0)}], surveyed ${radiusM.toFixed(0)}`,
              );
            }
          }
        }
      }
      expect(wrong).toEqual([]);
    });
  },
);

describe.skipIf(!hasRecordings)(`an athletics track (skipped when ${SKIP_REASON})`, () => {
  // World Athletics track of 400 m: bends of 36.50 m radius, 36.80 m along the line of running in lane 1.
  it('has bends whose intervals hold 36.5 to 36.8 m', async () => {
    const [fitted] = await fitFile(`${RECORDINGS}known-geometry/gb_luton_400m_track.gpx`);
    const bends = fitted!.alignment.curves.filter((curve) => curve.deflectionRad.value > 2.2);
    // Sixteen sprints of 200 m, a bend in each. Short of that: three are told apart today, the others run into their neighbours.
    expect(bends.length).toBeGreaterThanOrEqual(3);
    const held = bends.filter(({ radiusM }) => radiusM.low < 36.8 && radiusM.high > 36.5);
    // With so few, one may miss: nobody runs the line of measurement exactly.
    expect(held.length).toBeGreaterThanOrEqual(bends.length - 1);
    expect(Math.abs(median(bends.map(({ radiusM }) => radiusM.value)) / 36.8 - 1)).toBeLessThan(0.08);
  });
});

describe.skipIf(!hasRecordings)(`a lap of a motor circuit (skipped when ${SKIP_REASON})`, () => {
  it('turns once round, through several curves, with lateral accelerations that tyres can give', async () => {
    const [fitted] = await fitFile(`${RECORDINGS}known-geometry/cn_tianma_lap9.csv`);
    const { motion, alignment } = fitted!;
    const turned = motion.headingRad[motion.count - 1]! - motion.headingRad[0]!;
    // Bearings of the file's first and last row: 322.56 and 289.45 degrees, once round to the left.
    expect(turned).toBeGreaterThan(2 * Math.PI + ((322.56 - 289.45) * Math.PI) / 180 - 0.1);
    expect(turned).toBeLessThan(2 * Math.PI + ((322.56 - 289.45) * Math.PI) / 180 + 0.1);
    expect(alignment.lengthM).toBeGreaterThan(2200);
    expect(alignment.lengthM).toBeLessThan(2350);
    expect(alignment.curves.length).toBeGreaterThanOrEqual(8);
    let peak = 0;
    for (let i = 0; i < motion.count; i += 1) {
      const surely = Math.abs(motion.curvaturePerM[i]!) - 1.96 * motion.curvatureSdPerM[i]!;
      peak = Math.max(peak, motion.speedMps[i]! ** 2 * surely);
    }
    // What the interval supports. The logger's own column, reckoned from GPS, reaches 1.3 g.
    expect(peak).toBeGreaterThan(7);
    expect(peak).toBeLessThan(17);
  });
});
