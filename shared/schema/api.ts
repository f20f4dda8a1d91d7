import { z } from 'zod';
import { CantRegister } from './cant-register.ts';
import { Fault, Finding } from './common.ts';
import { AssessedCurve } from './curve-row.ts';
import { LimitSet } from './limit-set.ts';
import { SetupRef } from './setup.ts';
import { Vehicle } from './vehicle.ts';

/** What a JSON body under /api carries, request and response, once for server and page. */

export const ErrorBody = z.object({ fault: Fault });

const JobState = z.enum(['queued', 'running', 'done', 'failed', 'cancelled']);

export const Job = z.object({
  id: z.string(),
  recordingId: z.string(),
  state: JobState,
  /** ingest, clean, estimate, alignment, store */
  stage: z.string(),
  /** 0..1 */
  progress: z.number(),
  bytesRead: z.number(),
  curvesFound: z.number(),
  /** Estimated seconds left, null while unknown. */
  secondsLeft: z.number().nullable(),
  fault: Fault.nullable(),
  createdUtcS: z.number(),
});
export type Job = z.infer<typeof Job>;

const ColumnUse = z.object({ header: z.string(), field: z.string(), unit: z.string(), guessed: z.boolean() });

/** First rows of a delimited file and what its columns were taken for. */
export const ColumnPreview = z.object({
  columns: z.array(ColumnUse),
  headers: z.array(z.string()),
  rows: z.array(z.array(z.string())),
  /** Why the columns cannot be told, or null when they can. */
  fault: Fault.nullable(),
});
export type ColumnPreview = z.infer<typeof ColumnPreview>;

export const RunSummary = z.object({
  id: z.string(),
  recordingId: z.string(),
  /** Name shown: recording title or file name, plus run number when there are several. */
  name: z.string(),
  startUtcS: z.number(),
  durationS: z.number(),
  lengthM: z.number(),
  fixCount: z.number(),
  curveCount: z.number(),
  topSpeedKmh: z.number(),
  lineId: z.string().nullable(),
  /** Bounding box: south, west, north, east. */
  bounds: z.tuple([z.number(), z.number(), z.number(), z.number()]),
});
export type RunSummary = z.infer<typeof RunSummary>;

export const RecordingSummary = z.object({
  id: z.string(),
  name: z.string(),
  title: z.string(),
  format: z.string(),
  encoding: z.string(),
  bytes: z.number(),
  sha256: z.string(),
  uploadedUtcS: z.number(),
  /** waiting, analysing, ready, refused */
  state: z.enum(['waiting', 'analysing', 'ready', 'refused']),
  fault: Fault.nullable(),
  demo: z.boolean(),
  fixCount: z.number(),
  columns: z.array(ColumnUse),
  findings: z.array(Finding),
  runs: z.array(RunSummary),
  jobId: z.string().nullable(),
});
export type RecordingSummary = z.infer<typeof RecordingSummary>;

export const UploadResult = z.object({
  recordings: z.array(RecordingSummary),
  refused: z.array(z.object({ name: z.string(), fault: Fault })),
});

/** Columns of a delimited file named by hand: field -> header, with an optional unit. */
export const ColumnNames = z.record(z.string(), z.object({ header: z.string(), unit: z.string().optional() }));
export type ColumnNames = z.infer<typeof ColumnNames>;

const Estimate = z.object({ value: z.number(), sd: z.number(), low: z.number(), high: z.number().nullable() });
const CurveEnd = z.object({
  kind: z.enum(['transition', 'abrupt', 'undetermined']),
  lengthM: Estimate,
  middleM: Estimate,
  fromCurvaturePerM: z.number(),
  joins: z.number().nullable(),
});

/** Shape of model/alignment.ts Curve; infinities travel as null. */
const CurveWire = z.object({
  number: z.number(),
  hand: z.enum(['left', 'right']),
  shape: z.enum(['simple', 'compound', 'reverse', 'abrupt']),
  startM: z.number(),
  endM: z.number(),
  arcStartM: z.number(),
  arcEndM: z.number(),
  entry: CurveEnd,
  exit: CurveEnd,
  curvaturePerM: Estimate,
  radiusM: Estimate,
  deflectionRad: Estimate,
  lateralRelativeSd: z.number(),
  speedMps: Estimate,
  observedShare: z.number(),
  chi2PerDof: z.number().nullable(),
  remarks: z.array(z.string()),
});

