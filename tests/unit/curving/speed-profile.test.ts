import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { drivableSpeedMps, speedChangeCostS, timeLostS } from '../../../shared/curving/speed-profile.ts';

/**
 * Brute force: speeds on a fine ladder; a station keeps a speed only if it is permitted and some kept speed of each
 * neighbour is reachable;
 * the answer is the highest speed kept once nothing more falls away.
 */
function bruteForce(chainage: number[], permitted: number[], a: number, b: number, ladder: number[]): number[] {
  const kept = permitted.map((p) => ladder.filter((v) => v <= p + 1e-9));
  let changed = true;
  while (changed) {
    changed = false;
    for (let i = 0; i < kept.length; i++) {
      const still = kept[i]!.filter((v) => {
        const before = i === 0 || kept[i - 1]!.some((u) => reachable(u, v, chainage[i]! - chainage[i - 1]!, a, b));
        const after =
          i === kept.length - 1 || kept[i + 1]!.some((u) => reachable(v, u, chainage[i + 1]! - chainage[i]!, a, b));
        return before && after;
      });
      if (still.length < kept[i]!.length) changed = true;
      kept[i] = still;
    }
  }
  return kept.map((speeds) => Math.max(...speeds));
}

function reachable(from: number, to: number, ds: number, a: number, b: number): boolean {
  return to * to <= from * from + 2 * a * ds + 1e-9 && to * to >= from * from - 2 * b * ds - 1e-9;
}

describe('drivable speed profile', () => {
  it('agrees with brute force on small lines', () => {
    // Squares of the ladder are whole numbers and so is 2 a ds: the ladder holds every speed that the passes can give.
    const ladder = Array.from({ length: 401 }, (_, i) => Math.sqrt(i));
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.integer({ min: 1, max: 400 }), fc.integer({ min: 1, max: 40 })), {
          minLength: 2,
          maxLength: 8,
        }),
        fc.constantFrom(0.5, 1, 1.5),
        fc.constantFrom(0.5, 1),
        (stations, a, b) => {
          let s = 0;
          const chainage = stations.map(([, step]) => (s += step));
          const permitted = stations.map(([square]) => Math.sqrt(square));
          const ours = drivableSpeedMps(chainage, permitted, a, b);
          const theirs = bruteForce(chainage, permitted, a, b, ladder);
          theirs.forEach((v, i) => expect(ours[i]).toBeCloseTo(v, 6));
        },
      ),
      { numRuns: 60 },
    );
  });

  it('reversed in direction with braking and acceleration exchanged it is the mirror image', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 1, max: 40, noNaN: true }), { minLength: 2, maxLength: 30 }),
        (permitted) => {
          const chainage = permitted.map((_, i) => i * 25);
          const there = [...drivableSpeedMps(chainage, permitted, 0.4, 0.9)];
          const back = [...drivableSpeedMps(chainage, permitted.toReversed(), 0.9, 0.4)].toReversed();
          there.forEach((v, i) => expect(v).toBeCloseTo(back[i]!, 9));
        },
      ),
    );
  });

  it('never exceeds what is permitted and never falls when more is permitted', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: 0.5, max: 40, noNaN: true }), { minLength: 2, maxLength: 30 }),
        fc.nat(29),
        (permitted, at) => {
          const chainage = permitted.map((_, i) => i * 10);
          const before = drivableSpeedMps(chainage, permitted, 0.5, 0.7);
          const more = permitted.map((v, i) => (i === at % permitted.length ? v + 5 : v));
          const after = drivableSpeedMps(chainage, more, 0.5, 0.7);
          permitted.forEach((v, i) => {
            expect(before[i]!).toBeLessThanOrEqual(v);
            expect(after[i]!).toBeGreaterThanOrEqual(before[i]! - 1e-12);
          });
        },
      ),
    );
  });

  it('braking from 40 to 20 m/s at 0.5 m/s² takes 1200 m, and the time lost is the closed form', () => {
    const chainage = Array.from({ length: 4001 }, (_, i) => i);
    const permitted = chainage.map((s) => (s >= 2000 && s <= 2500 ? 20 : Infinity));
    const driven = drivableSpeedMps(chainage, permitted, 0.5, 0.5).map((v) => Math.min(v, 40));
    expect(driven[800]).toBeCloseTo(40, 9);
    expect(driven[1400]).toBeCloseTo(Math.sqrt(400 + 600), 9);
    expect(driven[2500 + 1200]).toBeCloseTo(40, 9);
    const lost = timeLostS(
      chainage,
      chainage.map(() => 40),
      driven,
    );
    // 500 m at 20 instead of 40 m/s and two changes of (40 - 20)²/(2 · 0.5 · 40) s.
    expect(lost).toBeCloseTo(12.5 + 2 * speedChangeCostS(40, 20, 0.5), 6);
    expect(speedChangeCostS(40, 20, 0.5)).toBe(10);
    expect(speedChangeCostS(20, 40, 0.5)).toBe(0);
  });

  it('refuses a vehicle without braking and columns of different lengths', () => {
    expect(() => drivableSpeedMps([0, 1], [1, 1], 1, 0)).toThrow(RangeError);
    expect(() => drivableSpeedMps([0, 1], [1], 1, 1)).toThrow(RangeError);
  });
});
