import type { Browser, BrowserContextOptions, Page } from 'playwright-core';
import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';

const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

/** A page that notes whatever a user should never meet. */
export interface WatchedPage {
  readonly page: Page;
  /** Errors and warnings of the console, uncaught errors, breaches of the content policy, requests to other hosts. */
  readonly troubles: readonly string[];
}

/** Opens an address in a context of its own: nothing kept from earlier visits. */
export async function openWatched(
  browser: Browser,
  address: string,
  options: BrowserContextOptions = {},
): Promise<WatchedPage> {
  const context = await browser.newContext({
    locale: 'en-GB',
    viewport: { width: 1280, height: 800 },
    reducedMotion: 'reduce',
    ...options,
  });
  const page = await context.newPage();
  const troubles: string[] = [];
  const { host } = new URL(address);
  page.on('console', (message) => {
    if (message.type() === 'error' || message.type() === 'warning') troubles.push(message.text());
  });
  page.on('pageerror', (error) => troubles.push(String(error)));
  page.on('request', (request) => {
    const url = new URL(request.url());
    if (url.protocol.startsWith('http') && url.host !== host) troubles.push(`asked ${url.host} for ${url.pathname}`);
  });
  await page.exposeFunction('noteBreach', (text: string) => troubles.push(text));
  await page.addInitScript(() => {
    addEventListener('securitypolicyviolation', (event) => {
      const { noteBreach } = globalThis as unknown as { noteBreach: (text: string) => void };
      noteBreach(`policy: ${event.violatedDirective} ${event.blockedURI} ${event.sourceFile}`);
    });
  });
  await page.goto(address);
  return { page, troubles };
}

/** What the accessibility checker finds against WCAG 2.2 A and AA: rule and the first places of each. */
export async function violationsOf(page: Page): Promise<string[]> {
  // Evaluated by the browser's own console, which the content policy does not bind.
  await page.evaluate(axeSource);
  return await page.evaluate(async () => {
    interface Result {
      violations: { id: string; nodes: { target: unknown; failureSummary?: string }[] }[];
    }
    const { axe } = globalThis as unknown as { axe: { run: (root: Document, options: object) => Promise<Result> } };
    const { violations } = await axe.run(document, {
      runOnly: { type: 'tag', values: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice'] },
    });
    return violations.flatMap(({ id, nodes }) =>
      nodes.slice(0, 4).map(({ target, failureSummary }) => `${id}: ${JSON.stringify(target)} ${failureSummary ?? ''}`),
    );
  });
}

/** The text of a download of the page. */
export async function downloaded(page: Page, act: () => Promise<void>): Promise<{ name: string; text: string }> {
  const [download] = await Promise.all([page.waitForEvent('download'), act()]);
  return { name: download.suggestedFilename(), text: readFileSync(await download.path(), 'utf8') };
}
