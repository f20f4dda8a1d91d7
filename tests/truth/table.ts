import { pathToFileURL } from 'node:url';
import { parseArgs } from 'node:util';
import { FAMILY_NAMES, type FamilyName } from '../../data/synthetic/families.ts';
import type { ReceiverCondition } from '../../data/synthetic/receiver.ts';
import { runCell, type CellResult } from './bench.ts';
import { median } from 'simple-statistics';
import { attainableMedian } from './score.ts';
import { absoluteQuantile, rootMeanSquare, share } from './statistics.ts';

const HELP = `Accuracy, coverage and time against simulated lines of known geometry.

  --families main,tram,...   default: all
  --rates 1,10               fixes per second
  --curves 400               at least so many curves a cell
  --seed 1                   first of the seeds
  --seeds 1                  number of seeds, each with its own table
  --course yes|no|both       with Doppler speed and course, or positions only
  --dirty                    outliers, bursts, gaps, coarse rounding, stale course
  --phone                    smooth filtered errors, lag, stale course
  --notes                    list missed, invented and far-off curves
`;

const number = (value: number, digits: number) => (Number.isFinite(value) ? value.toFixed(digits) : '-');
const percent = (value: number, digits = 1) => number(100 * value, digits);

const HEADINGS = [
  'family',
  'log',
  'curves',
  'found %',
  '>6sd %',
  'false/100km',
  'splits',
  'hidden',
  'R med %',
  'bound %',
  'R p95 %',
  'rms/b',
  'trim',
  'cov R',
  'a med %',
  'cov a',
  'a rms/b',
  'peak z',
  'tp med m',
  'cov tp',
  'tp rms/b',
  'L med m',
  'cov L',
  'hot/500km',
  'cov k(s)',
  'cov v(s)',
  'ms/1000 est',
  'ms/1000 fit',
];

/** The cells of one line of the table. */
function tableRow({ cell, score }: CellResult): string[] {
  const { radius, overBound, lateral, lateralOverBound, peak, tangent, tangentOverBound, length } = score;
  const errors = (judged: readonly { readonly error: number }[]) => judged.map((one) => one.error);
  return [
    cell.family,
    describeLog(cell),
    String(score.curves),
    percent(score.found / score.curves),
    percent(score.clearFound / score.clear),
    number((100 * score.invented) / score.lengthKm, 2),
    String(score.splits),
    String(score.hidden),
    percent(absoluteQuantile(errors(radius), 0.5), 2),
    percent(attainableMedian(score), 2),
    percent(absoluteQuantile(errors(radius), 0.95)),
    number(rootMeanSquare(overBound), 2),
    number(rootMeanSquare(overBound, 0.02), 2),
    percent(share(radius)),
    percent(absoluteQuantile(errors(lateral), 0.5), 2),
    percent(share(lateral)),
    number(rootMeanSquare(lateralOverBound, 0.02), 2),
    peak.length === 0 ? '-' : `${number(median(peak), 2)}+-${number(1.25 / Math.sqrt(peak.length), 2)}`,
    number(absoluteQuantile(errors(tangent), 0.5), 2),
    percent(share(tangent)),
    number(rootMeanSquare(tangentOverBound, 0.02), 2),
    number(absoluteQuantile(errors(length), 0.5), 1),
    percent(share(length)),
    number((500 * score.hotspots) / score.lengthKm, 1),
    percent(score.curvatureHeld / score.moving),
    percent(score.speedHeld / score.moving),
    number((1000 * score.estimateMs) / score.fixes, 0),
    number((1000 * score.alignmentMs) / score.fixes, 0),
  ];
}

const NAIVE_HEADINGS = ['family', 'log', 'found %', 'false', 'splits', 'R med %', 'R p95 %', 'tp med m', 'ms/1000'];

function naiveRow({ cell, naive, score }: CellResult): string[] {
  return [
    cell.family,
    describeLog(cell),
    percent(naive.found / naive.curves),
    `${number((100 * naive.invented) / score.lengthKm, 1)}/100km`,
    String(naive.splits),
    percent(absoluteQuantile(naive.radius, 0.5), 2),
    percent(absoluteQuantile(naive.radius, 0.95)),
    number(absoluteQuantile(naive.tangent, 0.5), 2),
    number((1000 * naive.milliseconds) / score.fixes, 2),
  ];
}

function describeLog(cell: CellResult['cell']): string {
  return `${String(cell.rateHz)} Hz ${cell.course ? 'course' : 'positions'}${cell.condition === 'clean' ? '' : ` ${cell.condition}`}`;
}

function formatTable(headings: readonly string[], rows: readonly (readonly string[])[]): string {
  const widths = headings.map((heading, i) => Math.max(heading.length, ...rows.map((row) => row[i]!.length)));
  const line = (cells: readonly string[]) => cells.map((text, i) => text.padEnd(widths[i]!)).join(' | ');
  return [line(headings), widths.map((width) => '-'.repeat(width)).join('-|-'), ...rows.map(line)].join('\n');
}

function main(): void {
  const { values } = parseArgs({
    options: {
      families: { type: 'string' },
      rates: { type: 'string', default: '1,10' },
      curves: { type: 'string', default: '400' },
      seed: { type: 'string', default: '1' },
      seeds: { type: 'string', default: '1' },
      course: { type: 'string', default: 'both' },
      dirty: { type: 'boolean', default: false },
      phone: { type: 'boolean', default: false },
      notes: { type: 'boolean', default: false },
      help: { type: 'boolean', default: false },
    },
  });
  if (values.help) {
    process.stdout.write(HELP);
    return;
  }
  const families = values.families
    ? FAMILY_NAMES.filter((name) => values.families!.split(',').includes(name))
    : FAMILY_NAMES;
  const condition: ReceiverCondition = values.dirty ? 'dirty' : values.phone ? 'phone' : 'clean';
  const courses = values.course === 'both' ? [true, false] : [values.course === 'yes'];
  const first = Number(values.seed);
  for (let seed = first; seed < first + Number(values.seeds); seed += 1) {
    const results = cells(families, values.rates.split(',').map(Number), courses).map((cell) => {
      const result = runCell({ ...cell, condition, curves: Number(values.curves), firstSeed: seed });
      process.stderr.write(`${tableRow(result).join(' | ')}\n`);
      return result;
    });
    process.stdout.write(`\nSeed ${String(seed)}\n\n${formatTable(HEADINGS, results.map(tableRow))}\n`);
    process.stdout.write(
      `\nLocal circle fit on the same fixes\n\n${formatTable(NAIVE_HEADINGS, results.map(naiveRow))}\n`,
    );
    const failed = results.reduce((sum, result) => sum + result.score.failures, 0);
    if (failed > 0) process.stdout.write(`\n${String(failed)} runs FAILED\n`);
    if (values.notes || failed > 0) {
      for (const { score } of results) process.stdout.write(score.notes.map((note) => `${note}\n`).join(''));
    }
  }
}

function cells(families: readonly FamilyName[], rates: readonly number[], courses: readonly boolean[]) {
  return families.flatMap((family) => courses.flatMap((course) => rates.map((rateHz) => ({ family, rateHz, course }))));
}

if (process.argv[1] !== undefined && import.meta.url === pathToFileURL(process.argv[1]).href) main();
