import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { AxeResults } from 'axe-core';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);
const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');
const title = 'Two mixed fields in the Larkfield deep field';

let browser: Browser;
let analyst: Visit;
let page: Page;
let place: string;

beforeAll(async () => {
  browser = await launchBrowser();
  analyst = await visit(browser);
  page = analyst.page;
  await signInBy(page, links['analyst@demo.beatnote.example']);
  place = (await page.getByRole('link', { name: title }).first().getAttribute('href')) ?? '';
});
afterAll(() => browser.close());

const statement = (of: Page = page) => of.locator('section#statement');
const read = async (of: Page = page) => (await statement(of).innerText()).replace(/\s+/g, ' ');
const revision = async (): Promise<number> => {
  const answer = await page.request.get(`${url}/api/v1${place}`);
  return ((await answer.json()) as { revision: number }).revision;
};

/** The steps stand on each other, in this order. */
describe('the statement of the demo’s beat', () => {
  it('shows numbers of its fit once that has ended, without a reload', async () => {
    await page.goto(`${url}${place}#statement`);
    const loads = analyst.loads();
    await expect.poll(() => read(), { timeout: 150_000 }).toMatch(/μ₁ = 1\.9\d* \(68 %: 1\.9/);
    expect(analyst.loads()).toBe(loads);
    expect(await read()).toContain('It is the group’s statement, not the program’s.');
    expect(await read()).not.toContain('no value');
  });

  it('links each number to the fit that it comes from', async () => {
    const link = statement().getByRole('link', { name: /median with its 68 % interval, mass 1, fit 1/ });
    expect(await link.getAttribute('href')).toBe('?fit=1#posterior');
    const loads = analyst.loads();
    await link.click();
    const address = () => page.evaluate(() => window.location.search + window.location.hash);
    await expect.poll(address).toBe('?fit=1#posterior');
    // The router writes addresses a little later: it stays.
    await page.waitForTimeout(1_000);
    expect(await address()).toBe('?fit=1#posterior');
    expect(analyst.loads()).toBe(loads);
    expect(
      await page.locator('#posterior h2 button').evaluate((title) => title === document.activeElement),
    ).toBe(true);
    const top = () => page.locator('#posterior').evaluate((each) => each.getBoundingClientRect().top);
    await expect.poll(async () => Math.abs(await top())).toBeLessThan(120);
    await page.goBack();
    await expect.poll(address).toBe('#statement');
  });

  it('is written by keyboard alone: a number from the menu lands at the caret, and the preview follows', async () => {
    await statement().getByRole('button', { name: 'Change the words' }).press('Enter');
    const words = statement().getByLabel('Words');
    await words.focus();
    await page.keyboard.press('Control+End');
    await page.keyboard.type(' The background has c₁ = ');
    // Other tests add fits to this notebook; the newest is offered first.
    await statement().getByLabel('Number of').selectOption({ label: 'fit 1' });
    await statement().getByLabel('What').selectOption({ label: 'c1, background κ' });
    await statement().getByLabel('Given as').selectOption('mean');
    await statement().getByRole('button', { name: 'Insert' }).press('Enter');
    expect(await words.evaluate((area) => area === document.activeElement)).toBe(true);
    await page.keyboard.type('.');
    expect(await words.inputValue()).toMatch(/c₁ = \{mean c1 of fit 1\}\.$/);
    await expect.poll(() => read(), { timeout: 20_000 }).toMatch(/c₁ = −0\.\d+ ± 0\.\d+/);
  });

  it('names the place of a reference to nothing, and can’t be saved with it', async () => {
    const words = statement().getByLabel('Words');
    const before = await words.inputValue();
    await words.focus();
    await page.keyboard.press('Control+End');
    await page.keyboard.type(' And {mu7 of fit 1}');
    await expect
      .poll(() => read(), { timeout: 20_000 })
      .toContain('Fit 1 has no quantity mu7; it has mu1, mu2');
    expect(await read()).toMatch(/Line 5, character \d+:/);
    expect(
      await statement()
        .getByRole('button', { name: /^Save as/ })
        .getAttribute('aria-disabled'),
    ).toBe('true');
    await words.fill(before);
    await expect.poll(() => read(), { timeout: 20_000 }).not.toContain('mu7');
  });

  it('is saved as a revision, and the words before can still be read', async () => {
    const before = await revision();
    await statement()
      .getByRole('button', { name: /^Save as/ })
      .press('Enter');
    await expect
      .poll(() => read(), { timeout: 20_000 })
      .toContain(`Written by analyst in revision ${before + 1}`);
    await expect.poll(() => read(), { timeout: 20_000 }).toMatch(/c₁ = −0\.\d+ ± 0\.\d+/);
    await statement()
      .getByRole('button', { name: /^revision \d+$/ })
      .first()
      .press('Enter');
    await expect.poll(() => read(), { timeout: 20_000 }).toContain('Words as they stood in revision');
    expect(await read()).not.toContain('The background has');
    await statement().getByRole('button', { name: 'Back to the words that stand' }).press('Enter');
    await expect.poll(() => read(), { timeout: 20_000 }).toContain('The background has');
  });

  it('marks its numbers when a setting is changed after the fit', async () => {
    const json = { revision: await revision(), priors: { c1: { kind: 'normal', mean: 0, sd: 4 } } };
    const answer = await page.request.patch(`${url}/api/v1${place}`, {
      data: json,
      headers: { origin: url },
    });
    expect(answer.status()).toBe(200);
    await expect.poll(() => read(), { timeout: 30_000 }).toContain('of revision 1');
    const back = { revision: await revision(), priors: { c1: { kind: 'normal', mean: 0, sd: 3 } } };
    await page.request.patch(`${url}/api/v1${place}`, { data: back, headers: { origin: url } });
  });

  it('is read by a referee, who is offered no change', async () => {
    const referee = await visit(browser, { width: 390, colorScheme: 'dark' });
    await signInBy(referee.page, links['referee@demo.beatnote.example']);
    await referee.page.goto(`${url}${place}#statement`);
    await expect.poll(() => read(referee.page), { timeout: 20_000 }).toContain('beat against each other');
    expect(await statement(referee.page).getByRole('button', { name: 'Change the words' }).count()).toBe(0);
    expect(await found(referee.page)).toEqual([]);
    expect(await sideways(referee.page)).toBeLessThanOrEqual(0);
    expect(referee.faults).toEqual([]);
    await referee.context.close();
  });

  it.each([
    { width: 1440, colorScheme: 'dark' },
    { width: 390, colorScheme: 'light' },
  ] as const)(
    'has no serious accessibility finding while it is written, $width px, $colorScheme',
    async (look) => {
      const person = await visit(browser, look);
      await person.context.addCookies((await analyst.context.storageState()).cookies);
      await person.page.goto(`${url}${place}#statement`);
      await statement(person.page).getByRole('button', { name: 'Change the words' }).click();
      await statement(person.page).getByLabel('Words').waitFor();
      expect(await found(person.page)).toEqual([]);
      expect(await sideways(person.page)).toBeLessThanOrEqual(0);
      await person.context.close();
    },
  );

  it('has met no console error and no failing answer', () => {
    expect(analyst.faults).toEqual([]);
  });
});

async function found(of: Page): Promise<string[]> {
  await of.waitForLoadState('load');
  await of.evaluate(axe);
  const { violations } = await of.evaluate(() =>
    (globalThis as unknown as { axe: { run(place: string): Promise<AxeResults> } }).axe.run('#statement'),
  );
  return violations
    .filter(({ impact }) => impact === 'serious' || impact === 'critical')
    .map(({ id, help, nodes }) => `${id}: ${help}: ${nodes[0].target.join(' ')}`);
}

const sideways = (of: Page) =>
  of.evaluate(() => document.documentElement.scrollWidth - document.documentElement.clientWidth);
