import { describe, expect, it } from 'vitest';
import { neighbourhoods } from '../../../server/lines.ts';

const run = (id: string, ...bounds: [number, number, number, number]) => ({ id, bounds });

describe('neighbourhoods', () => {
  it('join runs whose boxes touch, over a third one too', () => {
    const runs = [
      run('a', 0, 0, 1, 1),
      run('b', 2, 2, 3, 3),
      run('far', 50, 50, 51, 51),
      run('bridge', 0.5, 0.5, 2.5, 2.5),
    ];
    expect(neighbourhoods(runs).map((group) => group.map(({ id }) => id).sort())).toEqual([
      ['far'],
      ['a', 'b', 'bridge'],
    ]);
  });

  it('of no runs are none', () => {
    expect(neighbourhoods([])).toEqual([]);
  });
});
