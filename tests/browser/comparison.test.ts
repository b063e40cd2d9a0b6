import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { AxeResults } from 'axe-core';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { freshLinks } from './instance';
import { ask, signInBy } from './fitted-notebook';

const { url, state } = inject('instance');
const links = freshLinks(state);
const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

let browser: Browser;
let analyst: Visit;
let page: Page;
/** Path of a notebook of its own, so that no other test's notebook gets fits. */
let place: string;

interface Listed {
  id: string;
  version: number;
}

beforeAll(async () => {
  browser = await launchBrowser();
  analyst = await visit(browser);
  page = analyst.page;
  await signInBy(page, links['analyst@demo.beatnote.example']);
  const group = new URL(page.url()).pathname;
  const measurements = await ask<Listed[]>(page, 'GET', `${group}/measurements`);
  const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, {
    title: 'How many fields does it take?',
    measurement: measurements[measurements.length - 1].id,
    template: { id: 'free-phase', options: { fields: 1 } },
  });
  place = `/notebooks/${id}`;
});
afterAll(() => browser.close());

const section = (of: Page = page) => of.locator('section#comparison');
const read = async (of: Page = page) => (await section(of).innerText()).replace(/\s+/g, ' ');

describe('the comparison of a notebook', () => {
  it('waits for fits, and starts them by one command from the keyboard', async () => {
    await page.goto(`${url}${place}#comparison`);
    await expect.poll(() => read(), { timeout: 20_000 }).toContain('waits for');
    await section().getByRole('button', { name: 'Compare the number of fields' }).press('Enter');
    await expect.poll(() => read(), { timeout: 20_000 }).toContain('Fits 1, 2 and 3 were queued.');
  });

  it('fills the table as the fits end, without a reload', { timeout: 240_000 }, async () => {
    const loads = analyst.loads();
    await expect.poll(async () => (await read()).includes('under way'), { timeout: 200_000 }).toBe(false);
    const table = section().getByRole('table', { name: 'Evidence against the number of fields' });
    await expect.poll(() => table.getByRole('row').count(), { timeout: 20_000 }).toBe(4);
    const none = (await table.getByRole('row', { name: /^No field/ }).innerText()).replace(/\s+/g, ' ');
    expect(none).toContain('exact');
    const two = (await table.getByRole('row', { name: /^Two fields/ }).innerText()).replace(/\s+/g, ' ');
    expect(two).toMatch(/± 0\.\d+ \(\d+ dof\)/);
    expect(analyst.loads()).toBe(loads);
  });

  it('draws the Bayes factors, and how they move with the prior’s width', async () => {
    await section()
      .getByRole('img', { name: /^ln Bayes factor against no field by the number/ })
      .waitFor();
    await section()
      .getByRole('img', { name: /^ln Bayes factor by the width of the prior/ })
      .waitFor();
    expect(await read()).toContain('is integrated exactly');
    expect(await read()).toContain('Bayes factors depend on the amplitude prior’s width');
  });

  it('queues nothing more when it is asked again', async () => {
    await section().getByRole('button', { name: 'Compare the number of fields' }).click();
    await expect
      .poll(() => read(), { timeout: 20_000 })
      .toMatch(/Fits [123], [123] and [123] were there already\./);
  });

  it('leaves the notebook’s settings as they were', async () => {
    const notebook = await ask<{ template: { options: { fields: number } }; fits: unknown[] }>(
      page,
      'GET',
      place,
    );
    expect([notebook.template.options.fields, notebook.fits.length]).toEqual([1, 3]);
  });

  it.each([
    { width: 1440, colorScheme: 'light' },
    { width: 1440, colorScheme: 'dark' },
    { width: 390, colorScheme: 'light' },
    { width: 390, colorScheme: 'dark' },
  ] as const)(
    'has no serious accessibility finding and no sideways scroll, $width px, $colorScheme',
    async (look) => {
      const person = await visit(browser, look);
      await person.context.addCookies((await analyst.context.storageState()).cookies);
      await person.page.goto(`${url}${place}#comparison`);
      const fold = section(person.page).getByRole('button', { name: /Comparison/ });
      if ((await fold.getAttribute('aria-expanded')) === 'false') await fold.click();
      await section(person.page).getByRole('table').first().waitFor();
      await section(person.page).getByRole('img').first().waitFor();
      await person.page.evaluate(axe);
      const { violations } = await person.page.evaluate(() =>
        (globalThis as unknown as { axe: { run(place: string): Promise<AxeResults> } }).axe.run(
          '#comparison',
        ),
      );
      expect(
        violations
          .filter(({ impact }) => impact === 'serious' || impact === 'critical')
          .map(({ id, help, nodes }) => `${id}: ${help}: ${nodes[0].target.join(' ')}`),
      ).toEqual([]);
      const over = await person.page.evaluate(
        () => document.documentElement.scrollWidth - document.documentElement.clientWidth,
      );
      expect(over).toBeLessThanOrEqual(0);
      const shots = process.env.BEATNOTE_SHOTS;
      if (shots) {
        const path = `${shots}/comparison-${look.width}-${look.colorScheme}.png`;
        await section(person.page).screenshot({ path });
      }
      expect(person.faults).toEqual([]);
      await person.context.close();
    },
  );

  it('is read by a referee, who is offered no command', async () => {
    const referee = await visit(browser);
    await signInBy(referee.page, links['referee@demo.beatnote.example']);
    await referee.page.goto(`${url}${place}#comparison`);
    await expect.poll(() => read(referee.page), { timeout: 20_000 }).toContain('Evidence against the number');
    expect(
      await section(referee.page)
        .getByRole('button', { name: /Compare the number/ })
        .count(),
    ).toBe(0);
    await referee.context.close();
  });

  it('has met no console error and no failing answer', () => {
    expect(analyst.faults).toEqual([]);
  });
});
