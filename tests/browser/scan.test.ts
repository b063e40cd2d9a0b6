import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { AxeResults } from 'axe-core';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signIn } from './fitted-notebook';

const { url } = inject('instance');
const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

const oneField = {
  id: 'free-phase',
  options: { fields: 1, amplitudes: 'amplitude-phase', background: [1, 2] },
};
const twoFields = {
  id: 'locked-squeezed',
  options: { fields: 2, vertex: 2, phases: 'locked', background: [1, 2] },
};

let browser: Browser;
let analyst: Visit;
let page: Page;
const places: Record<'one' | 'two' | 'none', string> = { one: '', two: '', none: '' };

/** Notebooks of the test's own on the demo's simulated measurements, so that no other test meets their scans. */
beforeAll(async () => {
  browser = await launchBrowser();
  analyst = await visit(browser);
  page = analyst.page;
  await signIn(page, url, 'analyst@demo.beatnote.example');
  const group = new URL(page.url()).pathname;
  const measured = await ask<{ id: string; name: string }[]>(page, 'GET', `${group}/measurements`);
  const make = async (name: string, template: object, priors: object) => {
    const measurement = measured.find((each) => each.name === name)?.id;
    const body = { title: `Scan of ${name}`, measurement, template, priors };
    const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, body);
    return `/notebooks/${id}`;
  };
  places.one = await make('Larkfield wide strip', oneField, {});
  places.none = await make('Larkfield southern cap', oneField, {});
  const coupling = { g: { kind: 'normal', mean: 0, sd: 2000 } };
  places.two = await make('Larkfield deep field', twoFields, coupling);
});
afterAll(() => browser.close());

const section = (on: Page = page) => on.locator('section#scan');
const read = async (on: Page = page) => (await section(on).innerText()).replace(/\s+/g, ' ');
const named = (label: RegExp, on: Page = page) => section(on).getByRole('img', { name: label });

/** Scans by keyboard alone, with as many nulls. */
async function scan(nulls: number, on: Page = page) {
  const field = section(on).getByLabel('Nulls');
  await field.focus();
  await field.fill(String(nulls));
  await field.press('Enter');
}

/** The steps stand on each other, in this order. */
describe('the scan of one field', () => {
  it('is preceded by what the bins can see, and by defaults with their reason', async () => {
    await page.goto(`${url}${places.one}#scan`);
    await expect.poll(() => read()).toContain('In reach are masses from about');
    expect(await named(/^Spectral window/).count()).toBe(1);
    expect(await read()).toContain('The priors of the masses begin at');
    expect(await section().getByLabel('From μ').inputValue()).not.toBe('');
    expect(await read()).not.toContain('Log of looks');
  });

  it('refuses an empty range at its field', async () => {
    const end = section().getByLabel('To μ');
    const before = await end.inputValue();
    await end.fill('0.02');
    await scan(400);
    await expect.poll(() => read()).toMatch(/muMin must be below muMax|is empty/);
    await end.fill(before);
  });

  it('is started by keyboard, tells how far it is, and finds the mass 4.6 that was put in within a fifth of the resolution', async () => {
    const loads = analyst.loads();
    await scan(100_000);
    await expect
      .poll(() => read(), { timeout: 20_000, interval: 100 })
      .toMatch(/\d+ % done|waits for a worker/);
    await expect.poll(() => read(), { timeout: 90_000 }).toMatch(/The best frequency is μ = 4\.[3-8]\d+/);
    expect(analyst.loads()).toBe(loads);
    const words = await read();
    expect(words).toContain('none of 100 000 nulls rose as high');
    expect(words).toContain('A p below 1/(100 000 + 1) = 10⁻⁵ can’t be told');
    expect(words).toContain('χ² with two degrees of freedom');
    expect(words).toContain('The local p is not the significance of a find');
    expect(words).toContain('One look for a signal');
    expect(words).toContain('1 %');
  });

  it('can be laid under the sliders', async () => {
    const template = page.locator('section#template');
    await template.getByRole('button', { name: 'Best of scan 1' }).press('Enter');
    await expect
      .poll(() => template.getByRole('slider', { name: /mass 1/i }).inputValue())
      .toMatch(/^4\.[3-8]/);
  });

  it('stays in the log beside the next one, and either can be shown', async () => {
    await section().getByLabel('To μ').fill('3');
    await scan(400);
    await expect.poll(() => read(), { timeout: 90_000 }).toContain('Scan 2, shown');
    await expect.poll(() => read()).toContain('2 looks for a signal were made');
    await section().getByRole('button', { name: 'Show scan 1' }).press('Enter');
    await expect.poll(() => read(), { timeout: 20_000 }).toMatch(/The best frequency is μ = 4\.[3-8]/);
    expect(await read()).toContain('Scan 1, shown');
  });

  it('gives its numbers as a table and as a file', async () => {
    const figure = section()
      .locator('figure')
      .filter({ has: page.getByRole('img', { name: /^Rise of χ² and evidence/ }) });
    await figure.locator('summary').press('Enter');
    const download = page.waitForEvent('download');
    await figure.getByRole('button', { name: /CSV/ }).press('Enter');
    const file = await (await download).path();
    expect(readFileSync(file, 'utf8')).toMatch(/^mu,delta chi2,ln evidence\n/);
  });
});

