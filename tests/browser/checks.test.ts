import { readFileSync } from 'node:fs';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { seriousFindings, sidewaysScroll } from './accessible';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signIn } from './fitted-notebook';

const { url } = inject('instance');
/** Without a field, so that a data set takes milliseconds. */
const template = { id: 'background', options: { background: [1, 2] } };

let browser: Browser;
let lead: Visit;
let page: Page;
let place: string;

/** A notebook of the test's own, erased again, so that no other test meets it or its checks: for that a lead signs in. */
beforeAll(async () => {
  browser = await launchBrowser();
  lead = await visit(browser);
  page = lead.page;
  await signIn(page, url, 'lead@demo.beatnote.example');
  const group = new URL(page.url()).pathname;
  const [{ id: measurement }] = await ask<{ id: string }[]>(page, 'GET', `${group}/measurements`);
  const body = { title: 'Checked', measurement, template };
  const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, body);
  place = `/notebooks/${id}`;
});
afterAll(async () => {
  await page.evaluate((path) => fetch(path, { method: 'DELETE' }), `/api/v1${place}`);
  await browser.close();
});

const section = (on: Page = page) => on.locator('section#checks');
const read = async (on: Page = page) => (await section(on).innerText()).replace(/\s+/g, ' ');
const contents = async () =>
  (await page.getByRole('navigation', { name: 'Sections' }).innerText()).replace(/\s+/g, ' ');
const named = (label: RegExp, on: Page = page) => section(on).getByRole('img', { name: label });

async function check(datasets: number, draws: number) {
  await section().getByLabel('Draws of each posterior').fill(String(draws));
  const field = section().getByLabel('Simulated data sets');
  await field.fill(String(datasets));
  await field.press('Enter');
}

/** The steps stand on each other, in this order. */
describe('the check of calibration', () => {
  it('stands after the comparison, with what it does and its defaults', async () => {
    await page.goto(`${url}${place}#checks`);
    await expect.poll(() => read()).toContain('No value of the measurement enters');
    expect(await section().getByLabel('Simulated data sets').inputValue()).toBe('200');
    expect(await contents()).toMatch(/Comparison .* Checks .*not checked.* Statement/);
  });

  it('refuses bad numbers at their fields', async () => {
    await check(49, 100);
    await expect.poll(() => read()).toContain('One less than a multiple of 20: 19, 39');
    expect(await read()).toContain('50');
    expect(await contents()).toContain('not checked');
  });

  it('is started by keyboard, tells how far it is, is stopped, goes on, and ends without a page load', async () => {
    const loads = lead.loads();
    await check(1000, 19);
    const stop = section().getByRole('button', { name: 'Stop the check' });
    await stop.press('Enter', { timeout: 20_000 });
    await expect.poll(() => read(), { timeout: 30_000 }).toMatch(/stopped after \d+ of 1000 data sets/);
    await check(60, 19);
    await expect.poll(() => read(), { timeout: 90_000 }).toContain('Calibrated within the band');
    expect(await contents()).toMatch(/Checks .*calibrated/);
    expect(lead.loads()).toBe(loads);
  });

  it('shows ranks, distribution, coverage and what it can’t see', async () => {
    await expect.poll(() => named(/^Histograms of the ranks of 3 quantities/).count()).toBe(1);
    expect(await named(/^Distribution of the ranks/).count()).toBe(1);
    const words = await read();
    expect(words).toContain('over 60 simulated data sets');
    expect(words).toContain('an interval of 95 % holds 85.5 %');
    expect(words).toMatch(/c1 .*expected .*from, to/);
    expect(words).toContain('can’t show here');
    expect(words).toContain('Check 2, shown');
    expect(words).toContain('Show check 1');
  });

  it('gives its numbers as a file', async () => {
    const figure = section()
      .locator('figure')
      .filter({ has: page.getByRole('img', { name: /^Histograms/ }) });
    await figure.locator('summary').press('Enter');
    const download = page.waitForEvent('download');
    await figure.getByRole('button', { name: /CSV/ }).press('Enter');
    const rows = readFileSync(await (await download).path(), 'utf8')
      .trim()
      .split('\n');
    expect(rows[0]).toBe('from,to,lower,upper,log likelihood,c1,c2');
    expect(rows).toHaveLength(21);
    const total = rows.slice(1).reduce((sum, row) => sum + Number(row.split(',')[5]), 0);
    expect(total).toBe(60);
  });

  it('is marked as of an earlier revision once the notebook says something else', async () => {
    const body = { revision: 1, cuts: { kappaMax: 0.1 } };
    await page.evaluate(
      ([path, json]) =>
        fetch(path, { method: 'PATCH', headers: { 'Content-Type': 'application/json' }, body: json }),
      [`/api/v1${place}`, JSON.stringify(body)] as const,
    );
    await expect
      .poll(() => read(), { timeout: 20_000 })
      .toContain('it says nothing of the posterior as it is set now');
    expect(await contents()).toMatch(/Checks .*of revision 1/);
  });

  it.each([
    { name: 'wide and light', width: 1440, colorScheme: 'light' },
    { name: 'a phone in the dark', width: 390, colorScheme: 'dark' },
  ] as const)('is accessible and never scrolls sideways, $name', async (look) => {
    const reader = await visit(browser, look);
    await reader.context.addCookies((await lead.context.storageState()).cookies);
    await reader.page.goto(`${url}${place}#checks`);
    await expect
      .poll(() => named(/^Distribution of the ranks/, reader.page).count(), { timeout: 30_000 })
      .toBe(1);
    expect(await sidewaysScroll(reader.page)).toBeLessThanOrEqual(0);
    expect(await seriousFindings(reader.page, 'section#checks')).toEqual([]);
    expect(reader.faults).toEqual([]);
    await reader.context.close();
  });
});
