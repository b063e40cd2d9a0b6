import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, demoNotebook, signIn } from './fitted-notebook';

const { url } = inject('instance');

let browser: Browser;
let analyst: Visit;
beforeAll(async () => {
  browser = await launchBrowser();
  analyst = await visit(browser);
  await signIn(analyst.page, url, 'analyst@demo.beatnote.example');
});
afterAll(() => browser.close());

it('shows what the stream tells of a fit although the first read of it is late', async () => {
  const { page } = analyst;
  const notebook = await demoNotebook(page);
  const settings = { maxDraws: 200_000, target: { ess: 1e7 } };
  const { id } = await ask<{ id: string }>(page, 'POST', `${notebook}/fits`, settings);
  // Late enough that the stream has told of the fit before, and more than once after.
  await page.route(`**/api/v1/fits/${id}`, async (route) => {
    await new Promise((resolve) => setTimeout(resolve, 2_500));
    await route.continue();
  });
  await page.goto(`${url}${notebook}`);
  const chains = page.locator('#chains');
  await expect.poll(() => chains.innerText(), { timeout: 40_000, interval: 500 }).toMatch(/sampling/);
  const draws = async () =>
    Number((await chains.innerText()).match(/([\d\s]+) of 200\s000/)?.[1].replace(/\D/g, ''));
  const before = await draws();
  await expect.poll(draws, { timeout: 40_000, interval: 500 }).toBeGreaterThan(before);
  await ask(page, 'POST', `/fits/${id}/stop`, {});
  expect(analyst.faults).toEqual([]);
});
