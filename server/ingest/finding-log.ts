import type { Place } from '../../shared/model/fault.ts';
import type { Finding, Severity, Stage } from '../../shared/model/finding.ts';

const MAX_PLACES = 20;

interface Entry {
  readonly code: string;
  readonly severity: Severity;
  readonly describe: (count: number) => string;
  count: number;
  dropped: number;
  readonly places: Place[];
}

/** Gathers what was noticed: one finding for each code, with its count and first places. */
export class FindingLog {
  readonly #stage: Stage;
  readonly #entries = new Map<string, Entry>();

  constructor(stage: Stage) {
    this.#stage = stage;
  }

  /**
   * Notes one occurrence of `code`.
   * @param dropped Number of fixes lost by it.
   * @param count Number of rows it concerns.
   */
  note(
    code: string,
    severity: Severity,
    describe: (count: number) => string,
    place: Place | null = null,
    dropped = 0,
    count = 1,
  ): void {
    let entry = this.#entries.get(code);
    if (entry === undefined) {
      entry = { code, severity, describe, count: 0, dropped: 0, places: [] };
      this.#entries.set(code, entry);
    }
    entry.count += count;
    entry.dropped += dropped;
    if (place !== null && entry.places.length < MAX_PLACES) entry.places.push(place);
  }

  /** Number of fixes dropped so far under all codes. */
  get dropped(): number {
    let total = 0;
    for (const entry of this.#entries.values()) total += entry.dropped;
    return total;
  }

  findings(): Finding[] {
    return [...this.#entries.values()].map(({ code, severity, describe, count, dropped, places }) => ({
      code: `${this.#stage}/${code}`,
      stage: this.#stage,
      severity,
      message: describe(count),
      count,
      dropped,
      places,
    }));
  }
}

/** `1 point`, `2 points`. */
export function counted(count: number, singular: string, plural = `${singular}s`): string {
  return `${count.toLocaleString('en-GB')} ${count === 1 ? singular : plural}`;
}
