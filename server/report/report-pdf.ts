import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import PDFDocument from 'pdfkit';
import { bandDrawing, thinForDrawing } from './band-drawing.ts';
import type { ReportContext, ReportedRun } from './context.ts';
import { INK, OVER, QUIET, RULE, UNDECIDED } from './drawing.ts';
import { drawPdf, type Document } from './drawing-pdf.ts';
import { methodLines } from './method.ts';
import { curveSketch, planDrawing } from './plan-drawing.ts';
import type { ProfileTable } from './profile-csv.ts';
import { intervalText, numberText } from './report-html.ts';
import { criterionText, headline, hotspots, reportTitle, runSummary, SHORT_COLUMNS, shortCell } from './summary.ts';

/** A4 with margins, in points. */
const PAGE = { width: 595.28, height: 841.89, margin: 42 };
const WIDTH = PAGE.width - 2 * PAGE.margin;
const BOTTOM = PAGE.height - PAGE.margin - 22;

/**
 * The report as PDF: summary, plan and band as vector drawings, the curve table, one page a hotspot
 * with its working, then method, sources, inputs with their hashes and cautions. Every page carries
 * the short caution and its number.
 */
export async function reportPdf(context: ReportContext, profileOf: (runId: string) => ProfileTable): Promise<Buffer> {
  const doc = new PDFDocument({
    size: 'A4',
    margin: PAGE.margin,
    bufferPages: true,
    lang: 'en',
    info: { Title: reportTitle(context), Creator: context.software, Producer: context.software },
  });
  const fonts = createRequire(import.meta.url);
  doc.registerFont('body', readFileSync(fonts.resolve('dejavu-fonts-ttf/ttf/DejaVuSans.ttf')));
  doc.registerFont('bold', readFileSync(fonts.resolve('dejavu-fonts-ttf/ttf/DejaVuSans-Bold.ttf')));
  const chunks: Buffer[] = [];
  doc.on('data', (chunk: Buffer) => chunks.push(chunk));
  const ended = new Promise<void>((resolve, reject) => {
    doc.on('end', resolve);
    doc.on('error', reject);
  });

  heading(doc, reportTitle(context), 18);
  cautionBox(doc, context.cautions);
  context.runs.forEach((run, k) => {
    if (k > 0) doc.addPage();
    writeRun(doc, context, run, profileOf(run.id));
  });
  doc.addPage();
  heading(doc, 'Method, inputs and sources', 14);
  for (const line of methodLines(context).slice(1)) {
    if (line === '') doc.moveDown(0.5);
    else if (line === line.toUpperCase() && line.length < 40) paragraph(doc, line, { bold: true });
    else paragraph(doc, line);
  }
  footers(doc, context);
  doc.end();
  await ended;
  return Buffer.concat(chunks);
}

function writeRun(doc: Document, context: ReportContext, run: ReportedRun, profile: ProfileTable): void {
  heading(doc, run.name, 14);
  for (const line of runSummary(run)) paragraph(doc, line);
  const thin = thinForDrawing(profile, 1600);
  const plan = planDrawing(run, thin);
  place(doc, plan.height * (WIDTH / plan.width));
  doc.y += drawPdf(doc, plan, PAGE.margin, doc.y, WIDTH) + 6;
  const band = bandDrawing(run, thin, context.setup.mode);
  place(doc, band.height * (WIDTH / band.width));
  doc.y += drawPdf(doc, band, PAGE.margin, doc.y, WIDTH) + 8;
  writeCurveTable(doc, run);
  if (run.findings.length > 0) {
    heading(doc, 'Findings', 11);
    for (const f of run.findings) paragraph(doc, `${f.severity}: ${f.message}`);
  }
  for (const curve of hotspots(run)) writeHotspot(doc, run, curve, profile);
}

