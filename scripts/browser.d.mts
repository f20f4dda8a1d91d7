/** A Chromium for the browser tests, or why there is none and what to do. */
export function findBrowser(): Promise<{
  path: string | null;
  env: Record<string, string>;
  reason: string;
  remedy: string;
}>;
