import type { Browser, Locator, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { seriousFindings, sidewaysScroll } from './accessible';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signIn } from './fitted-notebook';

const { url } = inject('instance');

let browser: Browser;
let first: Visit;
let second: Visit;
let place: string;

beforeAll(async () => {
  browser = await launchBrowser();
  [first, second] = [await visit(browser), await visit(browser, { width: 390, height: 844 })];
  await signIn(first.page, url, 'analyst@demo.beatnote.example');
  await signIn(second.page, url, 'lead@demo.beatnote.example');
  // A notebook of the test's own, so that no other test meets its revisions.
  const group = new URL(first.page.url()).pathname;
  const measured = await ask<{ id: string; name: string }[]>(first.page, 'GET', `${group}/measurements`);
  const { id } = await ask<{ id: string }>(first.page, 'POST', `${group}/notebooks`, {
    title: 'Shared by two',
    measurement: measured.find(({ name }) => name === 'Larkfield wide strip')?.id,
    template: { id: 'free-phase', options: { fields: 1, background: [1, 2] } },
  });
  place = `/notebooks/${id}`;
  for (const { page } of [first, second]) await page.goto(`${url}${place}`);
  for (const { page } of [first, second]) {
    await page.getByText(/Also here:/).waitFor();
    for (const name of ['measurement', 'priors'] as const) await opened(page, name);
  }
});
afterAll(async () => {
  await ask(second.page, 'POST', `${place}/archive`);
  await browser.close();
});

const section = (page: Page, name: string): Locator => page.locator(`section#${name}`);

/** On a phone all sections but one begin folded. */
async function opened(page: Page, name: string): Promise<void> {
  const title = section(page, name).locator('h2 button');
  if ((await title.getAttribute('aria-expanded')) === 'false') await title.click();
}

const revision = async (): Promise<number> =>
  (await ask<{ revision: number }>(first.page, 'GET', place)).revision;

const highest = (page: Page) => section(page, 'measurement').getByLabel(/^Highest/);
const save = (page: Page, name: string) =>
  section(page, name).getByRole('button', { name: /^Save as revision/ });

/** Writes a cut into the form of section 1 and leaves the field, as a person would. */
async function cut(page: Page, value: string): Promise<void> {
  await highest(page).fill(value);
  await highest(page).press('Tab');
}

/** The steps stand on each other, in this order. */
describe('two people at one notebook', () => {
  it('are told of each other', async () => {
    expect(await first.page.locator('main').innerText()).toContain('Also here: lead');
    expect(await second.page.locator('main').innerText()).toContain('Also here: analyst');
  });

  it('see what the other saved within two seconds, without a reload', async () => {
    const loads = second.loads();
    await cut(first.page, '0.2');
    await save(first.page, 'measurement').click();
    await expect.poll(revision).toBe(2);
    await expect.poll(() => highest(second.page).inputValue(), { timeout: 2_000 }).toBe('0.2');
    expect(second.loads()).toBe(loads);
  });

  it('keep unsaved changes of one section while the other saves another', async () => {
    await cut(second.page, '0.15');
    const width = section(first.page, 'priors').getByLabel('background κ, sd');
    await width.fill('4');
    await width.press('Tab');
    await save(first.page, 'priors').click();
    await expect.poll(revision).toBe(3);
    await expect
      .poll(() => section(second.page, 'priors').getByLabel('background κ, sd').inputValue(), {
        timeout: 2_000,
      })
      .toBe('4');
    expect(await highest(second.page).inputValue()).toBe('0.15');
    expect(await second.page.getByText(/while you edited revision/).count()).toBe(0);
    await save(second.page, 'measurement').click();
    await expect.poll(revision).toBe(4);
    await expect.poll(() => highest(first.page).inputValue(), { timeout: 2_000 }).toBe('0.15');
  });

  it('are shown both versions where both changed one section, and theirs can be taken', async () => {
    await cut(second.page, '0.12');
    await cut(first.page, '0.1');
    await save(first.page, 'measurement').click();
    await expect.poll(revision).toBe(5);
    const told = section(second.page, 'measurement');
    await told.getByText('Revision 5 was saved by analyst').waitFor({ timeout: 2_000 });
    expect(await highest(second.page).inputValue()).toBe('0.12');
    const sides = (await told.getByRole('table', { name: 'Both sides' }).innerText()).replace(/\s+/g, ' ');
    expect(sides).toContain('Revision 5');
    expect(sides).toMatch(/0\.1 0\.12/);
    expect(await seriousFindings(second.page, '#measurement')).toEqual([]);
    expect(await sidewaysScroll(second.page)).toBeLessThanOrEqual(0);
    await told.getByRole('button', { name: 'Take revision 5' }).click();
    await expect.poll(() => highest(second.page).inputValue()).toBe('0.1');
    expect(await revision()).toBe(5);
  });

  it('can keep their own, which becomes the next revision; the other stays in the record', async () => {
    await cut(second.page, '0.12');
    await cut(first.page, '0.18');
    await save(first.page, 'measurement').click();
    await expect.poll(revision).toBe(6);
    await section(second.page, 'measurement')
      .getByRole('button', { name: 'Save yours as revision 7' })
      .click();
    await expect.poll(revision).toBe(7);
    await expect.poll(() => highest(first.page).inputValue(), { timeout: 2_000 }).toBe('0.12');
    const { cuts } = await ask<{ cuts: object }>(first.page, 'GET', `${place}/revisions/6`);
    expect(cuts).toMatchObject({ kappaMax: 0.18 });
  });

  it('read the record of it, compare two revisions and bring one back', async () => {
    const { page } = second;
    await page.goto(`${url}${place}/revisions`);
    await page.getByRole('table', { name: 'Revisions' }).waitFor();
    expect(await page.getByRole('table', { name: 'Revisions' }).innerText()).toMatch(/7\s*stands/);
    expect(await seriousFindings(page)).toEqual([]);
    expect(await sidewaysScroll(page)).toBeLessThanOrEqual(0);
    const compared = page.getByRole('table', { name: 'What changed from revision 6 to revision 7' });
    await expect
      .poll(async () => (await compared.innerText()).replace(/\s+/g, ' '))
      .toMatch(/Highest κ .*0\.18 .*0\.12/);
    await page.getByRole('button', { name: 'read revision 6' }).click();
    await page.getByRole('button', { name: 'Bring revision 6 back' }).click();
    await page.getByRole('button', { name: 'Bring revision 6 back' }).click();
    await expect.poll(revision).toBe(8);
    await expect.poll(() => highest(first.page).inputValue(), { timeout: 2_000 }).toBe('0.18');
  });

  it('have met no console error and no failing answer', () => {
    for (const { faults } of [first, second]) expect(faults).toEqual([]);
  });
});
