import type { Line } from '../shared/model/line.ts';
import type { RunSummary } from '../shared/schema/api.ts';
import type { JobQueue } from './jobs/queue.ts';
import type { Store } from './store/store.ts';

/** Runs whose boxes come this near to each other may share a line, degrees (some 100 m). */
const MARGIN_DEG = 1e-3;

/** Which runs share a line, and the line's curves as all of them see it; made when asked for, kept until runs come or go. */
export class Lines {
  readonly #store: Store;
  readonly #queue: JobQueue;
  #current: Promise<Line[]> | null = null;

  constructor(store: Store, queue: JobQueue) {
    this.#store = store;
    this.#queue = queue;
    const forget = () => {
      this.#current = null;
    };
    queue.on('recording', forget);
    queue.on('removed', forget);
  }

  /** All lines; a run that shares its way with no other is a line of its own. */
  async all(): Promise<Line[]> {
    const current = (this.#current ??= this.#make());
    try {
      return await current;
    } catch (error) {
      if (this.#current === current) this.#current = null;
      throw error;
    }
  }

  async #make(): Promise<Line[]> {
    const lines: Line[] = [];
    for (const runs of neighbourhoods(await this.#store.runs())) {
      lines.push(...(await this.#queue.fuse(runs.map(({ id }) => id))));
    }
    for (const { id, members } of lines) {
      for (const { runId } of members) await this.#store.setLine(runId, members.length > 1 ? id : null);
    }
    return lines;
  }
}

/** Groups of runs whose boxes touch, directly or over others: only within one can runs share a line. */
export function neighbourhoods<R extends Pick<RunSummary, 'bounds'>>(runs: readonly R[]): R[][] {
  const groups: R[][] = [];
  for (const run of runs) {
    const touched = groups.filter((group) => group.some((other) => touch(run.bounds, other.bounds)));
    for (const group of touched) groups.splice(groups.indexOf(group), 1);
    groups.push([...touched.flat(), run]);
  }
  return groups;
}

function touch(a: RunSummary['bounds'], b: RunSummary['bounds']): boolean {
  const apart = (lowA: number, highA: number, lowB: number, highB: number) =>
    lowA > highB + MARGIN_DEG || lowB > highA + MARGIN_DEG;
  return !apart(a[0], a[2], b[0], b[2]) && !apart(a[1], a[3], b[1], b[3]);
}