function writeCurveTable(doc: Document, run: ReportedRun): void {
  doc.addPage();
  heading(doc, `${run.name}: curves`, 12);
  const width = WIDTH / SHORT_COLUMNS.length;
  const row = (cells: readonly string[], bold: boolean, fill: string): void => {
    if (doc.y > BOTTOM - 12) doc.addPage();
    const y = doc.y;
    doc
      .font(bold ? 'bold' : 'body')
      .fontSize(6.8)
      .fillColor(fill);
    cells.forEach((cell, i) => {
      doc.text(cell, PAGE.margin + i * width, y, {
        width: width - 4,
        align: 'right',
        lineBreak: false,
        height: 10,
        ellipsis: true,
      });
    });
    doc
      .lineWidth(0.4)
      .moveTo(PAGE.margin, y + 10)
      .lineTo(PAGE.margin + WIDTH, y + 10)
      .stroke(RULE);
    doc.x = PAGE.margin;
    doc.y = y + 12;
  };
  row(
    SHORT_COLUMNS.map(([, title]) => title),
    true,
    INK,
  );
  for (const { row: curve } of run.curves) {
    row(
      SHORT_COLUMNS.map(([key]) => shortCell(curve, key)),
      curve.verdict === 'over',
      verdictFill(curve.verdict),
    );
  }
}

function writeHotspot(
  doc: Document,
  run: ReportedRun,
  curve: ReportedRun['curves'][number],
  profile: ProfileTable,
): void {
  const { row, criteria } = curve;
  doc.addPage();
  heading(doc, `${run.name}: curve ${String(row.curve)}`, 14);
  paragraph(doc, headline(curve));
  const sketch = curveSketch(
    profile,
    row.start_m,
    row.start_m + (row.entry_transition_m ?? 0),
    row.end_m - (row.exit_transition_m ?? 0),
    row.end_m,
  );
  doc.y += drawPdf(doc, sketch, PAGE.margin, doc.y, 260) + 8;
  for (const c of criteria) {
    const figure = `${criterionText(c)}: ${c.verdict}; ${numberText(c.value)} ${c.unit} (95 %: ${intervalText(c.low, c.high)}), limit ${numberText(c.limit)}`;
    paragraph(doc, figure, { bold: true, fill: verdictFill(c.verdict) });
    for (const line of [...c.working, c.source, c.reason])
      if (line !== '') paragraph(doc, line, { size: 7.2, indent: 10 });
    doc.moveDown(0.3);
  }
  if (row.notes !== '') paragraph(doc, row.notes);
}

function heading(doc: Document, text: string, size: number): void {
  place(doc, size * 3);
  doc.font('bold').fontSize(size).fillColor(INK).text(text, PAGE.margin, doc.y, { width: WIDTH });
  doc.moveDown(0.3);
}

function paragraph(
  doc: Document,
  text: string,
  style: { bold?: boolean; size?: number; indent?: number; fill?: string } = {},
): void {
  const size = style.size ?? 8.5;
  place(doc, size * 1.6);
  const indent = style.indent ?? 0;
  doc
    .font(style.bold === true ? 'bold' : 'body')
    .fontSize(size)
    .fillColor(style.fill ?? INK);
  doc.text(text, PAGE.margin + indent, doc.y, { width: WIDTH - indent });
  doc.moveDown(0.15);
}

function cautionBox(doc: Document, cautions: readonly string[]): void {
  const top = doc.y;
  doc.font('body').fontSize(8).fillColor(INK);
  for (const caution of cautions) doc.text(caution, PAGE.margin + 10, doc.y + 2, { width: WIDTH - 14 });
  doc
    .lineWidth(2.5)
    .moveTo(PAGE.margin + 2, top)
    .lineTo(PAGE.margin + 2, doc.y + 2)
    .stroke(OVER);
  doc.moveDown(0.8);
}

/** Starts a page when `height` does not fit on this one. */
function place(doc: Document, height: number): void {
  if (doc.y + height > BOTTOM) doc.addPage();
}

function footers(doc: Document, context: ReportContext): void {
  const { start, count } = doc.bufferedPageRange();
  for (let i = start; i < start + count; i++) {
    doc.switchToPage(i);
    // Text below the bottom margin would start a page: lift the margin for the footer.
    doc.page.margins.bottom = 0;
    doc.font('body').fontSize(6.5).fillColor(QUIET);
    const y = PAGE.height - PAGE.margin - 12;
    doc.text(context.cautions[0] ?? '', PAGE.margin, y, { width: WIDTH - 60, height: 18, ellipsis: true });
    doc.text(`${String(i - start + 1)} of ${String(count)}`, PAGE.margin, y, {
      width: WIDTH,
      align: 'right',
      lineBreak: false,
    });
  }
}

function verdictFill(verdict: string): string {
  return verdict === 'over' ? OVER : verdict === 'undecided' ? UNDECIDED : INK;
}
