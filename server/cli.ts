import { existsSync, readFileSync } from 'node:fs';
import { writeFile } from 'node:fs/promises';
import { basename, join, parse } from 'node:path';
import { Readable } from 'node:stream';
import { parseArgs } from 'node:util';
import { parseLimitSet, parseVehicle } from '../shared/limits/index.ts';
import { parseCantRegister } from '../shared/assess/index.ts';
import { BendbookError, describeFault, type Fault } from '../shared/model/fault.ts';
import type { ColumnNames } from '../shared/schema/api.ts';
import type { CantRegister } from '../shared/schema/cant-register.ts';
import type { Mode } from '../shared/schema/common.ts';
import type { CantRule, Setup } from '../shared/schema/setup.ts';
import { profileTable, reportContext, type AssessableRun } from './assessment.ts';
import { BUILT_IN, DEFAULT_SETUP } from './catalogue.ts';
import { readConfiguration, SERVE_USAGE, wrongArguments } from './configuration.ts';
import { noRunFault } from './no-run.ts';
import { analyseFile } from './pipeline.ts';
import {
  curveTableCsv,
  curveTableGeoJson,
  curveTableJson,
  curveTableXlsx,
  profileCsv,
  reportPdf,
  type ReportContext,
} from './report/index.ts';
import { serveUntilStopped } from './serve.ts';
import { fingerprint } from './store/raw-files.ts';

const USAGE = `bendbook assess RECORDING... [options]
bendbook serve [options]

  --mode rail|road       cant and cant deficiency, or superelevation and side friction (default rail)
  --limits NAME|FILE     limit set: ${BUILT_IN.limitSets.map(({ id }) => id).join(', ')}, or a file
  --vehicle NAME|FILE    vehicle: ${BUILT_IN.vehicles.map(({ id }) => id).join(', ')}, or a file
  --cant FILE            cant register (CSV); where it says nothing cant is unknown
  --assume-cant VALUE    cant in mm (road: superelevation in %) where the register gives none
  --tier normal|exceptional
  --format csv|json|geojson|xlsx|pdf   (default csv)
  --out FILE             where the table goes (default: standard output)
  --profile FILE         also write the resampled run as CSV; several runs: FILE with -1, -2, ... before its ending
  --spacing METRES       step of the profile (default 5)
  --column FIELD=HEADER[:UNIT]   name a column of a delimited file by hand; may be repeated

${SERVE_USAGE}

Exit status: 0 done; 1 some recording could not be used (the others are done); 2 wrong arguments.
Figures are derived from satellite positioning; the operator's and the regulator's own limits govern.`;

const FORMATS = ['csv', 'json', 'geojson', 'xlsx', 'pdf'] as const;
type Format = (typeof FORMATS)[number];

interface Arguments {
  readonly recordings: readonly string[];
  readonly setup: Setup;
  readonly format: Format;
  readonly out: string | null;
  readonly profile: string | null;
  readonly spacingM: number;
  readonly columns: ColumnNames;
}

/** Runs the command line; returns the exit status. */
export async function runCli(args: readonly string[]): Promise<number> {
  const [command, ...rest] = args;
  try {
    if (command === undefined || command === 'help' || args.includes('--help') || args.includes('-h')) {
      if (command === undefined) console.error(USAGE);
      else console.log(USAGE);
      return command === undefined ? 2 : 0;
    }
    if (command === 'serve') {
      await serveUntilStopped(readConfiguration(rest, process.env));
      return 0;
    }
    if (command === 'assess') return await assess(readArguments(rest));
    throw wrongArguments(`there is no command "${command}"`);
  } catch (error) {
    complain(error instanceof BendbookError ? error.fault : faultOf(error, null));
    // Sets and registers named in the arguments count as arguments: what is wrong in them is found before any work.
    return error instanceof BendbookError && !/^(output|serve|store)\//.test(error.fault.code) ? 2 : 1;
  }
}

async function assess(args: Arguments): Promise<number> {
  const runs: AssessableRun[] = [];
  let refused = 0;
  for (const path of args.recordings) {
    try {
      const found = await readRecording(path, args);
      refused += found.refused;
      runs.push(...found.runs);
    } catch (error) {
      complain(faultOf(error, path));
      refused++;
    }
  }
  if (runs.length === 0) return 1;
  const title = args.recordings.map((path) => basename(path)).join(', ');
  const context = reportContext(title, runs, args.setup);
  await output(args.out, await tableOf(context, args, runs));
  if (args.profile !== null) await writeProfiles(args.profile, runs, args.setup, context.cautions[0] ?? '');
  return refused > 0 ? 1 : 0;
}

