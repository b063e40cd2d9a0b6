import { readFileSync } from 'node:fs';
import path from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import type { Browser, Locator, Page } from 'playwright-core';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, inject, it } from 'vitest';
import { faultsInAllLooks } from './accessible';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);

type Part = 'web' | 'mariadb' | 'redis' | 'objects';
const pidIn = (file: string) => Number(readFileSync(path.join(state, file), 'utf8').split('\n')[0]);
const supervisor = () => pidIn('supervisor.pid');
let stopped: number | null = null;

/** Ends one process of the instance; the supervisor holds still, so that nothing starts it again before `bringBack`. */
function takeAway(part: Part): void {
  process.kill(supervisor(), 'SIGSTOP');
  process.kill(pidIn(`pid/${part}`), 'SIGKILL');
}

const well = async (): Promise<boolean> => {
  const answer = await fetch(`${url}/api/v1/health`).catch(() => null);
  return answer?.ok === true && ((await answer.json()) as { status: string }).status === 'ok';
};

async function bringBack(): Promise<void> {
  if (stopped !== null) process.kill(stopped, 'SIGCONT');
  stopped = null;
  process.kill(supervisor(), 'SIGCONT');
  const until = Date.now() + 60_000;
  while (!(await well())) {
    if (Date.now() > until) throw new Error('The instance isn’t well a minute after everything was let on.');
    await sleep(100);
  }
}

let browser: Browser;
let person: Visit;
let page: Page;
let group: string;
let place: string;
let fit: string;
beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  // Waits of a minute pass when the test says so.
  await page.clock.install();
  await signInBy(page, links['lead@demo.beatnote.example']);
  group = new URL(page.url()).pathname;
  const measured = await ask<{ id: string; name: string }[]>(page, 'GET', `${group}/measurements`);
  const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, {
    title: 'Through outages',
    measurement: measured.find(({ name }) => name === 'Larkfield wide strip')?.id,
    template: { id: 'free-phase', options: { fields: 1, background: [1, 2] } },
  });
  place = `/notebooks/${id}`;
  fit = (
    await ask<{ id: string }>(page, 'POST', `${place}/fits`, { maxDraws: 1_000_000, target: { ess: 1e9 } })
  ).id;
});
afterAll(async () => {
  await bringBack();
  await ask(page, 'POST', `/fits/${fit}/stop`);
  // The worker puts its block down first; the notebook goes then, so that no other test meets it.
  const running = async () =>
    (await ask<{ status: string }>(page, 'GET', `/fits/${fit}`)).status !== 'stopped';
  while (await running()) await sleep(100);
  await ask(page, 'POST', `${place}/archive`);
  await browser.close();
});
beforeEach(async () => {
  // What the server drew stands before its script follows the stream.
  const stream = page.waitForResponse((answer) => answer.url().includes('/events?'));
  await page.goto(`${url}${place}`);
  await stream;
  await page.getByText(/Fit 1, four replicas, is (warming up|sampling)/).waitFor({ timeout: 60_000 });
});
afterEach(bringBack);

const chains = () => page.locator('#chains');
const serverLine = (): Locator =>
  chains().getByRole('heading', { name: 'The server can’t be reached; the fit goes on without this page.' });
const databaseLine = (): Locator =>
  chains().getByRole('heading', { name: 'The database is away; the fit goes on when it is back.' });
const highest = () => page.locator('#measurement').getByLabel(/^Highest/);
const save = () => page.locator('#measurement').getByRole('button', { name: /^Save as revision/ });
const main = () => page.locator('main').innerText();
const revision = async () => (await ask<{ revision: number }>(page, 'GET', place)).revision;
const draws = async () => {
  const { progress } = await ask<{ progress: { warmup: number; draws: number } }>(
    page,
    'GET',
    `/fits/${fit}`,
  );
  return progress.warmup + progress.draws;
};

async function cut(value: string): Promise<void> {
  await highest().fill(value);
  await highest().press('Tab');
}

