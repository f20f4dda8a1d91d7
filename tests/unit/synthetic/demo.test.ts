import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { makeDemo } from '../../../data/demo/generate.ts';
import { ingestFile } from '../../../server/ingest/index.ts';

const FOLDER = join(import.meta.dirname, '..', '..', '..', 'data', 'demo');
const files = makeDemo();
const manifest = JSON.parse(files.get('demo.json')!) as {
  recordings: { file: string; mode: string; title: string }[];
  register: { file: string };
};
const truth = JSON.parse(files.get('truth.json')!) as {
  rail: { lengthM: number; curves: { radiusM: number; cantMm: number }[] };
  bus: { lengthM: number };
  runs: { file: string; fixes: number; arcSpeedsKmh: { highest: number }[] }[];
};

describe('the demonstration', () => {
  it('lies in the repository exactly as its generator makes it', () => {
    for (const [name, text] of files) expect(readFileSync(join(FOLDER, name), 'utf8') === text, name).toBe(true);
  });

  it('is small', () => {
    const bytes = [...files.values()].reduce((sum, text) => sum + Buffer.byteLength(text), 0);
    expect(bytes).toBeLessThan(6_000_000);
  });

  it('lists only files that it has', () => {
    for (const { file } of [...manifest.recordings, manifest.register]) expect(files.has(file), file).toBe(true);
  });

  it('has curves clearly beyond 153 mm of cant deficiency, close to 130 mm, and mostly below 110 mm in every run', () => {
    for (const run of truth.runs.filter((one) => one.file.startsWith('rail'))) {
      // Equilibrium cant 11.8 V^2 / R on a base of 1500 mm (EN 13803-1:2010).
      const deficiency = truth.rail.curves.map(
        (curve, i) => (11.8 * run.arcSpeedsKmh[i]!.highest ** 2) / curve.radiusM - curve.cantMm,
      );
      expect(deficiency.filter((value) => value > 158).length).toBeGreaterThanOrEqual(2);
      expect(deficiency.filter((value) => Math.abs(value - 128) < 12).length).toBeGreaterThanOrEqual(2);
      expect(deficiency.filter((value) => value < 110).length).toBeGreaterThanOrEqual(15);
    }
  });

  it('is read back by the reader of each format with every fix, speed and course', async () => {
    for (const { file } of manifest.recordings) {
      const { recordings, refused } = await ingestFile(join(FOLDER, file), { name: file });
      expect(refused).toEqual([]);
      const fixes = recordings[0]!.fixes;
      const run = truth.runs.find((one) => one.file === file)!;
      const withPosition = fixes.latDeg.filter((value) => !Number.isNaN(value)).length;
      expect(withPosition, file).toBe(run.fixes);
      expect(Math.max(...fixes.speedMps!) * 3.6, file).toBeGreaterThan(45);
      expect(fixes.courseRad!.filter((value) => !Number.isNaN(value)).length, file).toBeGreaterThan(0.7 * run.fixes);
    }
  });
});