async function readRecording(path: string, args: Arguments): Promise<{ runs: AssessableRun[]; refused: number }> {
  if (!existsSync(path)) {
    throw new BendbookError('ingest/no-file', {
      cause: 'there is no such file',
      place: { file: path },
      remedy: 'Check the path',
    });
  }
  // Files of one name from several folders are told apart by their folders.
  const alike = args.recordings.filter((other) => basename(other) === basename(path)).length > 1;
  const name = alike ? path : basename(path);
  const { bytes, sha256 } = await fingerprint(path);
  const analysis = await analyseFile(path, { name, columns: args.columns, spacingM: args.spacingM });
  const runs: AssessableRun[] = [];
  for (const { recording, runs: analysed, findings } of analysis.recordings) {
    if (analysed.length === 0) complain(noRunFault(recording.name, findings));
    for (const run of analysed) {
      const runName = analysed.length > 1 ? `${recording.name}, run ${String(run.number)}` : recording.name;
      runs.push({
        id: `${recording.name}#${String(run.number)}`,
        name: runName,
        startUtcS: run.startUtcS,
        durationS: run.durationS,
        fixCount: run.fixCount,
        topSpeedKmh: run.topSpeedMps * 3.6,
        recording: { name: recording.name, sha256, bytes },
        alignment: run.alignment,
        passages: { ...run.passages, run: runName },
        profile: run.profile,
        findings: [...findings, ...run.findings],
      });
    }
  }
  for (const { fault } of analysis.refused) complain(fault);
  const without = analysis.recordings.filter((recording) => recording.runs.length === 0).length;
  return { runs, refused: analysis.refused.length + without };
}

async function tableOf(
  context: ReportContext,
  { format, setup }: Arguments,
  runs: readonly AssessableRun[],
): Promise<string | Buffer> {
  switch (format) {
    case 'csv':
      return curveTableCsv(context);
    case 'json':
      return `${JSON.stringify(curveTableJson(context), null, 1)}\n`;
    case 'geojson':
      return `${JSON.stringify(curveTableGeoJson(context), null, 1)}\n`;
    case 'xlsx':
      return await curveTableXlsx(context);
    case 'pdf':
      return await reportPdf(context, (id) => profileTable(runs.find((run) => run.id === id)!, setup));
  }
}

/** One file for one run; several runs are numbered in the order of the table. */
async function writeProfiles(
  path: string,
  runs: readonly AssessableRun[],
  setup: Setup,
  caution: string,
): Promise<void> {
  const { dir, name, ext } = parse(path);
  for (const [i, run] of runs.entries()) {
    const target = runs.length === 1 ? path : join(dir, `${name}-${String(i + 1)}${ext}`);
    await write(target, Readable.from(profileCsv(profileTable(run, setup), caution)));
  }
}

async function output(path: string | null, content: string | Buffer): Promise<void> {
  if (path !== null) {
    await write(path, content);
    return;
  }
  await new Promise<void>((resolve, reject) => {
    // A reader that has seen enough (head) closes the pipe: not a failure of ours.
    process.stdout.on('error', (error: NodeJS.ErrnoException) => {
      if (error.code === 'EPIPE') resolve();
      else reject(error);
    });
    process.stdout.write(content, () => resolve());
  });
}

async function write(path: string, content: string | Buffer | Readable): Promise<void> {
  try {
    await writeFile(path, content);
  } catch (error) {
    throw new BendbookError(
      'output/not-written',
      {
        cause: `this file cannot be written: ${error instanceof Error ? error.message : String(error)}`,
        place: { file: path },
        remedy: 'Check the folder, its rights and the room on the disk',
      },
      { cause: error },
    );
  }
}

