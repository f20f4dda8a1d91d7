import { describe, expect, it } from 'vitest';
import { LineWalk } from '../../../server/alignment/line-walk.ts';
import { copyStretch, layoutOf, POSE, type Stretch } from '../../../server/alignment/stretch-model.ts';

/** A simple curve entered by a clothoid of length L and, far beyond, left abruptly. */
function spiral(length: number, radius: number): Stretch {
  return {
    levels: [1 / radius],
    straight: [false],
    middles: [length / 2, 10_000],
    squares: [length ** 2, 1],
    fromM: 0,
    toM: 20_000,
  };
}

function walkTo(stretch: Stretch, pose: readonly [number, number, number], stops: readonly number[]): LineWalk {
  const walk = new LineWalk();
  walk.begin(stretch, layoutOf(stretch), ...pose);
  for (const stop of stops) walk.advance(stop);
  return walk;
}

describe('walk along a line', () => {
  // Clothoid coordinates by the Fresnel series: common handbook cases, computed to 1e-6 m; the case 64/100 is printed in a total
  // station's manual (STS-750, page 210) as 63.348, 6.777.
  const HANDBOOK = [
    [100, 300, 99.722579, 5.544542],
    [50, 200, 49.921931, 2.081009],
    [80, 500, 79.948815, 2.132358],
    [120, 1000, 119.956807, 2.399383],
    [62.5, 250, 62.402414, 2.601262],
    [60, 150, 59.760444, 3.988586],
    [64, 100, 63.34774, 6.776897],
  ] as const;

  it.each(HANDBOOK)('ends a clothoid of %d m to radius %d m at its handbook coordinates', (length, radius, x, y) => {
    const stops = Array.from({ length: Math.ceil(length / 10) }, (_, i) => Math.min(length, (i + 1) * 10));
    const walk = walkTo(spiral(length, radius), [0, 0, 0], stops);
    expect(walk.x).toBeCloseTo(x, 4);
    expect(walk.y).toBeCloseTo(y, 4);
    expect(walk.theta).toBeCloseTo(length / (2 * radius), 12);
  });

  it('stays within a millimetre where fixes are far apart', () => {
    const [, , x, y] = HANDBOOK[6];
    const walk = walkTo(spiral(64, 100), [0, 0, 0], [64]);
    expect(Math.hypot(walk.x - x, walk.y - y)).toBeLessThan(1e-3);
  });

  it('closes an abrupt full circle of 25 m radius', () => {
    const radius = 25;
    const stretch: Stretch = {
      levels: [1 / radius],
      straight: [false],
      middles: [30, 30 + 2 * Math.PI * radius],
      squares: [0.25, 0.25],
      fromM: 0,
      toM: 400,
    };
    const walk = walkTo(stretch, [0, 0, 0.3], [30 + 2 * Math.PI * radius + 30]);
    expect(walk.theta - 0.3).toBeCloseTo(2 * Math.PI, 10);
    expect(walk.x).toBeCloseTo(60 * Math.cos(0.3), 1);
    expect(walk.y).toBeCloseTo(60 * Math.sin(0.3), 1);
  });

  it('does not depend on where the fixes lie', () => {
    const stretch = reverseWithStraight();
    const coarse = walkTo(stretch, [1, 2, 0.5], [260, 520]);
    const fine = walkTo(
      stretch,
      [1, 2, 0.5],
      Array.from({ length: 520 }, (_, i) => i + 1),
    );
    expect(Math.hypot(coarse.x - fine.x, coarse.y - fine.y)).toBeLessThan(5e-3);
    expect(coarse.theta).toBeCloseTo(fine.theta, 12);
  });

  it('has the derivatives of differences by every parameter', () => {
    const stretch = reverseWithStraight();
    const layout = layoutOf(stretch);
    const pose = [3, -4, 0.7] as const;
    // Inside the first change, on each level, inside a middle change and beyond the last.
    for (const at of [95, 140, 215, 260, 330, 470, 515]) {
      const stops = Array.from({ length: Math.ceil(at / 7) }, (_, i) => Math.min(at, 7 * (i + 1)));
      const walk = walkTo(stretch, pose, stops);
      for (let p = 2; p < layout.size; p++) {
        const h = p === 2 ? 1e-5 : layout.level.includes(p) ? 1e-7 : isMiddle(layout.middle, p) ? 1e-3 : 1e-1;
        const [plus, minus] = [1, -1].map((sign) => {
          const turned = [pose[0], pose[1], pose[2] + (p === 2 ? sign * h : 0)] as const;
          return walkTo(shifted(stretch, p, sign * h), turned, stops);
        }) as [LineWalk, LineWalk];
        const numeric = [
          (plus.x - minus.x) / (2 * h),
          (plus.y - minus.y) / (2 * h),
          (plus.theta - minus.theta) / (2 * h),
        ];
        const analytic = [walk.dx[p]!, walk.dy[p]!, p === 2 ? 1 : walk.gradient[p]!];
        const size = Math.max(1e-6, ...numeric.map(Math.abs));
        for (let k = 0; k < 3; k++) expect(Math.abs(analytic[k]! - numeric[k]!)).toBeLessThan(2e-3 * size);
      }
    }
  });
});

/** Left, straight, right, sharper right: every kind of change. */
function reverseWithStraight(): Stretch {
  return {
    levels: [1 / 200, 0, -1 / 300, -1 / 150],
    straight: [false, true, false, false],
    middles: [100, 180, 250, 360, 490],
    squares: [40 ** 2, 30 ** 2, 50 ** 2, 20 ** 2, 36 ** 2],
    fromM: 0,
    toM: 520,
  };
}

const isMiddle = (middle: Int32Array, p: number) => middle.includes(p);

/** The stretch with parameter p moved by h. */
function shifted(stretch: Stretch, p: number, h: number): Stretch {
  const layout = layoutOf(stretch);
  const moved = copyStretch(stretch);
  if (p < POSE) return moved;
  layout.level.forEach((at, k) => {
    if (at === p) moved.levels[k]! += h;
  });
  layout.middle.forEach((at, j) => {
    if (at === p) moved.middles[j]! += h;
    if (at + 1 === p) moved.squares[j]! += h;
  });
  return moved;
}
