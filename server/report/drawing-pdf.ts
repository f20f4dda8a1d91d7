import type PDFDocument from 'pdfkit';
import { strokes, type Drawing } from './drawing.ts';

export type Document = InstanceType<typeof PDFDocument>;

/** Draws into a page with the upper left corner at (x, y), scaled to the given width; returns the height used. */
export function drawPdf(doc: Document, drawing: Drawing, x: number, y: number, width: number): number {
  const scale = width / drawing.width;
  doc.save().translate(x, y).scale(scale);
  for (const m of drawing.marks) {
    if (m.kind === 'line' || m.kind === 'area') {
      for (const part of strokes(m.points)) {
        doc.moveTo(part[0]!, part[1]!);
        for (let i = 2; i < part.length; i += 2) doc.lineTo(part[i]!, part[i + 1]!);
      }
      if (m.kind === 'area') doc.fillOpacity(m.opacity).fill(m.fill).fillOpacity(1);
      else {
        doc.lineWidth(m.width).lineJoin('round');
        if (m.dash === undefined) doc.undash();
        else doc.dash(m.dash[0], { space: m.dash[1] });
        doc.stroke(m.stroke).undash();
      }
    } else if (m.kind === 'disc') {
      doc.lineWidth(0.8).circle(m.x, m.y, m.radius).fillAndStroke(m.fill, m.stroke);
    } else {
      doc
        .font(m.bold === true ? 'bold' : 'body')
        .fontSize(m.size)
        .fillColor(m.fill);
      const shift = m.anchor === 'start' ? 0 : doc.widthOfString(m.text) * (m.anchor === 'end' ? 1 : 0.5);
      // lineBreak off: pdfkit would otherwise start a page for text near the lower edge.
      doc.text(m.text, m.x - shift, m.y, { lineBreak: false, baseline: 'alphabetic' });
    }
  }
  doc.restore();
  return drawing.height * scale;
}
