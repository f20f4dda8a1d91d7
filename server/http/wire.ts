/** A value for JSON: numbers that JSON cannot carry (NaN, infinities) become null, as the schemas say. */
export function wire(value: unknown): unknown {
  if (typeof value === 'number') return Number.isFinite(value) ? value : null;
  if (Array.isArray(value)) return value.map(wire);
  if (typeof value === 'object' && value !== null) {
    return Object.fromEntries(Object.entries(value).map(([key, item]) => [key, wire(item)]));
  }
  return value;
}
