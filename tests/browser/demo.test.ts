import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import type { Group, Statement } from '@/lib/schemas';
import { measurements, notebooks } from '@/scripts/demo/scenario';
import { launchBrowser, visit, type Visit } from './browser';
import { signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);

let browser: Browser;
let person: Visit;
let page: Page;
let home: string;

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  await signInBy(page, links['lead@demo.beatnote.example']);
  home = new URL(page.url()).pathname;
});
afterAll(() => browser.close());

const ask = async <T>(place: string): Promise<T> =>
  (await (await page.request.get(`${url}/api/v1${place}`)).json()) as T;
const listed = async () => {
  const group = await ask<Group>(home);
  return notebooks.map((wanted) => ({
    wanted,
    found: group.notebooks.find(({ title }) => title === wanted.title),
  }));
};

describe('the tour', () => {
  it('has three simulated surveys and four notebooks on the group’s home', async () => {
    const text = await page.locator('main').innerText();
    for (const { name } of measurements) expect(text).toContain(name);
    for (const { title } of notebooks) expect(text).toContain(title);
    for (const { found } of await listed()) expect(found?.simulated).toBe(true);
  });

  it('comes to its fits by itself, each with its gate met', async () => {
    // The demo's own fit of a notebook is its first; other tests start further ones.
    const states = async () =>
      Promise.all(
        (await listed()).flatMap(({ wanted, found }) =>
          wanted.seed === null || !found
            ? []
            : [
                ask<{ fits: { number: number; status: string }[] }>(`/notebooks/${found.id}`).then(
                  ({ fits }) => fits.find(({ number }) => number === 1)?.status,
                ),
              ],
        ),
      );
    await expect
      .poll(states, { timeout: 170_000, interval: 1_000 })
      .toEqual(notebooks.filter(({ seed }) => seed !== null).map(() => 'converged'));
  });

  it('says the null in numbers, as plainly as the beat', async () => {
    for (const { wanted, found } of await listed()) {
      if (wanted.statement === null || !found) continue;
      const statement = await ask<Statement>(`/notebooks/${found.id}/statement`);
      const values = statement.paragraphs.flat().flatMap((piece) => (piece.kind === 'value' ? [piece] : []));
      expect(values.length).toBeGreaterThan(2);
      for (const { value, reference } of values) expect(value, reference).not.toBeNull();
    }
    await page.getByRole('link', { name: 'No oscillation in the Larkfield southern cap' }).first().click();
    await page.waitForURL('**/notebooks/**');
    const words = page.locator('section#statement');
    await expect.poll(() => words.innerText(), { timeout: 20_000 }).toContain('we find no oscillation');
    expect((await words.innerText()).replace(/\s+/g, ' ')).toMatch(/below A = 0\.\d+/);
  });

  it('has met no console error and no failing answer', () => {
    expect(person.faults).toEqual([]);
  });
});
