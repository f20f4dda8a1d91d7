const [MINUS, PLUS, DOT] = [45, 43, 46];
const POWERS = Array.from({ length: 23 }, (_, i) => 10 ** i);

/**
 * Decimal number from ASCII bytes `start`..`end`: sign, digits, at most one `mark` (point or comma), an
 * exponent after a point. Exact (correctly rounded) up to 15 digits, as the digits and the power of ten
 * are then both exact doubles; longer numbers are left to the language. NaN for anything else.
 */
export function readDecimal(bytes: Uint8Array, start: number, end: number, mark = DOT): number {
  let at = start;
  const sign = bytes[at];
  if (sign === MINUS || sign === PLUS) at++;
  if (at >= end) return NaN;
  let value = 0;
  let point = -1;
  for (let p = at; p < end; p++) {
    const byte = bytes[p]!;
    const digit = byte - 48;
    if (digit >= 0 && digit <= 9) value = value * 10 + digit;
    else if (byte === mark && point < 0) point = p;
    else return (byte | 32) === 101 && p > at ? long(bytes, start, end, mark) : NaN;
  }
  const digits = end - at - (point < 0 ? 0 : 1);
  if (digits === 0) return NaN;
  if (digits > 15) return long(bytes, start, end, mark);
  if (point >= 0) value /= POWERS[end - point - 1]!;
  return sign === MINUS ? -value : value;
}

function long(bytes: Uint8Array, start: number, end: number, mark: number): number {
  if (end - start > 64) return NaN;
  let text = String.fromCharCode(...bytes.subarray(start, end));
  if (mark !== DOT) text = text.replace(',', '.');
  return general(text);
}

/**
 * A finite decimal number and nothing else, blanks around it aside; `Number` alone would take '', '0x10' and
 * 'Infinity'. Exact like readDecimal.
 */
export function decimal(text: string): number {
  const length = text.length;
  const sign = text.charCodeAt(0);
  let value = 0;
  let digits = 0;
  let point = -1;
  for (let p = sign === MINUS || sign === PLUS ? 1 : 0; p < length; p++) {
    const code = text.charCodeAt(p);
    const digit = code - 48;
    if (digit >= 0 && digit <= 9) {
      value = value * 10 + digit;
      digits++;
    } else if (code === DOT && point < 0) point = p;
    else return general(text);
  }
  if (digits === 0) return NaN;
  if (digits > 15) return general(text);
  if (point >= 0) value /= POWERS[length - point - 1]!;
  return sign === MINUS ? -value : value;
}

/** Any spelling of a decimal number: blanks around it, exponents, more digits than a double holds. */
function general(text: string): number {
  const trimmed = text.trim();
  if (trimmed.length > 400 || !/^[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,4})?$/.test(trimmed)) return NaN;
  const value = Number(trimmed);
  return Number.isFinite(value) ? value : NaN;
}
