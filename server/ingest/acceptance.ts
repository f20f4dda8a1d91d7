import { BendbookError } from '../../shared/model/fault.ts';
import type { Recording } from '../../shared/model/recording.ts';

/**
 * Refuses a recording from which nothing can come: no points, no times, one point.
 * Throws `ingest/no-points`, `ingest/no-times` or `ingest/single-point`.
 */
export function requireUsable(recording: Recording): Recording {
  const { fixes, name, findings } = recording;
  const lost = findings.filter(({ dropped }) => dropped > 0);
  const because = lost.length === 0 ? '' : ` (${lost.map(({ message }) => message).join('; ')})`;
  if (fixes.count === 0) {
    throw new BendbookError('ingest/no-points', {
      cause: `The file holds no usable track point${because}`,
      place: { file: name, ...lost[0]?.places[0] },
      remedy: 'Check that it is the recording of a journey and not only a list of places or a planned route',
    });
  }
  let timed = 0;
  for (let i = 0; i < fixes.count; i++) if (Number.isFinite(fixes.utcS[i]!)) timed++;
  if (timed === 0) {
    throw new BendbookError('ingest/no-times', {
      cause: `None of the ${fixes.count.toLocaleString('en-GB')} points has a time, so no speed can be known${because}`,
      place: { file: name, line: fixes.row[0]! },
      remedy: 'Export the log again with the time of each point; a drawn or planned line cannot be assessed',
    });
  }
  if (timed === 1) {
    throw new BendbookError('ingest/single-point', {
      cause: `The file holds a single point with a time${because}`,
      place: { file: name, line: fixes.row[0]! },
      remedy: 'A journey needs many points: check that the whole log was exported',
    });
  }
  return recording;
}
