import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signIn, signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);
const word = Date.now().toString(36);
const address = `newcomer-${word}@people.example`;
const groupName = `Administered ${word}`;

let browser: Browser;
let admin: Visit;
let newcomer: Visit;
let page: Page;
let place: string;

beforeAll(async () => {
  browser = await launchBrowser();
  [admin, newcomer] = [await visit(browser), await visit(browser)];
  page = admin.page;
  await signInBy(page, links['admin@demo.beatnote.example'], /\/$/);
  // Somebody of the test's own, so that nobody else is shut out; their group holds a notebook that can be fitted.
  await signIn(newcomer.page, url, address, /\/$/);
  await newcomer.page.getByLabel('Name of the group').fill(groupName);
  await newcomer.page.keyboard.press('Enter');
  await newcomer.page.waitForURL('**/groups/*');
  const group = new URL(newcomer.page.url()).pathname;
  const measurement = await newcomer.page.evaluate(async (where) => {
    const bins = Array.from({ length: 12 }, (_, i) => `${0.004 * 1.4 ** i},${Math.sin(i) / 10},0.2`);
    const form = new FormData();
    form.set('file', new File([`kappa,S,sigma\n${bins.join('\n')}\n`], 'points.csv'));
    form.set('meta', JSON.stringify({ name: 'A short one', simulated: true }));
    const answer = await fetch(`/api/v1${where}/measurements`, { method: 'POST', body: form });
    return ((await answer.json()) as { id: string }).id;
  }, group);
  const { id } = await ask<{ id: string }>(newcomer.page, 'POST', `${group}/notebooks`, {
    title: 'Queued',
    measurement,
    // Slow enough to be seen in the queue, which is read again every few seconds.
    template: { id: 'free-phase', options: { fields: 2, amplitudes: 'amplitude-phase', background: [1] } },
  });
  place = `/notebooks/${id}`;
  await page.goto(`${url}/administration`);
  await page.waitForLoadState('networkidle');
});
afterAll(() => browser.close());

const region = (name: string) => page.getByRole('region', { name, exact: true }).last();
const rowOf = (name: string, text: string) => region(name).getByRole('row', { name: new RegExp(text) });
const said = (words: string) => page.getByRole('status').filter({ hasText: words }).waitFor();
const focused = () => page.evaluate(() => document.activeElement?.textContent ?? '');
const asked = async (question: RegExp) => expect.poll(focused).toMatch(question);

async function find(text: string): Promise<void> {
  await page.getByLabel('Find by address').fill(text);
}