const PassageWire = z.object({
  curve: CurveWire,
  chainageM: z.array(z.number()),
  speedMps: z.array(z.number()),
  speedSdMps: z.array(z.number()),
  accelerationMps2: z.array(z.number()),
  elevationM: z.array(z.number().nullable()),
  start: z.tuple([z.number(), z.number()]),
  middle: z.tuple([z.number(), z.number()]),
  end: z.tuple([z.number(), z.number()]),
});

export const RunPassagesWire = z.object({
  run: z.string(),
  lengthM: z.number(),
  durationS: z.number(),
  intervalS: z.number(),
  hasCourse: z.boolean(),
  passages: z.array(PassageWire),
});

const Element = z.object({
  kind: z.enum(['straight', 'transition', 'arc']),
  startM: z.number(),
  endM: z.number(),
  startCurvaturePerM: z.number(),
  endCurvaturePerM: z.number(),
});

const LogQuality = z.object({
  noise: z.object({
    sigmaWhiteM: z.number(),
    sigmaWanderM: z.number(),
    wanderTimeS: z.number(),
    sigmaDopplerWhiteMps: z.number(),
    sigmaDopplerSlowMps: z.number(),
    dopplerTimeS: z.number(),
    sigmaSpeedMps: z.number(),
    lagS: z.number(),
    lagSdS: z.number(),
  }),
  fixCount: z.number(),
  rateHz: z.number(),
  effectiveFixes: z.number(),
  courseShare: z.number(),
  speedShare: z.number(),
  smallestCurvaturePerM: z.number(),
});

export const RunDetail = z.object({
  summary: RunSummary,
  quality: LogQuality,
  findings: z.array(Finding),
  elements: z.array(Element),
  passages: RunPassagesWire,
  waypoints: z.array(z.object({ name: z.string(), latDeg: z.number(), lonDeg: z.number() })),
  /** The setup in effect for this run. */
  setup: SetupRef,
});
export type RunDetail = z.infer<typeof RunDetail>;

/** Shape of model/line.ts Line: runs over one alignment, and its curves as all of them see it; infinities and NaN travel as null. */
export const LineWire = z.object({
  id: z.string(),
  referenceRunId: z.string(),
  members: z.array(
    z.object({
      runId: z.string(),
      direction: z.union([z.literal(1), z.literal(-1)]),
      overlap: z.number(),
      chainageM: z.array(z.number()),
      lineChainageM: z.array(z.number()),
    }),
  ),
  curves: z.array(
    z.object({
      number: z.number(),
      hand: z.enum(['left', 'right']),
      startM: z.number(),
      endM: z.number(),
      seen: z.array(z.object({ runId: z.string(), curve: z.number() })),
      curvaturePerM: Estimate,
      radiusM: Estimate,
      consistency: z.number().nullable(),
    }),
  ),
});
export type LineWire = z.infer<typeof LineWire>;

/** Columns of a window of the profile at a chosen resolution; NaN travels as null. Peaks of |utilisation| survive thinning. */
export const ProfileWindow = z.object({
  fromM: z.number(),
  toM: z.number(),
  /** Distance between the points sent; the stored spacing when nothing was thinned. */
  stepM: z.number(),
  columns: z.record(z.string(), z.array(z.number().nullable())),
});
export type ProfileWindow = z.infer<typeof ProfileWindow>;

/** The whole assessment of a run under a setup, computed by shared/assess. */
export const AssessmentBody = z.object({
  run: z.string(),
  setup: SetupRef,
  curves: z.array(AssessedCurve),
  findings: z.array(Finding),
  cautions: z.array(z.string()),
});
export type AssessmentBody = z.infer<typeof AssessmentBody>;

export const Health = z.object({ ok: z.boolean(), version: z.string() });

/** A cant register just read from a file, with what was noticed about its rows. */
export const RegisterUpload = CantRegister.extend({ findings: z.array(Finding) });
export type RegisterUpload = z.infer<typeof RegisterUpload>;

export const Catalogue = z.object({
  limitSets: z.array(LimitSet.extend({ builtIn: z.boolean() })),
  vehicles: z.array(Vehicle.extend({ builtIn: z.boolean() })),
  registers: z.array(CantRegister),
  setup: SetupRef,
});
export type Catalogue = z.infer<typeof Catalogue>;
