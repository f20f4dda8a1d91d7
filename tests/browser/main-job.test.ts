import { spawnSync } from 'node:child_process';
import { join } from 'node:path';
import { parse } from 'csv-parse/sync';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { criterionOf } from '../../shared/limits/criteria.ts';
import { curveColumns } from '../../shared/schema/curve-columns.ts';
import type { CriterionId } from '../../shared/schema/limit-set.ts';
import { launchBrowser } from '../support/browser.ts';
import { smallCsv } from '../support/recordings.ts';
import { BUILD, makeFolder, removeFolders, startServer, type TestServer } from '../support/server.ts';
import { hasRecordings, RECORDINGS, ROOT, SKIP_REASON } from '../support/shared.ts';
import { readLedger, type Cells } from './ledger.ts';
import { downloaded, openWatched, type WatchedPage } from './watched-page.ts';

const CAB = 'rail-cab-2025-03-11.nmea';
/** A recording of a train of 1,132 fixes at 2.5 Hz. */
const REAL = 'rail/be_log_28876_L36-B.csv';

let server: TestServer;
let browser: Browser;
let watched: WatchedPage;
let page: Page;
beforeAll(async () => {
  server = await startServer(await makeFolder());
  browser = await launchBrowser();
  // Tall, so that few steps show the whole ledger.
  watched = await openWatched(browser, server.url, { viewport: { width: 1600, height: 1200 } });
  page = watched.page;
});
afterAll(async () => {
  await browser.close();
  await server.end();
  await removeFolders();
});

const COMMAND = `import(${JSON.stringify(join(BUILD, 'server/cli.js'))}).then((m) => m.runCli(process.argv.slice(1))).then((code) => { process.exitCode = code; })`;
/** The table as the command line gives it. */
function assessed(...args: string[]): Cells[] {
  const { stdout, stderr, status } = spawnSync(process.execPath, ['-e', COMMAND, '--', 'assess', ...args], {
    cwd: ROOT,
  });
  expect({ stderr: stderr.toString(), status }).toEqual({ stderr: '', status: 0 });
  return rowsOf(stdout.toString());
}

function rowsOf(csv: string): Cells[] {
  return parse<Record<string, string>>(csv, { columns: true, bom: true });
}

/** A cell of a CSV as the ledger shows it: fewer decimals where the column leaves room for few, names for ids. */
function asShown(key: string, row: Cells): string {
  const text = row[key]!;
  if (key === 'governing_criterion') return text === '' ? '' : criterionOf(text as CriterionId).name;
  if (text === '') return '';
  const { decimals } = curveColumns.find((column) => column.key === key)!;
  if (decimals === null) return text;
  if (key === 'utilisation') return Number(text).toFixed(2);
  if (key !== 'value' && key !== 'limit') return Number(text).toFixed(decimals);
  const { unit, decimals: fine } = criterionOf(row.governing_criterion as CriterionId);
  return `${Number(text).toFixed(fine)}${unit === '1' ? '' : ` ${unit}`}`;
}

async function chooseRun(named: string): Promise<void> {
  const option = page.getByRole('combobox', { name: 'Run', exact: true }).locator('option', { hasText: named });
  await page
    .getByRole('combobox', { name: 'Run', exact: true })
    .selectOption((await option.getAttribute('value')) ?? '');
  await page.getByRole('heading', { level: 1, name: named }).waitFor({ state: 'attached' });
}

/** The export of the run shown, from the menu above the ledger. */
async function tableCsv(): Promise<Cells[]> {
  await page.getByText('Export', { exact: true }).click();
  const { name, text } = await downloaded(page, () => page.getByRole('link', { name: 'Curve table, CSV' }).click());
  expect(name).toMatch(/\.csv$/);
  return rowsOf(text);
}

