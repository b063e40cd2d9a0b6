import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { AxeResults, RunOptions } from 'axe-core';
import type { Page } from 'playwright-core';

const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

/** The rules whose outcome can depend on the colours of a page. */
const ofColour = ['color-contrast', 'link-in-text-block'];

/** Serious accessibility findings of a page, or of one part of it: by all rules, or by those of colour alone. */
export async function seriousFindings(
  page: Page,
  part = 'body',
  rules: 'all' | 'colour' = 'all',
): Promise<string[]> {
  await page.waitForLoadState('load');
  if (!(await page.evaluate(() => 'axe' in globalThis))) await page.evaluate(axe);
  const { violations } = await page.evaluate(
    ([place, only]) =>
      (
        globalThis as unknown as { axe: { run(place: string, how: RunOptions): Promise<AxeResults> } }
      ).axe.run(place, { resultTypes: ['violations'], ...(only ? { runOnly: only } : {}) }),
    [part, rules === 'colour' ? ofColour : null] as const,
  );
  return violations
    .filter(({ impact }) => impact === 'serious' || impact === 'critical')
    .map(({ id, help, nodes }) => `${id}: ${help}: ${nodes[0].target.join(' ')}`);
}

/** Width of the window and colour scheme that every page is looked at in. */
export const looks = [1440, 390].flatMap((width) =>
  (['light', 'dark'] as const).map((colorScheme) => ({ width, colorScheme })),
);

/**
 * What is wrong with a page, or with a part of it, in each of the four looks: serious accessibility findings, and how far it
 * scrolls sideways. The page is loaded once; window and colours change under it, as they do on a desk at dusk. Rules that
 * don't look at colours are asked once for each width.
 */
export async function faultsInAllLooks(page: Page, part = 'body'): Promise<string[]> {
  const faults: string[] = [];
  for (const { width, colorScheme } of looks) {
    await page.setViewportSize({ width, height: 900 });
    await page.emulateMedia({ colorScheme });
    // Two frames: figures are drawn anew for the new width in the first.
    await page.evaluate(
      () => new Promise((resolve) => requestAnimationFrame(() => requestAnimationFrame(resolve))),
    );
    const found = await seriousFindings(page, part, colorScheme === 'light' ? 'all' : 'colour');
    const sideways = await sidewaysScroll(page);
    if (sideways > 0) found.push(`scrolls sideways by ${sideways} px`);
    faults.push(
      ...found.map((fault) => `${new URL(page.url()).pathname}, ${width} ${colorScheme}: ${fault}`),
    );
  }
  return faults;
}

/** Pixels by which the page is wider than its window. */
export const sidewaysScroll = (page: Page): Promise<number> =>
  page.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth);
