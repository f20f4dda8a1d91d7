import { readFile } from 'node:fs/promises';
import type { Alignment } from '../../shared/model/alignment.ts';
import type { Line } from '../../shared/model/line.ts';
import { fuseRuns, type RunTrace } from '../fuse/index.ts';
import { decodeProfile } from '../store/profile-files.ts';

/** A run to be laid beside others: where its profile lies and what was fitted. */
export interface LineOrder {
  readonly runId: string;
  readonly profilePath: string;
  readonly alignment: Alignment;
}

/** Groups runs into lines in a thread of the pool: it reads every profile, and that may take a while. */
export default async function group(orders: readonly LineOrder[]): Promise<Line[]> {
  const traces: RunTrace[] = [];
  for (const { runId, profilePath, alignment } of orders) {
    const { chainageM, latDeg, lonDeg, courseRad } = decodeProfile(await readFile(profilePath));
    traces.push({ runId, chainageM, latDeg, lonDeg, courseRad, alignment });
  }
  return fuseRuns(traces);
}
