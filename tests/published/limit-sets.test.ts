import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { checkLimitSet, parseLimitSet, parseVehicle } from '../../shared/limits/index.ts';
import { entryOf } from '../../shared/limits/lookup.ts';
import type { CriterionId, LimitSet } from '../../shared/schema/limit-set.ts';
import { hasCheckValues, ROOT, SHARED, SKIP_REASON } from '../support/shared.ts';

const FOLDER = `${ROOT}data/limits/`;
const files = readdirSync(FOLDER).filter((name) => name.endsWith('.json'));
const sets = new Map(
  files.map((name) => [name.replace('.json', ''), parseLimitSet(readFileSync(FOLDER + name, 'utf8'), name)]),
);

/** Normal and exceptional value of a criterion, in the band that holds at 120 km/h and 1000 m. */
function values(id: string, criterion: CriterionId): [number | null, number | null] | null {
  const entry = entryOf(sets.get(id)!, criterion);
  const band = entry?.bands.find((b) => (b.minSpeedKmh ?? 0) <= 120 && (b.maxSpeedKmh ?? Infinity) >= 120);
  return band === undefined ? null : [band.normal, band.exceptional];
}

// The values of the published table, kept here so that the check does not need the folder beside the checkout.
// All from memory unless said; ranges are taken at the cautious end as each file's note says.
const TABLE: readonly [set: string, criterion: CriterionId, normal: number | null, exceptional: number | null][] = [
  ['conventional-train', 'cant', 160, 180],
  ['conventional-train', 'cant_deficiency', 130, 153],
  ['conventional-train', 'cant_excess', 110, 130],
  ['conventional-train', 'cant_rate', 50, 55],
  ['conventional-train', 'deficiency_rate', 55, 90],
  ['conventional-train', 'abrupt_deficiency_change', 125, null],
  ['conventional-train', 'cant_gradient', 2.25, 2.5],
  ['conventional-train', 'vertical', 0.22, 0.44],
  ['conventional-train', 'jerk', 0.5, 0.67],
  ['conventional-train', 'lateral_track', 0.85, 1.0],
  ['tsi-infrastructure', 'cant', 160, 180],
  ['tsi-infrastructure', 'cant_deficiency', 153, null],
  ['tsi-infrastructure', 'abrupt_deficiency_change', 125, null],
  ['british-practice', 'cant', 150, 180],
  ['british-practice', 'cant_deficiency', 110, 150],
  ['british-practice', 'cant_excess', 110, null],
  ['british-practice', 'cant_rate', 55, 85],
  ['british-practice', 'deficiency_rate', 35, 70],
  ['german-practice', 'cant', 160, 180],
  ['german-practice', 'cant_deficiency', 130, 150],
  ['german-practice', 'cant_rate', 34, 46],
  ['german-practice', 'deficiency_rate', 53, 69],
  ['indian-broad-gauge', 'cant', 165, 185],
  ['indian-broad-gauge', 'cant_deficiency', 75, 100],
  ['indian-broad-gauge', 'cant_excess', 75, null],
  ['indian-broad-gauge', 'cant_rate', 35, 55],
  ['indian-broad-gauge', 'deficiency_rate', 35, 55],
  // 49 CFR 213.57 (read): 7 in, 3 in.
  ['us-49cfr213', 'cant', 7 * 25.4, null],
  ['us-49cfr213', 'cant_deficiency', 3 * 25.4, null],
  // ASME JRC2011 abstract (read): 0.1 g, 0.03 g/s, 1 degree/s; 1.25 in/s from memory.
  ['us-comfort', 'lateral_body', 0.1 * 9.80665, null],
  ['us-comfort', 'jerk', 0.03 * 9.80665, null],
  ['us-comfort', 'roll_rate', 1, null],
  ['us-comfort', 'cant_rate', 1.25 * 25.4, null],
  ['tram-metro', 'cant', 100, 165],
  ['tram-metro', 'cant_deficiency', 100, 150],
  ['tram-metro', 'cant_excess', 100, null],
  ['tram-metro', 'cant_rate', 50, 60],
  ['tram-metro', 'deficiency_rate', 60, 100],
  ['tram-metro', 'lateral_track', 0.65, 1.0],
  ['tram-metro', 'jerk', 0.5, 0.67],
  ['bus-coach-standing', 'lateral_body', 0.1 * 9.80665, 0.15 * 9.80665],
  ['bus-coach-standing', 'jerk', 0.6, 0.9],
  ['bus-coach-standing', 'entry_deceleration', 1.0, null],
];