describe('from an empty page to the table in hand', () => {
  it('one press loads the demonstration; the first run opens by itself with its curves', async () => {
    await page.getByRole('button', { name: 'Load the demonstration line' }).click();
    await page.getByRole('grid', { name: 'Curves' }).waitFor();
    expect(await page.getByRole('row').count()).toBeGreaterThan(5);
    // The other recordings follow.
    await page.getByRole('combobox', { name: 'Run', exact: true }).locator('option').nth(4).waitFor({
      state: 'attached',
    });
    expect(await page.getByRole('combobox', { name: 'Run', exact: true }).locator('option').count()).toBe(5);
  });

  it('the worst curve stands out on the map and opens its sheet; ledger, CSV and command line give the same figures', async () => {
    await chooseRun('Cab logger');
    const ledger = await readLedger(page);
    const command = assessed(join('data/demo', CAB), '--cant', 'data/demo/cant-register.csv');
    const over = command.filter(({ verdict }) => verdict === 'over');
    over.sort((a, b) => Number(b.utilisation) - Number(a.utilisation));
    const worst = over[0]!.curve!;
    expect([...ledger.keys()].length).toBe(command.length);

    await page.locator('.curve-tag.over', { hasText: new RegExp(`^${worst}$`) }).click();
    const sheet = page.getByRole('complementary', { name: 'Curve sheet' });
    await sheet.getByRole('heading', { name: `Curve ${worst}`, exact: true }).waitFor();
    expect(await sheet.innerText()).toContain('over');

    const csv = await tableCsv();
    // The name is the file's on the command line and the title on the page; everything else is the same to the letter.
    expect(csv.map((row) => ({ ...row, run: '' }))).toEqual(command.map((row) => ({ ...row, run: '' })));
    for (const row of csv) {
      const shown = ledger.get(row.curve!)!;
      expect(Object.keys(shown).length).toBeGreaterThan(15);
      const expected = Object.fromEntries(Object.keys(shown).map((key) => [key, asShown(key, row)]));
      expect(shown).toEqual(expected);
    }
    // Worst first: the order of the rows is that of verdict and utilisation.
    expect([...ledger.values()][0]!.curve).toBe(worst);
  });

  it('gives a report of the run as PDF', async () => {
    const { name, text } = await downloaded(page, () => page.getByRole('link', { name: 'Report PDF' }).click());
    expect(name).toMatch(/\.pdf$/);
    expect(text.slice(0, 5)).toBe('%PDF-');
  });

  it.skipIf(!hasRecordings)(
    `a real recording chosen as a file is analysed, its worst curve opens and its table holds the same figures${hasRecordings ? '' : ` (${SKIP_REASON})`}`,
    async () => {
      await page.getByLabel('Add logs').setInputFiles(join(RECORDINGS, REAL));
      const name = REAL.split('/')[1]!;
      await page
        .getByRole('combobox', { name: 'Run', exact: true })
        .locator('option', { hasText: name })
        .waitFor({ state: 'attached' });
      await chooseRun(name);
      const ledger = await readLedger(page);
      expect(ledger.size).toBeGreaterThan(2);
      await page.getByRole('grid', { name: 'Curves' }).locator('.ledger-line').first().click();
      const first = [...ledger.values()][0]!;
      const sheet = page.getByRole('complementary', { name: 'Curve sheet' });
      await sheet.getByRole('heading', { name: `Curve ${first.curve!}`, exact: true }).waitFor();
      for (const row of await tableCsv()) {
        const shown = ledger.get(row.curve!)!;
        expect(shown).toEqual(Object.fromEntries(Object.keys(shown).map((key) => [key, asShown(key, row)])));
      }
    },
  );
});

describe('files that cannot be used as they are', () => {
  it('an empty file is refused with cause and remedy, and the message can be put away', async () => {
    await page.getByLabel('Add logs').setInputFiles({ name: 'empty.gpx', mimeType: '', buffer: Buffer.alloc(0) });
    const alert = page.getByRole('alert').filter({ hasText: 'empty.gpx' });
    await alert.waitFor();
    const sentences = (await alert.innerText()).split(/[.!?]\s/);
    expect(sentences.length).toBeGreaterThanOrEqual(2);
    await alert.getByRole('button', { name: 'Put away' }).click();
    await alert.waitFor({ state: 'detached' });
  });

  it('columns that no one can guess are named by hand, and the recording is read', async () => {
    await page.getByLabel('Add logs').setInputFiles({
      name: 'unnamed.csv',
      mimeType: 'text/csv',
      buffer: Buffer.from(smallCsv(3).replace('time,lat,lon,speed_ms,course', 'a,b,c,d,e')),
    });
    await page.getByRole('button', { name: 'Recordings' }).click();
    const card = page.getByRole('region', { name: 'unnamed.csv' });
    await card.getByRole('alert').waitFor();
    await card.getByRole('button', { name: 'Name the columns by hand' }).click();
    for (const [column, field] of [
      ['a', 'time'],
      ['b', 'latitude'],
      ['c', 'longitude'],
      ['d', 'speed'],
      ['e', 'course'],
    ] as const) {
      await card.getByRole('combobox', { name: `Column ${column} is` }).selectOption({ label: field });
    }
    await card.getByRole('combobox', { name: 'Unit of column d' }).selectOption('m/s');
    await card.getByRole('button', { name: 'Read with these columns' }).click();
    await card.getByRole('button', { name: /^Open / }).click();
    const ledger = await readLedger(page);
    // The log turns 60 degrees to the left.
    expect([...ledger.values()]).toMatchObject([{ hand: 'left' }]);
  });

  it('a recording is deleted after a question, and its run with it', async () => {
    await page.getByRole('button', { name: 'Recordings' }).click();
    const card = page.getByRole('region', { name: 'unnamed.csv' });
    await card.getByRole('button', { name: 'Delete' }).click();
    await page.getByRole('dialog').getByRole('button', { name: 'Keep' }).click();
    expect(await card.count()).toBe(1);
    await card.getByRole('button', { name: 'Delete' }).click();
    await page.getByRole('dialog').getByRole('button', { name: 'Delete it' }).click();
    await card.waitFor({ state: 'detached' });
    const runs = (await (await fetch(`${server.url}/api/runs`)).json()) as { name: string }[];
    expect(runs.filter(({ name }) => name.includes('unnamed'))).toEqual([]);
  });
});

describe('throughout', () => {
  it('the console stayed silent, the content policy whole, and nothing was asked of another host', () => {
    expect(watched.troubles).toEqual([]);
  });
});
