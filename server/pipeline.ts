import type { Fault } from '../shared/model/fault.ts';
import type { Alignment } from '../shared/model/alignment.ts';
import type { Finding } from '../shared/model/finding.ts';
import type { LogQuality, Profile } from '../shared/model/motion.ts';
import type { RunPassages } from '../shared/model/passage.ts';
import type { Recording } from '../shared/model/recording.ts';
import type { Run } from '../shared/model/run.ts';
import type { ColumnNames } from '../shared/schema/api.ts';
import { buildPassages, buildProfile, fitAlignment } from './alignment/index.ts';
import { cleanRecording } from './clean/index.ts';
import { estimateMotion } from './estimate/index.ts';
import { ingestFile } from './ingest/index.ts';

/** Where an analysis stands; `share` is of the whole, 0..1. */
export interface Progress {
  readonly stage: 'ingest' | 'clean' | 'estimate' | 'alignment';
  readonly share: number;
  readonly bytesRead: number;
  readonly curvesFound: number;
}

export interface AnalyseOptions {
  /** File name shown to the user. */
  readonly name: string;
  readonly columns?: ColumnNames;
  readonly spacingM?: number;
  readonly signal?: AbortSignal;
  onProgress?(progress: Progress): void;
}

/** One run with everything an assessment, a picture or an export needs of it. */
export interface AnalysedRun {
  readonly number: number;
  readonly startUtcS: number;
  readonly durationS: number;
  readonly fixCount: number;
  readonly topSpeedMps: number;
  readonly quality: LogQuality;
  readonly alignment: Alignment;
  readonly passages: RunPassages;
  readonly profile: Profile;
  readonly findings: readonly Finding[];
}

export interface AnalysedRecording {
  readonly recording: Omit<Recording, 'fixes' | 'sensors' | 'findings'> & { readonly fixCount: number };
  readonly runs: readonly AnalysedRun[];
  readonly findings: readonly Finding[];
}

export interface Analysis {
  readonly recordings: readonly AnalysedRecording[];
  readonly refused: readonly { readonly name: string; readonly fault: Fault }[];
}

/** Shares of the whole work at which the stages end, from measured times of a long log. */
const ENDS = { ingest: 0.3, clean: 0.35, estimate: 0.75, alignment: 1 } as const;
const DEFAULT_SPACING_M = 5;

/**
 * From the bytes of a file to runs with alignment, passages and profile: the one place where the
 * stages are strung together, for server and command line alike.
 *
 * @throws BendbookError when the file as a whole cannot be read; members of an archive that cannot
 * are listed in `refused`.
 */
export async function analyseFile(path: string, options: AnalyseOptions): Promise<Analysis> {
  const { name, columns, signal } = options;
  let bytesRead = 0;
  const ingested = await ingestFile(path, {
    name,
    ...(columns === undefined ? {} : { columns }),
    ...(signal === undefined ? {} : { signal }),
    onProgress(read, total) {
      bytesRead = read;
      options.onProgress?.({
        stage: 'ingest',
        share: ENDS.ingest * (total > 0 ? read / total : 0),
        bytesRead: read,
        curvesFound: 0,
      });
    },
  });
  const recordings: AnalysedRecording[] = [];
  let curvesFound = 0;
  for (const [k, recording] of ingested.recordings.entries()) {
    const report = (stage: Progress['stage'], within: number) => {
      const share = ENDS.ingest + ((k + within) / ingested.recordings.length) * (1 - ENDS.ingest);
      options.onProgress?.({ stage, share, bytesRead, curvesFound });
    };
    report('clean', 0);
    const cleaned = cleanRecording(recording);
    const runs: AnalysedRun[] = [];
    for (const [r, run] of cleaned.runs.entries()) {
      signal?.throwIfAborted();
      const part = (within: number) => (r + within) / cleaned.runs.length;
      report('estimate', part(0));
      const analysed = analyseRun(run, r + 1, {
        spacingM: options.spacingM ?? DEFAULT_SPACING_M,
        ...(signal === undefined ? {} : { signal }),
        report(stage, within) {
          report(stage, part(within));
        },
      });
      curvesFound += analysed.alignment.curves.length;
      runs.push(analysed);
    }
    const { name: member, format, bytes, encoding, title, waypoints, columns: uses } = recording;
    recordings.push({
      recording: {
        name: member,
        format,
        bytes,
        encoding,
        title,
        waypoints,
        columns: uses,
        fixCount: recording.fixes.count,
      },
      runs,
      findings: [...recording.findings, ...cleaned.findings],
    });
  }
  options.onProgress?.({ stage: 'alignment', share: 1, bytesRead, curvesFound });
  return { recordings, refused: ingested.refused };
}

interface RunOptions {
  readonly spacingM: number;
  readonly signal?: AbortSignal;
  /** `within`: share of this run's own work, 0..1. */
  report(stage: Progress['stage'], within: number): void;
}

/** Run -> motion -> alignment -> passages and profile. */
function analyseRun(run: Run, number: number, options: RunOptions): AnalysedRun {
  const { spacingM, signal } = options;
  const estimateShare = (ENDS.estimate - ENDS.clean) / (ENDS.alignment - ENDS.clean);
  const estimated = estimateMotion(run, {
    ...(signal === undefined ? {} : { signal }),
    onProgress(share) {
      options.report('estimate', share * estimateShare);
    },
  });
  options.report('alignment', estimateShare);
  const fitted = fitAlignment(run, estimated.motion);
  const { motion, alignment } = fitted;
  let topSpeedMps = 0;
  for (const v of motion.speedMps) if (v > topSpeedMps) topSpeedMps = v;
  return {
    number,
    startUtcS: run.startUtcS,
    durationS: run.fixes.timeS[run.fixes.count - 1]! - run.fixes.timeS[0]!,
    fixCount: run.fixes.count,
    topSpeedMps,
    quality: motion.quality,
    alignment,
    passages: buildPassages(run, motion, alignment),
    profile: buildProfile(run, motion, alignment, spacingM),
    findings: [...run.findings, ...estimated.findings, ...fitted.findings],
  };
}
