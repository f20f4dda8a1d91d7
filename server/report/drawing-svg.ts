import { strokes, type Drawing, type Mark } from './drawing.ts';
import { escapeMarkup } from './markup.ts';

/** A drawing as an SVG element with a title for readers who do not see it. */
export function drawingSvg(drawing: Drawing, title: string): string {
  return (
    `<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${String(drawing.width)} ${String(drawing.height)}" role="img" ` +
    `aria-label="${escapeMarkup(title)}"><title>${escapeMarkup(title)}</title>${drawing.marks.map(mark).join('')}</svg>`
  );
}

function mark(m: Mark): string {
  switch (m.kind) {
    case 'line': {
      const dash = m.dash === undefined ? '' : ` stroke-dasharray="${m.dash.join(' ')}"`;
      return `<path d="${path(m.points)}" fill="none" stroke="${m.stroke}" stroke-width="${String(m.width)}" stroke-linejoin="round"${dash}/>`;
    }
    case 'area':
      return `<path d="${path(m.points)}Z" fill="${m.fill}" fill-opacity="${String(m.opacity)}"/>`;
    case 'text':
      return (
        `<text x="${fixed(m.x)}" y="${fixed(m.y)}" font-size="${String(m.size)}" fill="${m.fill}" text-anchor="${m.anchor}"` +
        `${m.bold === true ? ' font-weight="600"' : ''}>${escapeMarkup(m.text)}</text>`
      );
    case 'disc':
      return `<circle cx="${fixed(m.x)}" cy="${fixed(m.y)}" r="${String(m.radius)}" fill="${m.fill}" stroke="${m.stroke}"/>`;
  }
}

function path(points: readonly number[]): string {
  return strokes(points)
    .map((part) => {
      let d = `M${fixed(part[0]!)} ${fixed(part[1]!)}`;
      for (let i = 2; i < part.length; i += 2) d += `L${fixed(part[i]!)} ${fixed(part[i + 1]!)}`;
      return d;
    })
    .join('');
}

function fixed(value: number): string {
  return String(Math.round(value * 100) / 100);
}