/** The steps stand on each other, in this order. */
describe('the site administrator', () => {
  it('sees every service answer, the worker alive and the tables by size', async () => {
    const services = region('Services');
    for (const name of ['database', 'queue and messages', 'object store', 'mail'])
      expect(await services.getByRole('row', { name: new RegExp(name) }).innerText()).toMatch(/answers/);
    expect(await region('Workers').getByRole('row').count()).toBeGreaterThan(1);
    expect(await region('Tables of the database').innerText()).toContain('fit_blocks');
    expect(await page.locator('main').innerText()).not.toContain('Queued');
  });

  it('finds a user by a part of their address, and is told how many there are', async () => {
    await find(`newcomer-${word}`);
    await page.getByText('One user found.').waitFor();
    expect(await rowOf('Users', address).innerText()).toContain(`${groupName}, lead`);
    await find('nobody-has-this');
    await page.getByText('Nobody’s address contains this.').waitFor();
    await find(address);
    await rowOf('Users', address).waitFor();
  });

  it('ends somebody’s sessions: their browser has to sign in anew, and the row has none to end', async () => {
    await rowOf('Users', address)
      .getByRole('button', { name: /^End sessions/ })
      .click();
    await asked(new RegExp(`^End one session of ${address}`));
    await page.getByRole('button', { name: 'Leave them' }).click();
    await expect.poll(focused).toMatch(/^End sessions/);
    expect((await newcomer.page.request.get(`${url}/api/v1/me`)).status()).toBe(200);
    await rowOf('Users', address)
      .getByRole('button', { name: /^End sessions/ })
      .click();
    await page.getByRole('button', { name: 'End the sessions' }).click();
    await said(`The sessions of ${address} are ended.`);
    expect((await newcomer.page.request.get(`${url}/api/v1/me`)).status()).toBe(401);
    await expect.poll(() => rowOf('Users', address).innerText()).toMatch(/0, 0/);
    expect(
      await rowOf('Users', address)
        .getByRole('button', { name: /^End sessions/ })
        .count(),
    ).toBe(0);
  });

  it('shuts somebody out, who gets no further by a new link, and lets them in again', async () => {
    await rowOf('Users', address)
      .getByRole('button', { name: /^Shut out/ })
      .click();
    await asked(new RegExp(`^Shut ${address} out\\?`));
    await page.getByRole('button', { name: 'Shut them out' }).click();
    await said(`${address} is shut out.`);
    expect(await rowOf('Users', address).innerText()).toContain('shut out');
    await expect.poll(focused).toMatch(/^Let in/);
    const other = await visit(browser);
    await other.page.goto(`${url}/sign-in`);
    await other.page.getByLabel('E-mail address').fill(address);
    await other.page.getByRole('button', { name: 'Mail me a link' }).click();
    await other.page.waitForURL((there) => there.pathname !== '/sign-in');
    expect((await other.page.request.get(`${url}/api/v1/me`)).status()).toBe(401);
    await other.context.close();
    await rowOf('Users', address)
      .getByRole('button', { name: /^Let in/ })
      .click();
    await page.getByRole('button', { name: 'Let them in again' }).click();
    await said(`${address} may sign in again.`);
    await signIn(newcomer.page, url, address);
  });

  it('can’t shut themselves out', async () => {
    await find('admin@demo');
    await expect.poll(() => rowOf('Users', 'admin@demo').count()).toBe(1);
    expect(
      await rowOf('Users', 'admin@demo')
        .getByRole('button', { name: /^Shut out/ })
        .count(),
    ).toBe(0);
  });

  it('sets how many fits a group may run at once, is told of a number that can’t be, and takes it back', async () => {
    const limits = 'Fits of a group at once';
    const standard = (await rowOf(limits, 'every other group').getByRole('cell').nth(0).innerText()).trim();
    await expect.poll(() => rowOf(limits, groupName).count(), { timeout: 15_000 }).toBe(1);
    await rowOf(limits, groupName)
      .getByRole('button', { name: /^Change/ })
      .click();
    await asked(/^How many fits may run at once for /);
    const field = page.getByRole('textbox', { name: 'Fits at once' });
    await field.fill('0');
    await page.getByRole('button', { name: 'Set the limit' }).click();
    await page.getByText('The limit was not set').waitFor();
    await field.fill('3');
    await page.getByRole('button', { name: 'Set the limit' }).click();
    await said(`From the next fit on, 3 at once for ${groupName}.`);
    await expect.poll(focused).toMatch(/^Change/);
    const stored = async () =>
      (
        await ask<{ groups: { name: string; limit: number | null }[] }>(page, 'GET', '/administration/limits')
      ).groups.find(({ name }) => name === groupName)?.limit;
    expect(await stored()).toBe(3);
    await rowOf(limits, groupName)
      .getByRole('button', { name: /^Take back/ })
      .click();
    await said(`No limit of its own holds any more for ${groupName}.`);
    expect(await stored()).toBeNull();
    expect((await rowOf(limits, groupName).getByRole('cell').nth(0).innerText()).trim()).toBe(standard);
  });

  it('sees a fit come into the queue and leave it, without its science and without a reload', async () => {
    const loads = admin.loads();
    const { id } = await ask<{ id: string }>(newcomer.page, 'POST', `${place}/fits`, {
      maxDraws: 1_000_000,
      target: { ess: 1e9 },
    });
    const row = rowOf('Fits and checks that wait or run', groupName);
    await row.waitFor();
    expect(await row.innerText()).toContain(place.slice('/notebooks/'.length).slice(0, 8));
    await ask(newcomer.page, 'POST', `/fits/${id}/stop`);
    // A fit stops at the end of a block, and the block takes as long as the machine lets it.
    await expect.poll(() => row.count(), { timeout: 90_000 }).toBe(0);
    expect(admin.loads()).toBe(loads);
  });

  it('has met no console error and no failing answer but the refused limit', () => {
    expect(admin.faults.filter((fault) => !/\b422\b/.test(fault))).toEqual([]);
  });
});

describe('whoever doesn’t administer the site', () => {
  it('finds no such page, in the words of any other that is missing, and no such API', async () => {
    const other = newcomer.page;
    await other.goto(`${url}/administration`);
    const refused = await other.locator('main').innerText();
    await other.goto(`${url}/nothing-here`);
    expect(await other.locator('main').innerText()).toBe(refused);
    const get = async (path: string) =>
      (await other.request.get(`${url}/api/v1/administration${path}`)).status();
    for (const path of ['', '/users', '/limits', '/storage']) expect(await get(path), path).toBe(404);
    const { userId } = (
      await ask<{ users: { userId: string }[] }>(page, 'GET', `/administration/users?search=lead@demo`)
    ).users[0];
    const statuses = await other.evaluate(async (user) => {
      const sent = async (method: string, path: string, body?: object) =>
        (
          await fetch(`/api/v1/administration/${path}`, {
            method,
            headers: { 'Content-Type': 'application/json' },
            body: body && JSON.stringify(body),
          })
        ).status;
      return [
        await sent('PATCH', `users/${user}`, { disabled: true }),
        await sent('DELETE', `users/${user}/sessions`),
        await sent('PATCH', 'limits', { groupId: null, fits: 1 }),
      ];
    }, userId);
    expect(statuses).toEqual([404, 404, 404]);
  });
});
