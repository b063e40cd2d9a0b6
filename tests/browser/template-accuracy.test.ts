import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signIn } from './fitted-notebook';

const { url } = inject('instance');

let browser: Browser;
let analyst: Visit;
let page: Page;

/** A notebook of the test's own on a simulated measurement of the demo: one field of vertex 1, its mass near 4. */
beforeAll(async () => {
  browser = await launchBrowser();
  analyst = await visit(browser);
  page = analyst.page;
  await signIn(page, url, 'analyst@demo.beatnote.example');
  const group = new URL(page.url()).pathname;
  const measured = await ask<{ id: string; name: string }[]>(page, 'GET', `${group}/measurements`);
  const measurement = measured.find(({ name }) => name === 'Larkfield deep field')?.id;
  const template = {
    id: 'locked-squeezed',
    options: { fields: 1, vertex: 1, phases: 'locked', background: [1, 2] },
  };
  const priors = { mu1: { kind: 'uniform', lo: 3.9, hi: 4.1 } };
  const body = { title: 'How far it holds', measurement, template, priors, cuts: { kappaMax: 0.25 } };
  const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, body);
  await page.goto(`${url}/notebooks/${id}`);
});
afterAll(() => browser.close());

const words = async (section: string) =>
  (await page.locator(`section#${section}`).innerText()).replace(/\s+/g, ' ');

describe('what the page says of accuracy before anything is fitted', () => {
  it('recommends as many powers of κ as the notebook’s own bins need, and warns of the two that are set', async () => {
    const figure = page.getByRole('img', { name: /^Error of the amplitude by the highest κ kept/ });
    await page.locator('section#template summary', { hasText: 'How far in κ it holds' }).click();
    await figure.waitFor();
    const said = await words('template');
    // At μ = 4, vertex 1, three powers reach κ = 0.17 at 1 % on bins from 0.001 (derived by us); these go to 0.25.
    expect(said).toMatch(/Recommended for bins up to κ = 0\.2\d*: four powers of κ in the background/);
    expect(said).toMatch(
      /With the background as set \(κ and κ²\) the template alone misses the amplitude by more than its whole size/,
    );
    await page.getByLabel('For a field of').selectOption({ index: 0 });
    expect(await words('template')).toContain('the amplitude of a field of μ = 3.9');
  });

  it('says how often intervals hold the truth with these mocks', async () => {
    const row = page
      .locator('section#measurement')
      .getByRole('row', { name: /t with matched prior, as chosen/ });
    await page.locator('summary', { hasText: 'What intervals are worth' }).click();
    await row.waitFor();
    const [covered] = (await row.innerText()).match(/\d\d\.\d(?= %)/) ?? [];
    expect(Math.abs(Number(covered) - 68)).toBeLessThan(2);
  });

  it('reads the same in one column', async () => {
    await page.setViewportSize({ width: 390, height: 844 });
    expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(390);
    await page.setViewportSize({ width: 1440, height: 900 });
    expect(analyst.faults).toEqual([]);
  });
});
