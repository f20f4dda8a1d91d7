import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { launchBrowser } from '../support/browser.ts';
import { makeFolder, removeFolders, startServer, type TestServer } from '../support/server.ts';
import { openWatched, violationsOf, type WatchedPage } from './watched-page.ts';

let server: TestServer;
let browser: Browser;
const opened: WatchedPage[] = [];
beforeAll(async () => {
  server = await startServer(await makeFolder());
  browser = await launchBrowser();
});
afterAll(async () => {
  await browser.close();
  await server.end();
  await removeFolders();
});

async function visit(hash = '', options: Parameters<typeof openWatched>[2] = {}): Promise<Page> {
  const watched = await openWatched(browser, server.url + hash, options);
  opened.push(watched);
  return watched.page;
}

const sheetOf = (page: Page) => page.getByRole('complementary', { name: 'Curve sheet' });
const titleOf = (page: Page) => sheetOf(page).getByRole('heading', { level: 2 }).innerText();

describe('the keyboard alone', () => {
  it('goes from the empty page to the worst curve, through the ledger and to the export', async () => {
    const page = await visit();
    const button = page.getByRole('button', { name: 'Load the demonstration line' });
    await button.waitFor();
    await tabTo(page, (focus) => focus.text === 'Load the demonstration line');
    await page.keyboard.press('Enter');
    await page.getByRole('grid', { name: 'Curves' }).waitFor();
    await page.keyboard.press('w');
    await sheetOf(page).waitFor();
    const worst = await titleOf(page);
    // Escape closes the sheet, the ledger takes the focus, arrows go through it.
    await page.keyboard.press('Escape');
    await sheetOf(page).waitFor({ state: 'detached' });
    await tabTo(page, (focus) => focus.role === 'grid');
    await page.keyboard.press('ArrowDown');
    await sheetOf(page).waitFor();
    expect(await titleOf(page)).toBe(worst);
    await page.keyboard.press('ArrowDown');
    await page.waitForFunction((before) => document.querySelector('.area-sheet h2')?.textContent !== before, worst);
    await page.keyboard.press('Enter');
    expect(await page.evaluate(() => document.activeElement?.getAttribute('aria-label'))).toBe('Curve sheet');
    // A menu opens, its entries take the focus, Escape closes it and gives the focus back.
    await page.locator('summary', { hasText: 'Export' }).focus();
    await page.keyboard.press('Enter');
    await tabTo(page, (focus) => focus.text.startsWith('Curve table, CSV'));
    await page.keyboard.press('Escape');
    expect(await page.evaluate(() => document.activeElement?.textContent)).toBe('Export');
    // The card of keys opens and closes.
    await page.keyboard.press('?');
    await page.getByRole('dialog', { name: 'Keys' }).waitFor();
    await page.keyboard.press('Escape');
    await page.getByRole('dialog', { name: 'Keys' }).waitFor({ state: 'hidden' });
  });
});

