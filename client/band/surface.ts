/** What the Band draws on: the screen and an SVG file take the same strokes. */
export interface Surface {
  line(points: readonly number[], colour: string, width: number, dash?: readonly number[]): void;
  area(points: readonly number[], fill: string): void;
  box(x: number, y: number, width: number, height: number, fill: string): void;
  text(
    x: number,
    y: number,
    text: string,
    colour: string,
    size: number,
    anchor?: 'start' | 'middle' | 'end',
    bold?: boolean,
  ): void;
  /** Everything until the next call stays inside this box. */
  clip(x: number, y: number, width: number, height: number): void;
}

export class CanvasSurface implements Surface {
  readonly #context: CanvasRenderingContext2D;
  readonly #font: string;

  constructor(context: CanvasRenderingContext2D, font: string) {
    this.#context = context;
    this.#font = font;
    context.save();
  }

  line(points: readonly number[], colour: string, width: number, dash: readonly number[] = []): void {
    const c = this.#context;
    c.strokeStyle = colour;
    c.lineWidth = width;
    c.setLineDash([...dash]);
    c.beginPath();
    let down = false;
    for (let i = 0; i < points.length; i += 2) {
      const x = points[i]!;
      const y = points[i + 1]!;
      if (Number.isNaN(y)) down = false;
      else if (down) c.lineTo(x, y);
      else {
        c.moveTo(x, y);
        down = true;
      }
    }
    c.stroke();
    c.setLineDash([]);
  }

  area(points: readonly number[], fill: string): void {
    const c = this.#context;
    c.fillStyle = fill;
    c.beginPath();
    for (let i = 0; i < points.length; i += 2) c.lineTo(points[i]!, points[i + 1]!);
    c.fill();
  }

  box(x: number, y: number, width: number, height: number, fill: string): void {
    this.#context.fillStyle = fill;
    this.#context.fillRect(x, y, width, height);
  }

  text(
    x: number,
    y: number,
    text: string,
    colour: string,
    size: number,
    anchor: 'start' | 'middle' | 'end' = 'start',
    bold = false,
  ): void {
    const c = this.#context;
    c.fillStyle = colour;
    c.font = `${bold ? '600 ' : ''}${String(size)}px ${this.#font}`;
    c.textAlign = anchor === 'middle' ? 'center' : anchor;
    c.fillText(text, x, y);
  }

  clip(x: number, y: number, width: number, height: number): void {
    const c = this.#context;
    c.restore();
    c.save();
    c.beginPath();
    c.rect(x, y, width, height);
    c.clip();
  }
}

export class SvgSurface implements Surface {
  readonly #parts: string[] = [];
  readonly #width: number;
  readonly #height: number;
  #clips = 0;

  constructor(width: number, height: number) {
    this.#width = width;
    this.#height = height;
  }

  line(points: readonly number[], colour: string, width: number, dash: readonly number[] = []): void {
    let d = '';
    let down = false;
    for (let i = 0; i < points.length; i += 2) {
      const y = points[i + 1]!;
      if (Number.isNaN(y)) {
        down = false;
        continue;
      }
      d += `${down ? 'L' : 'M'}${fixed(points[i]!)} ${fixed(y)}`;
      down = true;
    }
    if (d === '') return;
    const dashed = dash.length > 0 ? ` stroke-dasharray="${dash.join(' ')}"` : '';
    this.#parts.push(`<path d="${d}" fill="none" stroke="${colour}" stroke-width="${String(width)}"${dashed}/>`);
  }

  area(points: readonly number[], fill: string): void {
    let d = '';
    for (let i = 0; i < points.length; i += 2)
      d += `${i === 0 ? 'M' : 'L'}${fixed(points[i]!)} ${fixed(points[i + 1]!)}`;
    this.#parts.push(`<path d="${d}Z" fill="${fill}"/>`);
  }

  box(x: number, y: number, width: number, height: number, fill: string): void {
    this.#parts.push(
      `<rect x="${fixed(x)}" y="${fixed(y)}" width="${fixed(width)}" height="${fixed(height)}" fill="${fill}"/>`,
    );
  }

  text(
    x: number,
    y: number,
    text: string,
    colour: string,
    size: number,
    anchor: 'start' | 'middle' | 'end' = 'start',
    bold = false,
  ): void {
    const safe = text.replace(/&/g, '&amp;').replace(/</g, '&lt;');
    this.#parts.push(
      `<text x="${fixed(x)}" y="${fixed(y)}" fill="${colour}" font-size="${String(size)}" text-anchor="${anchor}"${bold ? ' font-weight="600"' : ''}>${safe}</text>`,
    );
  }

  clip(x: number, y: number, width: number, height: number): void {
    if (this.#clips > 0) this.#parts.push('</g>');
    this.#clips++;
    const id = `c${String(this.#clips)}`;
    this.#parts.push(
      `<clipPath id="${id}"><rect x="${fixed(x)}" y="${fixed(y)}" width="${fixed(width)}" height="${fixed(height)}"/></clipPath><g clip-path="url(#${id})">`,
    );
  }

  /** The finished picture. */
  toString(): string {
    return (
      `<svg xmlns="http://www.w3.org/2000/svg" width="${String(this.#width)}" height="${String(this.#height)}" ` +
      `viewBox="0 0 ${String(this.#width)} ${String(this.#height)}" font-family="sans-serif">${this.#parts.join('')}${this.#clips > 0 ? '</g>' : ''}</svg>`
    );
  }
}

function fixed(value: number): string {
  return String(Math.round(value * 100) / 100);
}