function readArguments(args: readonly string[]): Arguments {
  let parsed;
  try {
    parsed = parseArgs({
      args: [...args],
      allowPositionals: true,
      options: {
        mode: { type: 'string', default: 'rail' },
        limits: { type: 'string' },
        vehicle: { type: 'string' },
        cant: { type: 'string' },
        'assume-cant': { type: 'string' },
        tier: { type: 'string', default: 'normal' },
        format: { type: 'string', default: 'csv' },
        out: { type: 'string' },
        profile: { type: 'string' },
        spacing: { type: 'string', default: '5' },
        column: { type: 'string', multiple: true, default: [] },
      },
    });
  } catch (error) {
    throw wrongArguments(error instanceof Error ? error.message : String(error));
  }
  const { values, positionals } = parsed;
  if (positionals.length === 0) throw wrongArguments('no recording is named');
  const mode = oneOf(values.mode, '--mode', ['rail', 'road'] as const);
  const format = oneOf(values.format, '--format', FORMATS);
  if (values.out === undefined && (format === 'xlsx' || format === 'pdf') && process.stdout.isTTY) {
    throw wrongArguments(`--format ${format} needs --out FILE`);
  }
  return {
    recordings: positionals,
    setup: setupOf(mode, values),
    format,
    out: values.out ?? null,
    profile: values.profile ?? null,
    spacingM: number(values.spacing, '--spacing', 0.5, 1000),
    columns: Object.fromEntries(values.column.map(columnName)),
  };
}

interface SetupValues {
  readonly limits?: string | undefined;
  readonly vehicle?: string | undefined;
  readonly cant?: string | undefined;
  readonly 'assume-cant'?: string | undefined;
  readonly tier: string;
}

function setupOf(mode: Mode, values: SetupValues): Setup {
  const base = DEFAULT_SETUP[mode];
  const limits = named(values.limits ?? base.limitSetId, '--limits', BUILT_IN.limitSets, parseLimitSet);
  const vehicle = named(values.vehicle ?? base.vehicleId, '--vehicle', BUILT_IN.vehicles, parseVehicle);
  for (const [option, item] of [
    ['--limits', limits],
    ['--vehicle', vehicle],
  ] as const) {
    if (item.mode !== mode) throw wrongArguments(`${option} "${item.name}" is for ${item.mode}; --mode says ${mode}`);
  }
  const assumed = values['assume-cant'];
  const cantRule: CantRule =
    assumed === undefined ? base.cantRule : { kind: 'constant', value: number(assumed, '--assume-cant', -500, 500) };
  return {
    mode,
    limits,
    vehicle,
    register: values.cant === undefined ? null : readRegister(values.cant),
    cantRule,
    tier: oneOf(values.tier, '--tier', ['normal', 'exceptional'] as const),
    confidence: base.confidence,
  };
}

function named<T extends { readonly id: string }>(
  text: string,
  option: string,
  shipped: readonly T[],
  parse: (text: string, file: string) => T,
): T {
  const found = shipped.find(({ id }) => id === text);
  if (found !== undefined) return found;
  if (existsSync(text)) return parse(readFileSync(text, 'utf8'), text);
  throw wrongArguments(`${option} "${text}" is neither a file nor one of ${shipped.map(({ id }) => id).join(', ')}`);
}

function readRegister(path: string): CantRegister {
  if (!existsSync(path)) throw wrongArguments(`--cant "${path}" is not a file`);
  const { register, findings } = parseCantRegister(readFileSync(path, 'utf8'), {
    id: 'register',
    name: basename(path),
    file: path,
  });
  for (const { message } of findings) console.error(`${path}: ${message}`);
  return register;
}

function columnName(text: string): [string, { header: string; unit?: string }] {
  const match = /^([^=]+)=(.+?)(?::([^:\s]+))?$/.exec(text);
  if (match === null) throw wrongArguments(`--column takes FIELD=HEADER or FIELD=HEADER:UNIT, not "${text}"`);
  const [, field = '', header = '', unit] = match;
  return [field, unit === undefined ? { header } : { header, unit }];
}

function oneOf<T extends string>(text: string, option: string, choices: readonly T[]): T {
  const found = choices.find((choice) => choice === text);
  if (found !== undefined) return found;
  throw wrongArguments(`${option} takes ${choices.join(', ')}, not "${text}"`);
}

function number(text: string, option: string, least: number, most: number): number {
  const value = Number(text);
  if (text.trim() !== '' && value >= least && value <= most) return value;
  throw wrongArguments(`${option} takes a number from ${String(least)} to ${String(most)}, not "${text}"`);
}

function faultOf(error: unknown, path: string | null): Fault {
  const place = path === null ? {} : { file: path };
  if (error instanceof BendbookError) return { ...error.fault, place: { ...place, ...error.fault.place } };
  return {
    code: 'cli/failed',
    cause: error instanceof Error ? error.message : String(error),
    place,
    remedy: path === null ? '"bendbook --help" shows the arguments' : 'Check that the file can be read',
  };
}

function complain(fault: Fault): void {
  console.error(describeFault(fault));
}