describe('shipped limit sets', () => {
  it('are at least a train, a tram or metro, a bus and coach, a road and a blank set for each mode', () => {
    for (const id of [
      'conventional-train',
      'tram-metro',
      'bus-coach-standing',
      'road-design',
      'operator-blank',
      'operator-blank-road',
    ]) {
      expect(sets.has(id), id).toBe(true);
    }
  });

  it.each([...sets])('%s is sound, names its id, and every value names its source', (id, set) => {
    expect(set.id).toBe(id);
    expect(checkLimitSet(set)).toEqual([]);
    expect(set.appliesTo.length).toBeGreaterThan(20);
    for (const { source } of set.limits) expect(source.document).not.toBe('');
  });

  it.each(TABLE)('%s has %s %d normal, %d exceptional', (id, criterion, normal, exceptional) => {
    const found = values(id, criterion);
    expect(found?.[0]).toBeCloseTo(normal!, 6);
    if (exceptional === null) expect(found?.[1]).toBeNull();
    else expect(found?.[1]).toBeCloseTo(exceptional, 6);
  });

  it('hold no value that this table does not check, road bands and blank sets apart', () => {
    const checked = new Set(TABLE.map(([id, criterion]) => `${id} ${criterion}`));
    const unchecked = [...sets.values()]
      .filter((set) => !set.id.startsWith('operator-blank') && set.id !== 'road-design')
      .flatMap((set) => set.limits.map((l) => `${set.id} ${l.criterion}`))
      .filter((key) => !checked.has(key));
    expect(unchecked).toEqual([]);
  });

  // AASHTO 2004 and later (from memory); 2001 and before differ at 50 to 70 km/h.
  it.each([
    [30, 0.28],
    [40, 0.23],
    [50, 0.19],
    [60, 0.17],
    [70, 0.15],
    [80, 0.14],
    [90, 0.13],
    [100, 0.12],
    [110, 0.11],
    [120, 0.09],
  ])('road-design allows at %d km/h a side friction of %d', (speed, friction) => {
    const band = entryOf(sets.get('road-design')!, 'side_friction')!.bands.find(
      (b) => speed <= (b.maxSpeedKmh ?? Infinity),
    );
    expect(band?.normal).toBe(friction);
  });

  // MUTCD 2009 (from memory): 16 degrees at 20 mph and below, 14 at 25 to 30, 12 from 35.
  it.each([
    [20, 16],
    [25, 14],
    [30, 14],
    [35, 12],
    [60, 12],
  ])('road-design allows at %d mph a ball-bank angle of %d degrees', (mph, degrees) => {
    const speed = mph * 1.609344;
    const band = entryOf(sets.get('road-design')!, 'ball_bank')!.bands.find(
      (b) => speed <= (b.maxSpeedKmh ?? Infinity) + 1e-9,
    );
    expect(band?.normal).toBe(degrees);
  });

  it('abrupt change by speed: 130 to 60 km/h, 125 to 200, 85 to 230, 25 above (TSI INF 4.2.4.4, from memory)', () => {
    for (const id of ['conventional-train', 'tsi-infrastructure']) {
      const { bands } = entryOf(sets.get(id)!, 'abrupt_deficiency_change')!;
      expect(bands.map((b) => [b.maxSpeedKmh ?? null, b.normal])).toEqual([
        [60, 130],
        [200, 125],
        [230, 85],
        [null, 25],
      ]);
    }
  });

  it('a blank set assesses nothing', () => {
    for (const id of ['operator-blank', 'operator-blank-road']) {
      const set: LimitSet = sets.get(id)!;
      expect(set.limits.every((l) => l.bands.every((b) => b.normal === null && b.exceptional === null))).toBe(true);
    }
  });
});

