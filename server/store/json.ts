/** JSON that keeps infinities and NaN, which plain JSON turns into null: they are written as marked text. */
const MARKS: readonly (readonly [text: string, value: number])[] = [
  ['~Infinity', Infinity],
  ['~-Infinity', -Infinity],
  ['~NaN', NaN],
];

export function stringifyWire(value: unknown): string {
  return JSON.stringify(value, (_key, v: unknown) => {
    if (typeof v !== 'number' || Number.isFinite(v)) return v;
    return MARKS.find(([, mark]) => Object.is(mark, v))![0];
  });
}

/** The value that `stringifyWire` made the text of. */
export function parseWire(text: string): unknown {
  return JSON.parse(text, (_key, v: unknown) => MARKS.find(([mark]) => mark === v)?.[1] ?? v);
}
