import type { Finding } from '../../shared/model/finding.ts';
import type { Recording } from '../../shared/model/recording.ts';
import type { Run } from '../../shared/model/run.ts';
import { counted, FindingLog } from '../ingest/finding-log.ts';
import { buildRun } from './build-run.ts';
import { orderInTime } from './clock.ts';
import { distanceM } from './distance.ts';
import { placeOf, type Track } from './track.ts';
import { separateVehicles, splitTrips } from './trips.ts';
import { usableFixes } from './usable.ts';

export { layOut, planeToGeodetic } from './rolling-plane.ts';

export interface CleanOptions {
  /** Fewer fixes than this make no run. */
  readonly leastFixes?: number;
  /** A shorter way than this makes no run, m. */
  readonly leastWayM?: number;
}

/** Way of a trip in steps of at least 10 m, so that a standing receiver's wandering does not add up. */
function wayM(track: Track, { fixes }: Recording): number {
  let way = 0;
  let anchor = track.rows[0]!;
  for (const row of track.rows) {
    const step = distanceM(fixes.latDeg[anchor]!, fixes.lonDeg[anchor]!, fixes.latDeg[row]!, fixes.lonDeg[row]!);
    if (step < 10) continue;
    way += step;
    anchor = row;
  }
  return way;
}

/**
 * From a recording to its runs: one for each continuous trip of each vehicle, in time order, cleaned and laid into
 * their planes. A stop, a tunnel or a short gap does not end a run; a gap of more than 20 minutes does, and a leap of
 * position that no motion explains.
 *
 * Every fix of the recording is in exactly one run or counted as dropped in exactly one of `findings`; findings that
 * concern one run stand with it.
 */
export function cleanRecording(recording: Recording, options: CleanOptions = {}): { runs: Run[]; findings: Finding[] } {
  const { leastFixes = 8, leastWayM = 100 } = options;
  const { fixes, name } = recording;
  const log = new FindingLog('clean');
  const trips: Track[] = [];
  for (const vehicle of separateVehicles(usableFixes(fixes, name, log), fixes, name, log)) {
    trips.push(...splitTrips(orderInTime(vehicle, fixes, name, log), fixes, name, log));
  }
  const runs: Run[] = [];
  for (const trip of trips) {
    const count = trip.rows.length;
    const way = count >= leastFixes ? wayM(trip, recording) : 0;
    if (count >= leastFixes && way >= leastWayM) {
      runs.push(buildRun(recording, trip, String(runs.length + 1)));
      continue;
    }
    log.note(
      'too-short',
      'warning',
      (many) =>
        `${counted(many, 'stretch', 'stretches')} with fewer than ${leastFixes} fixes or less than ${leastWayM} m of way make no run`,
      placeOf(fixes, name, trip.rows[0]!, trip.utcS[0]!),
      count,
    );
  }
  return { runs, findings: log.findings() };
}
