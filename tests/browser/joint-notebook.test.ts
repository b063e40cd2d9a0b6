import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { faultsInAllLooks } from './accessible';
import { launchBrowser, visit } from './browser';
import { ask, fitted, signIn } from './fitted-notebook';

const { url } = inject('instance');
const template = { id: 'background', options: { background: [1, 2] } };

let browser: Browser;
let page: Page;
let place: string;
let names: string[];

/** A notebook of the test's own on one measurement, archived at the end: its fit keeps it from being erased. */
beforeAll(async () => {
  browser = await launchBrowser();
  page = (await visit(browser)).page;
  await signIn(page, url, 'lead@demo.beatnote.example');
  const group = new URL(page.url()).pathname;
  const [first, second] = await ask<{ id: string; name: string }[]>(page, 'GET', `${group}/measurements`);
  names = [first.name, second.name];
  const body = { title: 'Two measurements', measurement: first.id, template };
  const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, body);
  place = `/notebooks/${id}`;
});
afterAll(async () => {
  await page.evaluate((path) => fetch(path, { method: 'POST' }), `/api/v1${place}/archive`);
  await browser.close();
});

const section = (id: string) => page.locator(`section#${id}`);
const words = async (id: string) => (await section(id).innerText()).replace(/\s+/g, ' ');
const panel = (id: string, start: string, name: string) =>
  section(id).getByRole('img', { name: `${start} of ${name}` });

/** The steps stand on each other, in this order. */
describe('a notebook on several measurements', () => {
  it('takes a further measurement with a cut of its own, by the form of section 1', async () => {
    await page.goto(`${url}${place}#measurement`);
    const choice = section('measurement').getByLabel('Fit another measurement with it');
    await expect.poll(() => choice.locator('option').count()).toBeGreaterThan(1);
    await choice.selectOption({ index: 1 + (await optionOf(names[1])) });
    await expect.poll(() => words('measurement')).toContain('Two measurements in one fit');
    await section('measurement').getByLabel(`Highest κ of ${names[1]}`).fill('0.12');
    await section('measurement').getByRole('button', { name: /^Save/ }).click();
    await expect.poll(() => words('priors'), { timeout: 20_000 }).toContain(names[1]);
    await page.reload();
    await expect.poll(() => words('measurement')).toContain(`2. ${names[1]}, version 1:`);
    expect(await section('measurement').getByLabel(`Highest κ of ${names[1]}`).inputValue()).toBe('0.12');
  });

  it('draws each measurement’s points and prediction in a panel of its own, before and after a fit', async () => {
    await page.goto(`${url}${place}#template`);
    const prediction = 'Prediction at the values of the sliders over the points';
    for (const name of names) await expect.poll(() => panel('template', prediction, name).count()).toBe(1);
    await fitted(page, place, { seed: 3, replicas: 2, maxDraws: 400, target: { ess: 1e9 } });
    await page.goto(`${url}${place}#posterior`);
    await page.reload();
    const best = 'Best draw and range of predictions over the points';
    for (const name of names) {
      await expect.poll(() => panel('posterior', best, name).count(), { timeout: 20_000 }).toBe(1);
    }
  });

  it('is sound at 1440 and at 390 pixels, light and dark', { timeout: 60_000 }, async () => {
    expect(await faultsInAllLooks(page)).toEqual([]);
    await page.setViewportSize({ width: 1440, height: 900 });
  });

  it('says in its revisions what was added, and takes it out again', async () => {
    await page.goto(`${url}${place}/revisions`);
    await expect.poll(() => page.locator('main').innerText()).toContain(`${names[1]}, version 1, κ to 0.12`);
    await page.goto(`${url}${place}#measurement`);
    await section('measurement')
      .getByRole('button', { name: `take ${names[1]} out` })
      .click();
    await section('measurement').getByRole('button', { name: /^Save/ }).click();
    await expect.poll(() => words('measurement')).not.toContain(`2. ${names[1]}`);
    await expect.poll(() => words('priors')).not.toContain(names[1]);
  });
});

/** Where a measurement stands among the others that can be added. */
async function optionOf(name: string): Promise<number> {
  const labels = await section('measurement')
    .getByLabel('Fit another measurement with it')
    .locator('option')
    .allInnerTexts();
  return labels.slice(1).findIndex((label) => label.startsWith(`${name}, `));
}