describe.skipIf(!hasCheckValues)(
  `table of limits in the check values${hasCheckValues ? '' : ` (skipped: ${SKIP_REASON})`}`,
  () => {
    const readme = hasCheckValues ? readFileSync(`${SHARED}check-values/README.md`, 'utf8') : '';
    /** Cells of the row whose first cell begins with a text. */
    function row(begins: string): string[] {
      const line = readme.split('\n').find((l) => l.startsWith(`| ${begins}`));
      return line!
        .split('|')
        .slice(2, -1)
        .map((cell) => cell.trim());
    }
    /** First number of a cell. */
    const firstOf = (cell: string): number => Number(/[\d.]+/.exec(cell)![0]);
    const cellsOfRail: readonly CriterionId[] = [
      'cant',
      'cant_deficiency',
      'cant_excess',
      'cant_rate',
      'deficiency_rate',
    ];

    it.each([
      ['EN 13803-1:2010, conventional', 'conventional-train'],
      ['British practice', 'british-practice'],
      ['German practice', 'german-practice'],
      ['Indian practice', 'indian-broad-gauge'],
      ['tram and metro', 'tram-metro'],
    ])('row "%s" begins each cell with the normal value of %s', (begins, id) => {
      const cells = row(begins);
      cellsOfRail.forEach((criterion, i) => {
        if (cells[i] === '') expect(values(id, criterion), criterion).toBeNull();
        else expect(values(id, criterion)?.[0], criterion).toBe(firstOf(cells[i]!));
      });
    });

    it('row "the same, exceptional" begins each cell with the exceptional value of conventional-train', () => {
      const cells = row('the same, exceptional');
      cellsOfRail.forEach((criterion, i) => {
        expect(values('conventional-train', criterion)?.[1], criterion).toBe(firstOf(cells[i]!));
      });
    });

    it('rows with "a / b" hold both tiers', () => {
      expect(row('Indian practice').slice(0, 2)).toEqual(['165 / 185 mm', '75 / 100 mm']);
      expect(values('indian-broad-gauge', 'cant')).toEqual([165, 185]);
      expect(values('indian-broad-gauge', 'cant_deficiency')).toEqual([75, 100]);
    });
  },
);

describe('shipped vehicles', () => {
  const folder = `${ROOT}data/vehicles/`;
  const names = readdirSync(folder).filter((name) => name.endsWith('.json'));

  it.each(names)('%s is sound and marked as generic and recalled', (name) => {
    const vehicle = parseVehicle(readFileSync(folder + name, 'utf8'), name);
    expect(`${vehicle.id}.json`).toBe(name);
    expect(vehicle.source.status).toBe('memory');
    expect(vehicle.source.document).toContain('invented');
    // Usual ranges of the check values, section 4 (from memory); a car rolls faster than a bus.
    expect(vehicle.rollCoefficient).toBeGreaterThanOrEqual(0.1);
    expect(vehicle.rollCoefficient).toBeLessThanOrEqual(0.4);
    expect(vehicle.rollFrequencyHz).toBeGreaterThanOrEqual(0.5);
    expect(vehicle.rollFrequencyHz).toBeLessThanOrEqual(2);
    expect(vehicle.dampingRatio).toBeGreaterThanOrEqual(0.1);
    expect(vehicle.dampingRatio).toBeLessThanOrEqual(0.4);
  });

  it('are at least a coach, a multiple unit, a tram, a metro, a bus, a coach on the road and a car', () => {
    for (const id of ['coach-conventional', 'multiple-unit', 'tram', 'metro', 'bus-city', 'coach-road', 'car']) {
      expect(names).toContain(`${id}.json`);
    }
  });
});
