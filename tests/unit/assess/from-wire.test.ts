import { describe, expect, it } from 'vitest';
import { assessRun, passagesFromWire } from '../../../shared/assess/index.ts';
import { RunPassagesWire } from '../../../shared/schema/api.ts';
import { passage, run, setup } from './example.ts';

describe('passages from JSON', () => {
  const end = { kind: 'undetermined' as const, lengthM: { value: 20, sd: 15, low: 0, high: Infinity } };
  const line = run([
    passage({ relativeSd: 0.02 }),
    passage({ number: 2, startM: 4000, entry: end, exit: end, entryM: 20, exitM: 20 }),
  ]);
  const back = passagesFromWire(RunPassagesWire.parse(JSON.parse(JSON.stringify(line))));

  it('are those that were sent, unbounded ends included', () => {
    expect(back).toEqual(line);
  });

  it('give the very same assessment', () => {
    expect(assessRun(back, setup())).toEqual(assessRun(line, setup()));
  });
});
