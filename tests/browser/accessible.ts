import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { AxeResults } from 'axe-core';
import type { Page } from 'playwright-core';

const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

/** Serious accessibility findings of a page, or of one part of it. */
export async function seriousFindings(page: Page, part = 'body'): Promise<string[]> {
  await page.waitForLoadState('load');
  await page.evaluate(axe);
  const { violations } = await page.evaluate(
    (place) => (globalThis as unknown as { axe: { run(place: string): Promise<AxeResults> } }).axe.run(place),
    part,
  );
  return violations
    .filter(({ impact }) => impact === 'serious' || impact === 'critical')
    .map(({ id, help, nodes }) => `${id}: ${help}: ${nodes[0].target.join(' ')}`);
}

/** Pixels by which the page is wider than its window. */
export const sidewaysScroll = (page: Page): Promise<number> =>
  page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth);