describe('addresses', () => {
  it('a link opens the same run, curve and window; the back button goes back through them', async () => {
    const page = await visit();
    await page.getByRole('grid', { name: 'Curves' }).waitFor();
    await page.locator('.ledger-line').nth(2).click();
    await sheetOf(page).waitFor();
    const first = await titleOf(page);
    await page.keyboard.press('j');
    await page.waitForFunction((before) => document.querySelector('.area-sheet h2')?.textContent !== before, first);
    const second = await titleOf(page);
    const address = page.url();
    expect(address).toMatch(/#\/desk\?run=.+&curve=\d+/);
    await page.goBack();
    expect(await titleOf(page)).toBe(first);
    await page.goForward();
    expect(await titleOf(page)).toBe(second);

    const other = await visit(new URL(address).hash);
    await sheetOf(other).waitFor();
    expect(await titleOf(other)).toBe(second);
    expect(await other.getByRole('heading', { level: 1 }).textContent()).toBe(
      await page.getByRole('heading', { level: 1 }).textContent(),
    );
    await other.reload();
    await sheetOf(other).waitFor();
    expect(await titleOf(other)).toBe(second);
  });
});

describe('a trial', () => {
  it('changes verdict and running time at once, and goes back to the record', async () => {
    const page = await visit();
    await page.getByRole('grid', { name: 'Curves' }).waitFor();
    await page.keyboard.press('w');
    const trial = sheetOf(page).getByRole('region', { name: 'Trial' });
    await trial.waitFor();
    expect(await trial.innerText()).not.toContain('Tried');
    await trial.getByRole('slider', { name: /^Speed/ }).fill('20');
    const tried = trial.getByRole('row', { name: /^Tried/ });
    expect(await tried.innerText()).toContain('within');
    expect(await trial.getByRole('row', { name: /^Recorded/ }).innerText()).toContain('over');
    const cost = await trial.getByRole('row', { name: /^Running time/ }).innerText();
    expect(Number(/\+([\d.]+) s/.exec(cost)?.[1])).toBeGreaterThan(1);
    await trial.getByRole('button', { name: 'Back to the record' }).click();
    expect(await trial.innerText()).not.toContain('Tried');
  });
});

describe('every screen', () => {
  const screens = [
    ['the line', '#/desk'],
    ['recordings', '#/recordings'],
    ['limit sets', '#/limits'],
    ['vehicles', '#/vehicles'],
    ['cant registers', '#/registers'],
    ['units', '#/units'],
  ] as const;

  it.each(['light', 'dark'] as const)(
    'meets WCAG 2.2 AA as far as a checker can tell, in %s colours',
    async (theme) => {
      const page = await visit('', { colorScheme: theme });
      await page.getByRole('grid', { name: 'Curves' }).waitFor();
      const found: Record<string, string[]> = {};
      for (const [name, hash] of screens) {
        await page.goto(server.url + hash);
        await page.getByRole('heading', { level: 1 }).waitFor({ state: 'attached' });
        await page.waitForTimeout(400);
        found[name] = await violationsOf(page);
      }
      await page.goto(`${server.url}#/desk`);
      await page.getByRole('grid', { name: 'Curves' }).waitFor();
      await page.keyboard.press('w');
      await sheetOf(page).waitFor();
      await page.waitForTimeout(400);
      found['the curve sheet'] = await violationsOf(page);
      await page.keyboard.press('?');
      found['the card of keys'] = await violationsOf(page);
      expect(found).toEqual(Object.fromEntries(Object.keys(found).map((name) => [name, []])));
    },
  );

  it('the first screen of a newcomer meets it too', async () => {
    const empty = await startServer(await makeFolder());
    try {
      for (const theme of ['light', 'dark'] as const) {
        const watched = await openWatched(browser, empty.url, { colorScheme: theme });
        opened.push(watched);
        await watched.page.getByRole('button', { name: 'Load the demonstration line' }).waitFor();
        expect(await violationsOf(watched.page)).toEqual([]);
        await watched.page.context().close();
      }
    } finally {
      await empty.end();
    }
  });

  it('shows one view at a time on a narrow tablet, without scrolling sideways', async () => {
    const page = await visit('', { viewport: { width: 820, height: 1180 } });
    await page.getByRole('grid', { name: 'Curves' }).waitFor();
    for (const tab of ['Plan', 'Band', 'Ledger']) {
      await page.getByRole('group', { name: 'View' }).getByRole('button', { name: tab, exact: true }).click();
      expect(await page.locator('.area:visible').count()).toBe(1);
    }
    const wide = await page.evaluate(() => document.documentElement.scrollWidth);
    expect(wide).toBeLessThanOrEqual(820);
  });
});

describe('throughout', () => {
  it('the console stayed silent, the content policy whole, and nothing was asked of another host', () => {
    expect(opened.flatMap(({ troubles }) => troubles)).toEqual([]);
  });
});

interface Focus {
  readonly text: string;
  readonly role: string | null;
}

/** Presses Tab until the element with the focus is the one meant. */
async function tabTo(page: Page, isMeant: (focus: Focus) => boolean): Promise<void> {
  for (let i = 0; i < 80; i++) {
    await page.keyboard.press('Tab');
    const focus = await page.evaluate(() => ({
      text: document.activeElement?.textContent ?? '',
      role: document.activeElement?.getAttribute('role') ?? null,
    }));
    if (isMeant(focus)) return;
  }
  throw new Error('the Tab key does not lead there');
}
