import { expect, it } from 'vitest';

/** One value from outside the project: what we compute, what is printed or worked there, and how sure the source is. */
export interface PublishedRow {
  readonly name: string;
  readonly ours: number;
  readonly theirs: number;
  /** Half the last digit printed, or the exactness of the worked value. */
  readonly within: number;
  readonly source: string;
  readonly status:
    | 'read'
    | 'from memory'
    | 'worked from a read formula'
    | 'worked from a recalled formula'
    | 'mathematics';
}

/** A test for each row; its name carries source and status. */
export function testRows(rows: readonly PublishedRow[]): void {
  it.each(rows)('$name is $theirs ($source; $status)', ({ ours, theirs, within }) => {
    expect(Math.abs(ours - theirs)).toBeLessThanOrEqual(within);
  });
}
