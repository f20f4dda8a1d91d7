/** How positions are written. */
export type AngleForm = 'degrees' | 'degrees-minutes' | 'e7' | 'e6';

/** No position is longer; patterns with several runs of blanks must not meet a thousand of them. */
const LONGEST = 64;

const HEMISPHERE = /^([NSEWO])\s*|\s*([NSEWO])$/i;
const PARTS =
  /^([+-]?)(\d+(?:[.,]\d+)?)(?:\s*[°ºd:\s]\s*(?:(\d+(?:[.,]\d+)?)(?:\s*['′’m:\s]\s*(?:(\d+(?:[.,]\d+)?)\s*(?:["″”s]|'')?)?)?)?)?\s*['′’]?$/i;

/**
 * Degrees from text in any of the customary notations: `-1.234`, `1.234°S`, `S1°14.04′`, `1°14′2.4″ S`,
 * `1 14 2.4 S`. NaN for anything else, and when minutes or seconds reach 60.
 */
export function parseAngle(text: string): number {
  let rest = text.trim();
  if (rest.length > LONGEST) return NaN;
  let sign = 1;
  const hemisphere = HEMISPHERE.exec(rest);
  if (hemisphere !== null) {
    const letter = (hemisphere[1] ?? hemisphere[2]!).toUpperCase();
    if (letter === 'S' || letter === 'W') sign = -1;
    rest = rest.replace(HEMISPHERE, '').trim();
  }
  const match = PARTS.exec(rest);
  if (match === null) return NaN;
  const value = (part: string | undefined) => (part === undefined ? 0 : Number(part.replace(',', '.')));
  const [degrees, minutes, seconds] = [value(match[2]), value(match[3]), value(match[4])];
  if (minutes >= 60 || seconds >= 60) return NaN;
  if (match[1] === '-') sign = -sign;
  return sign * (degrees + minutes / 60 + seconds / 3600);
}

/** Degrees from a number written as `form` says. */
export function angleFrom(value: number, form: AngleForm): number {
  switch (form) {
    case 'degrees':
      return value;
    case 'degrees-minutes': {
      // ddmm.mmmm, as receivers write it.
      const degrees = Math.trunc(value / 100);
      const minutes = value - degrees * 100;
      return Math.abs(minutes) < 60 ? degrees + minutes / 60 : NaN;
    }
    case 'e7':
      return value / 1e7;
    case 'e6':
      return value / 1e6;
  }
}