describe('a notebook that is open while a part of the instance is away for a minute', () => {
  it('says one plain line while the web server is away, and is whole again by itself', async () => {
    const loads = person.loads();
    const before = await draws();
    await cut('0.2');
    takeAway('web');
    await serverLine().waitFor({ timeout: 10_000 });
    await save().click();
    await page
      .getByText('The server can’t be reached. Nothing was changed; try again in a moment.')
      .waitFor();
    await page.clock.fastForward(60_000);
    expect(await serverLine().count()).toBe(1);
    expect(await chains().innerText()).toMatch(/This page follows by itself, and tries again/);
    expect(await main()).toContain('What you write stays here until then.');
    expect(await highest().inputValue()).toBe('0.2');
    await bringBack();
    await page.clock.fastForward(31_000);
    await serverLine().waitFor({ state: 'detached' });
    const now = await revision();
    await save().click();
    await expect.poll(revision).toBe(now + 1);
    await expect.poll(draws, { timeout: 30_000 }).toBeGreaterThan(before);
    expect(person.loads()).toBe(loads);
  });

  it('notices a web server that holds still without a word, although the connection stands', async () => {
    const loads = person.loads();
    stopped = pidIn('pid/web');
    process.kill(stopped, 'SIGSTOP');
    await page.clock.fastForward(41_000);
    await serverLine().waitFor({ timeout: 5_000 });
    await bringBack();
    await page.clock.fastForward(31_000);
    await serverLine().waitFor({ state: 'detached' });
    await expect.poll(main).not.toContain('can’t be reached');
    expect(person.loads()).toBe(loads);
  });

  it('says the same plain line of the database, also where the stream is opened anew meanwhile', async () => {
    const loads = person.loads();
    await cut('0.15');
    takeAway('mariadb');
    await databaseLine().waitFor({ timeout: 15_000 });
    // The page is put behind another one for more than a minute, and taken up again.
    const hide = (hidden: boolean) =>
      page.evaluate((value) => {
        Object.defineProperty(document, 'hidden', { value, configurable: true });
        document.dispatchEvent(new Event('visibilitychange'));
      }, hidden);
    await hide(true);
    await page.clock.fastForward(61_000);
    const refused = page.waitForResponse((response) => response.url().includes('/events'));
    await hide(false);
    expect((await refused).status()).toBe(503);
    await page.clock.fastForward(2_000);
    await expect.poll(() => chains().innerText()).toMatch(/tries again/);
    expect(await databaseLine().count()).toBe(1);
    expect(await serverLine().count()).toBe(0);
    expect(await main()).not.toMatch(/lost/i);
    await save().click();
    await page.getByText('The database is away for a moment. Nothing was lost; try again shortly.').waitFor();
    expect(await highest().inputValue()).toBe('0.15');
    await bringBack();
    await page.clock.fastForward(31_000);
    await databaseLine().waitFor({ state: 'detached' });
    const now = await revision();
    await save().click();
    await expect.poll(revision).toBe(now + 1);
    expect(person.loads()).toBe(loads);
  });

  it.each(['redis', 'objects'] as const)('works on as if nothing were while %s is away', async (part) => {
    takeAway(part);
    await page.reload();
    await page.waitForLoadState('load');
    const now = await revision();
    await cut(part === 'redis' ? '0.18' : '0.16');
    await save().click();
    await expect.poll(revision).toBe(now + 1);
    expect(await main()).not.toMatch(/can’t be reached|is away/);
  });
});

describe('a page that is asked for while the database is away', () => {
  it('says so, asks again when its button is pressed, and is drawn by itself when it is back', async () => {
    const opened = await Promise.all([1, 2].map(() => person.context.newPage()));
    const [patient, impatient] = opened;
    for (const each of opened) await each.clock.install();
    takeAway('mariadb');
    for (const each of opened) {
      await each.goto(`${url}${group}`);
      await each.getByRole('heading', { name: 'This page could not be drawn' }).waitFor();
      await each.getByRole('heading', { name: 'The database is away' }).waitFor();
    }
    expect(await patient.locator('main').innerText()).toContain('What is stored is kept');
    await expect.poll(() => patient.locator('main').innerText()).toMatch(/The next try is in \w+ seconds?\./);
    // A try that comes too early asks what is away, changes nothing, and the next one is told.
    const looked = impatient.waitForRequest('**/api/v1/health');
    await impatient.getByRole('button', { name: 'Draw it again' }).click();
    await looked;
    await expect.poll(() => impatient.locator('main').innerText()).toMatch(/The next try is in/);
    await patient.clock.fastForward(60_000);
    await patient.getByRole('heading', { name: 'The database is away' }).waitFor();
    expect(await faultsInAllLooks(patient)).toEqual([]);
    await bringBack();
    for (const each of opened) {
      await each.clock.fastForward(9_000);
      await each.getByRole('heading', { level: 1, name: 'Demo group' }).waitFor();
      await each.close();
    }
  });
});