describe('a scan that finds nothing', () => {
  it('is told calmly, with an F distribution where the covariance is from mocks', async () => {
    await page.goto(`${url}${places.none}#scan`);
    await scan(400);
    await expect.poll(() => read(), { timeout: 90_000 }).toContain('Nothing stands out');
    const words = await read();
    expect(words).toContain('That is a result like any other');
    expect(words).toMatch(/an F distribution for two added coefficients/);
    expect(words).toMatch(/p = 0\.\d+: \d+ of 400 nulls rose as high/);
  });
});

describe('the scan of two fields', () => {
  it('has the plane with its best pair, and says why no formula is quoted', async () => {
    await page.goto(`${url}${places.two}#scan`);
    await scan(200);
    await expect.poll(() => named(/over pairs of frequencies/).count(), { timeout: 170_000 }).toBe(1);
    const words = await read();
    expect(words).toContain('Two fields together fit best at');
    expect(words).toContain('counts too many');
    expect(words).not.toContain('Gross and Vitells');
    const plane = named(/over pairs of frequencies/);
    await expect.poll(() => plane.locator('path.cor-pos').count()).toBeGreaterThan(2);
    const template = page.locator('section#template');
    await template.getByRole('button', { name: 'Best of scan 1' }).press('Enter');
    const mass = (name: RegExp) => template.getByRole('slider', { name }).inputValue();
    expect(Number(await mass(/mass 1/i))).toBeLessThan(Number(await mass(/mass 2/i)));
  });

  it.each([
    { name: 'wide and light', width: 1440, colorScheme: 'light' },
    { name: 'a phone in the dark', width: 390, colorScheme: 'dark' },
  ] as const)('is accessible and never scrolls sideways, $name', async (look) => {
    const reader = await visit(browser, look);
    await reader.context.addCookies((await analyst.context.storageState()).cookies);
    await reader.page.goto(`${url}${places.two}#scan`);
    await expect
      .poll(() => named(/over pairs of frequencies/, reader.page).count(), { timeout: 30_000 })
      .toBe(1);
    const [content, window] = await reader.page.evaluate(() => [
      document.documentElement.scrollWidth,
      document.documentElement.clientWidth,
    ]);
    expect(content).toBeLessThanOrEqual(window);
    await reader.page.evaluate(axe);
    const { violations } = await reader.page.evaluate(() =>
      (globalThis as unknown as { axe: { run(): Promise<AxeResults> } }).axe.run(),
    );
    expect(violations.filter(({ impact }) => impact === 'serious' || impact === 'critical')).toEqual([]);
    expect(reader.faults).toEqual([]);
    await reader.context.close();
  });
});
