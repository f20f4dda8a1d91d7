import type { Profile } from '../../shared/model/motion.ts';
import type { RecordingSummary } from '../../shared/schema/api.ts';
import type { Analysis, AnalysedRecording, AnalysedRun } from '../pipeline.ts';
import type { NewRun, RecordingFacts } from '../store/store.ts';

/**
 * An analysis in the form that the store keeps. An archive gives several recordings under one upload:
 * their runs are numbered through, their findings and refusals listed together.
 */
export function resultsOf(
  upload: Pick<RecordingSummary, 'id' | 'name' | 'title'>,
  analysis: Analysis,
): { facts: RecordingFacts; runs: NewRun[] } {
  const { recordings, refused } = analysis;
  const first = recordings[0];
  const several = recordings.length > 1;
  // Titled otherwise than by its file name: by whoever brought it in, or by an earlier analysis of the same file.
  const given = upload.title !== upload.name ? upload.title : '';
  const runs: NewRun[] = [];
  for (const recording of recordings) {
    for (const run of recording.runs)
      runs.push(
        newRun(
          upload.id,
          runs.length + 1,
          runName(
            several ? recording.recording.name : given || recording.recording.title || upload.name,
            recording,
            run,
          ),
          run,
        ),
      );
  }
  const findings: RecordingSummary['findings'] = recordings.flatMap((r) =>
    r.findings.map((f) => wireFinding(several ? { ...f, message: `${r.recording.name}: ${f.message}` } : f)),
  );
  for (const { name: member, fault } of refused) {
    findings.push({
      code: fault.code,
      stage: 'ingest',
      severity: 'serious',
      message: `${member} could not be used: ${fault.cause}. ${fault.remedy}`,
      count: 1,
      dropped: 0,
      places: [{ ...fault.place }],
    });
  }
  return {
    facts: {
      title: several || first === undefined || first.recording.title === '' ? upload.name : first.recording.title,
      format: several ? 'archive' : (first?.recording.format ?? ''),
      encoding: first?.recording.encoding ?? '',
      fixCount: recordings.reduce((sum, r) => sum + r.recording.fixCount, 0),
      columns: first === undefined ? [] : first.recording.columns.map((column) => ({ ...column })),
      findings,
      waypoints: recordings.flatMap((r) => r.recording.waypoints),
    },
    runs,
  };
}

function newRun(recordingId: string, number: number, name: string, run: AnalysedRun): NewRun {
  const id = `${recordingId}.${String(number)}`;
  return {
    summary: {
      id,
      name,
      startUtcS: run.startUtcS,
      durationS: run.durationS,
      lengthM: run.alignment.lengthM,
      fixCount: run.fixCount,
      curveCount: run.alignment.curves.length,
      topSpeedKmh: run.topSpeedMps * 3.6,
      bounds: boundsOf(run.profile),
    },
    quality: run.quality,
    findings: [...run.findings],
    alignment: run.alignment,
    passages: { ...run.passages, run: name },
    profile: run.profile,
  };
}

function runName(base: string, recording: AnalysedRecording, run: AnalysedRun): string {
  return recording.runs.length > 1 ? `${base}, run ${String(run.number)}` : base;
}

/** South, west, north, east; east of the antimeridian is counted on beyond 180 so that the box stays small. */
export function boundsOf(profile: Pick<Profile, 'count' | 'latDeg' | 'lonDeg'>): [number, number, number, number] {
  let [south, north, west, east] = [Infinity, -Infinity, Infinity, -Infinity];
  let shift = 0;
  let last = NaN;
  for (let i = 0; i < profile.count; i++) {
    const lat = profile.latDeg[i]!;
    const lon = profile.lonDeg[i]!;
    if (!Number.isFinite(lat) || !Number.isFinite(lon)) continue;
    // NaN at the first place: neither comparison holds.
    if (lon - last < -180) shift += 360;
    else if (lon - last > 180) shift -= 360;
    last = lon;
    south = Math.min(south, lat);
    north = Math.max(north, lat);
    west = Math.min(west, lon + shift);
    east = Math.max(east, lon + shift);
  }
  return Number.isFinite(south) ? [south, west, north, east] : [0, 0, 0, 0];
}

function wireFinding(finding: AnalysedRun['findings'][number]): RecordingSummary['findings'][number] {
  return { ...finding, places: finding.places.map((place) => ({ ...place })) };
}
