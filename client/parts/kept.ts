/** What this browser keeps between visits; a browser that keeps nothing gives the fallback. */
export function readKept<T>(key: string, fallback: T): T {
  try {
    const text = localStorage.getItem(`bendbook.${key}`);
    return text === null ? fallback : (JSON.parse(text) as T);
  } catch {
    return fallback;
  }
}

/** Keeps a value, or forgets the key for null. A full or forbidden storage loses the habit, not the work. */
export function keep(key: string, value: unknown): void {
  try {
    if (value === null) localStorage.removeItem(`bendbook.${key}`);
    else localStorage.setItem(`bendbook.${key}`, JSON.stringify(value));
  } catch {
    // Nothing is kept then; the page works on.
  }
}
