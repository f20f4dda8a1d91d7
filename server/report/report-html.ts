import { bandDrawing, thinForDrawing } from './band-drawing.ts';
import type { ReportContext, ReportedRun } from './context.ts';
import { drawingSvg } from './drawing-svg.ts';
import { escapeMarkup } from './markup.ts';
import { methodLines } from './method.ts';
import { curveSketch, planDrawing } from './plan-drawing.ts';
import type { ProfileTable } from './profile-csv.ts';
import {
  criterionText,
  figureText,
  headline,
  hotspots,
  reportTitle,
  runSummary,
  SHORT_COLUMNS,
  shortCell,
} from './summary.ts';

const STYLE = `
:root{color-scheme:light}body{font:14px/1.5 system-ui,sans-serif;color:#1d2730;background:#fff;margin:2rem auto;max-width:60rem;padding:0 1rem}
h1{font-size:1.6rem;margin:0 0 .5rem}h2{font-size:1.2rem;margin:2rem 0 .5rem;border-bottom:1px solid #d5dade}h3{font-size:1rem;margin:1.2rem 0 .3rem}
table{border-collapse:collapse;width:100%;font-variant-numeric:tabular-nums;font-size:12px}th,td{padding:2px 6px;border-bottom:1px solid #e3e7ea;text-align:right}
th{background:#eef1f3;position:sticky;top:0}td.text,th.text{text-align:left}tr.over td{background:#fbe9e2;font-weight:600}tr.undecided td{background:#fbf4df}
.caution{border-left:4px solid #a32a0e;padding:.4rem .8rem;background:#faf6f3;margin:1rem 0}svg{width:100%;height:auto;font-family:system-ui,sans-serif}
.sketch{max-width:26rem}pre{white-space:pre-wrap;font:12px/1.5 ui-monospace,monospace;background:#f5f7f8;padding:.6rem}
@media print{section.hotspot{break-before:page}body{margin:0;max-width:none}}`;

/** The report as one HTML document that needs nothing else: no script, no network, drawings inline. */
export function reportHtml(context: ReportContext, profileOf: (runId: string) => ProfileTable): string {
  const title = reportTitle(context);
  return (
    `<!doctype html><html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width,initial-scale=1">` +
    `<title>${escapeMarkup(title)}</title><style>${STYLE}</style></head><body><main><h1>${escapeMarkup(title)}</h1>` +
    `<div class="caution">${context.cautions.map(paragraph).join('')}</div>` +
    context.runs.map((run) => runHtml(context, run, profileOf(run.id))).join('') +
    `<h2>Method, inputs and sources</h2>${methodLines(context)
      .slice(1)
      .filter((line) => line !== '')
      .map(paragraph)
      .join('')}` +
    `</main></body></html>`
  );
}

function runHtml(context: ReportContext, run: ReportedRun, profile: ProfileTable): string {
  const thin = thinForDrawing(profile, 1600);
  return (
    `<section><h2>${escapeMarkup(run.name)}</h2>${runSummary(run).map(paragraph).join('')}` +
    drawingSvg(planDrawing(run, thin), `Plan of ${run.name}, coloured by utilisation`) +
    drawingSvg(
      bandDrawing(run, thin, context.setup.mode),
      `Curvature, speed and lateral figures of ${run.name} over chainage`,
    ) +
    tableHtml(run) +
    (run.findings.length === 0
      ? ''
      : `<h3>Findings</h3><ul>${run.findings.map((f) => `<li>${escapeMarkup(`${f.severity}: ${f.message}`)}</li>`).join('')}</ul>`) +
    `</section>` +
    hotspots(run)
      .map((curve) => hotspotHtml(run, curve, profile))
      .join('')
  );
}

function tableHtml(run: ReportedRun): string {
  const textual = new Set(['hand', 'verdict']);
  const attribute = (key: string) => (textual.has(key) ? ' class="text"' : '');
  const head = SHORT_COLUMNS.map(([key, title]) => `<th scope="col"${attribute(key)}>${escapeMarkup(title)}</th>`).join(
    '',
  );
  const rows = run.curves
    .map(
      ({ row }) =>
        `<tr class="${row.verdict.replace(' ', '-')}">` +
        SHORT_COLUMNS.map(([key]) => `<td${attribute(key)}>${escapeMarkup(shortCell(row, key))}</td>`).join('') +
        `</tr>`,
    )
    .join('');
  return `<h3>Curves</h3><table><thead><tr>${head}</tr></thead><tbody>${rows}</tbody></table>`;
}

function hotspotHtml(run: ReportedRun, curve: ReportedRun['curves'][number], profile: ProfileTable): string {
  const { row, criteria } = curve;
  const sketch = curveSketch(
    profile,
    row.start_m,
    row.start_m + (row.entry_transition_m ?? 0),
    row.end_m - (row.exit_transition_m ?? 0),
    row.end_m,
  );
  const rows = criteria
    .map((c) => {
      const cells = [
        c.verdict,
        numberText(c.value),
        intervalText(c.low, c.high),
        numberText(c.limit),
        c.unit,
        numberText(c.utilisation),
      ];
      return `<tr class="${c.verdict.replace(' ', '-')}"><td class="text">${escapeMarkup(criterionText(c))}</td>${cells.map((t) => `<td>${escapeMarkup(t)}</td>`).join('')}</tr>`;
    })
    .join('');
  return (
    `<section class="hotspot"><h2>${escapeMarkup(run.name)}: curve ${String(row.curve)}</h2>${paragraph(headline(curve))}` +
    `<div class="sketch">${drawingSvg(sketch, `Plan of curve ${String(row.curve)}`)}</div>` +
    `<table><thead><tr><th class="text" scope="col">Criterion</th>${['Verdict', 'Value', '95 % interval', 'Limit', 'Unit', 'Utilisation'].map((t) => `<th scope="col">${t}</th>`).join('')}</tr></thead><tbody>${rows}</tbody></table>` +
    criteria
      .filter((c) => c.working.length > 0)
      .map(
        (c) =>
          `<h3>${escapeMarkup(criterionText(c))}</h3><pre>${escapeMarkup([...c.working, c.source, c.reason].filter((l) => l !== '').join('\n'))}</pre>`,
      )
      .join('') +
    (row.notes === '' ? '' : paragraph(row.notes)) +
    `</section>`
  );
}

export function numberText(value: number | null): string {
  return value === null || !Number.isFinite(value) ? '–' : figureText(value);
}

export function intervalText(low: number | null, high: number | null): string {
  return low === null && high === null ? '–' : `${numberText(low)} to ${numberText(high)}`;
}

function paragraph(text: string): string {
  return `<p>${escapeMarkup(text)}</p>`;
}
