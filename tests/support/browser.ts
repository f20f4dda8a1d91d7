import { chromium, type Browser } from 'playwright-core';
import { findBrowser } from '../../scripts/browser.mjs';

/**
 * Starts a real Chromium, headless. Throws with the remedy when none can be had: browser tests
 * must fail loudly rather than pass unseen.
 */
export async function launchBrowser(): Promise<Browser> {
  const found = await findBrowser();
  if (found.path === null) throw new Error(`No browser for the browser tests: ${found.reason}. ${found.remedy}`);
  return await chromium.launch({
    executablePath: found.path,
    headless: true,
    env: { ...(process.env as Record<string, string>), ...found.env },
    args: [
      '--no-sandbox',
      '--disable-gpu',
      '--disable-quic',
      '--no-first-run',
      '--disable-background-networking',
      '--disable-component-update',
      '--disable-sync',
      '--disable-dev-shm-usage',
    ],
  });
}
