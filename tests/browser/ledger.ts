import type { Page } from 'playwright-core';
import { curveColumns, type CurveColumn } from '../../shared/schema/curve-columns.ts';

/** A row of the ledger or of a CSV: title or key of the column, and the text there. */
export type Cells = Readonly<Record<string, string>>;

/**
 * Reads the whole ledger, scrolling through it since only the rows in sight are drawn: by curve number, the text of
 * each cell by column key. Figures without the gap of thousands and with the hyphen for minus, as a CSV writes them.
 */
export async function readLedger(page: Page): Promise<Map<string, Cells>> {
  const grid = page.getByRole('grid', { name: 'Curves' });
  await grid.waitFor();
  const count = Number(await grid.getAttribute('aria-rowcount')) - 1;
  const columns = (await grid.getByRole('columnheader').locator('button > span:first-child').allInnerTexts()).map(
    columnOf,
  );
  const rows = new Map<string, Cells>();
  for (let top = 0; rows.size < count && top < 100 * count; top += 200) {
    await grid.evaluate((el, y) => {
      el.scrollTop = y;
    }, top);
    await page.waitForTimeout(60);
    const seen = await grid
      .locator('.ledger-line')
      .evaluateAll((lines) =>
        lines.map((line) => [...line.querySelectorAll('[role=gridcell]')].map((cell) => cell.textContent)),
      );
    for (const texts of seen) {
      const cells = Object.fromEntries(columns.map(({ key }, k) => [key, plain(texts[k] ?? '')]));
      rows.set(cells.curve!, cells);
    }
  }
  await grid.evaluate((el) => {
    el.scrollTop = 0;
  });
  return rows;
}

/** The column that a head names: its title, then its unit. */
function columnOf(head: string): CurveColumn {
  const text = head.replace(/\s+/g, ' ').trim();
  const found = curveColumns.find(({ label, unit }) => text === label || text === `${label} ${unit}`);
  if (found === undefined) throw new Error(`the ledger has a column "${text}" that the table does not know`);
  return found;
}

/** A figure as a CSV writes it: no gap of thousands, a hyphen for minus, nothing for unknown. */
function plain(text: string): string {
  return text
    .trim()
    .replace(/\u2009/g, '')
    .replace(/^−/, '-')
    .replace(/^–$/, '');
}
