import { assessProfile, assessRun } from '../shared/assess/index.ts';
import type { Alignment } from '../shared/model/alignment.ts';
import type { Finding } from '../shared/model/finding.ts';
import type { Profile } from '../shared/model/motion.ts';
import type { RunPassages } from '../shared/model/passage.ts';
import type { Setup } from '../shared/schema/setup.ts';
import type { ProfileTable, ReportContext, ReportedRun } from './report/index.ts';
import { SOFTWARE } from './package-root.ts';

/** A run with what an assessment and an export need of it, from the store or straight from the pipeline. */
export interface AssessableRun {
  readonly id: string;
  readonly name: string;
  readonly startUtcS: number;
  readonly durationS: number;
  readonly fixCount: number;
  readonly topSpeedKmh: number;
  readonly recording: ReportedRun['recording'];
  readonly alignment: Alignment;
  readonly passages: RunPassages;
  readonly profile: Profile;
  readonly findings: readonly Finding[];
}

/** Everything that the exports of some runs need, under one setup. */
export function reportContext(title: string, runs: readonly AssessableRun[], setup: Setup): ReportContext {
  const cautions = new Set<string>();
  const reported = runs.map((run) => {
    const assessment = assessRun(run.passages, setup);
    for (const caution of assessment.cautions) cautions.add(caution);
    return reportedRun(run, assessment);
  });
  return { title, software: SOFTWARE, setup, cautions: [...cautions], runs: reported };
}

function reportedRun(run: AssessableRun, assessment: ReturnType<typeof assessRun>): ReportedRun {
  return {
    id: run.id,
    name: run.name,
    startUtcS: run.startUtcS,
    durationS: run.durationS,
    lengthM: run.alignment.lengthM,
    fixCount: run.fixCount,
    topSpeedKmh: run.topSpeedKmh,
    recording: run.recording,
    curves: assessment.curves,
    findings: [...run.findings, ...assessment.findings],
    path: (number) => curvePath(run, number),
  };
}

/** Places of the profile along one curve, with its two ends, as [longitude, latitude]. */
function curvePath({ alignment, passages, profile }: AssessableRun, number: number): [number, number][] {
  const curve = alignment.curves.find((candidate) => candidate.number === number);
  const passage = passages.passages.find((candidate) => candidate.curve.number === number);
  if (curve === undefined || passage === undefined) return [];
  const path: [number, number][] = [[passage.start[1], passage.start[0]]];
  for (let i = 0; i < profile.count; i++) {
    const s = profile.chainageM[i]!;
    if (s <= curve.startM || s >= curve.endM) continue;
    if (Number.isFinite(profile.latDeg[i]!)) path.push([profile.lonDeg[i]!, profile.latDeg[i]!]);
  }
  path.push([passage.end[1], passage.end[0]]);
  return path;
}

/** The profile of a run with its assessment, under the names of the exports. Degrees and metres per second as the names say. */
export function profileTable(run: Pick<AssessableRun, 'profile' | 'passages'>, setup: Setup): ProfileTable {
  const { profile, passages } = run;
  const assessed = assessProfile(profile, passages, setup);
  return {
    s_m: profile.chainageM,
    t_s: profile.timeS,
    lat: profile.latDeg,
    lon: profile.lonDeg,
    ele_m: profile.elevationM,
    speed_ms: profile.speedMps,
    speed_sd_ms: profile.speedSdMps,
    course_deg: profile.courseRad.map((rad) => (rad * 180) / Math.PI),
    curvature_1_m: profile.curvaturePerM,
    curvature_sd_1_m: profile.curvatureSdPerM,
    curvature_fit_1_m: profile.fittedCurvaturePerM,
    observed: profile.observed,
    cant_mm: assessed.cantMm,
    cant_deficiency_mm: assessed.cantDeficiencyMm,
    equilibrium_cant_mm: assessed.equilibriumCantMm,
    lateral_track_ms2: assessed.lateralTrackMps2,
    lateral_track_sd_ms2: assessed.lateralTrackSdMps2,
    lateral_body_ms2: assessed.lateralBodyMps2,
    jerk_ms3: assessed.jerkMps3,
    utilisation: assessed.utilisation,
    limit_speed_kmh: assessed.limitSpeedKmh,
  };
}
