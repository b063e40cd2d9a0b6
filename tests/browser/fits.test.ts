import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it, vi } from 'vitest';
import { seriousFindings, sidewaysScroll } from './accessible';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signIn } from './fitted-notebook';

const { url } = inject('instance');

interface FitOfIt {
  id: string;
  number: number;
  status: string;
  progress: { draws: number; maxDraws: number };
}

/** The demo's own fits may still be in line where the instance was started just now. */
const patience = { timeout: 140_000, interval: 300 };

let browser: Browser;
let wide: Visit;
let phone: Visit;
let page: Page;
let place: string;

beforeAll(async () => {
  browser = await launchBrowser();
  wide = await visit(browser);
  page = wide.page;
  await signIn(page, url, 'lead@demo.beatnote.example');
  const group = new URL(page.url()).pathname;
  const measured = await ask<{ id: string; name: string }[]>(page, 'GET', `${group}/measurements`);
  const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, {
    title: 'More fits than a group may run',
    measurement: measured.find(({ name }) => name === 'Larkfield wide strip')?.id,
    template: { id: 'free-phase', options: { fields: 1, background: [1, 2] } },
  });
  place = `/notebooks/${id}`;
  // A target that isn't met: the two run until they are stopped, and are as many as a group may run.
  for (let n = 0; n < 2; n += 1) {
    await ask(page, 'POST', `${place}/fits`, { replicas: 8, maxDraws: 1_000_000, target: { ess: 1e9 } });
  }
  for (const number of [1, 2]) {
    await vi.waitFor(async () => expect((await fit(number)).status).toMatch(/warming-up|sampling/), patience);
  }
  phone = await visit(browser, { width: 390, height: 844, colorScheme: 'dark' });
  await phone.context.addCookies((await wide.context.storageState()).cookies);
});
afterAll(async () => {
  try {
    for (const number of [1, 2]) {
      const { id, status } = await fit(number);
      if (status !== 'stopped') await ask(page, 'POST', `/fits/${id}/stop`);
    }
    await vi.waitFor(() => ask(page, 'POST', `${place}/archive`), patience);
  } finally {
    await browser.close();
  }
});

async function fit(number: number): Promise<FitOfIt> {
  const { fits } = await ask<{ fits: { id: string; number: number }[] }>(page, 'GET', place);
  return ask<FitOfIt>(page, 'GET', `/fits/${fits.find((each) => each.number === number)?.id ?? ''}`);
}

const chains = (of: Page = page) => of.locator('section#chains');
const read = async (of: Page = page) => (await chains(of).innerText()).replace(/\s+/g, ' ');
const press = (name: string, of: Page = page) =>
  chains(of).getByRole('button', { name, exact: true }).press('Enter');

/** Stops the fit that is shown and waits until the page says that it has. */
async function stop(number: number, of: Page = page): Promise<void> {
  await press('Stop and keep', of);
  await expect
    .poll(() => read(of), { timeout: 60_000 })
    .toMatch(new RegExp(`Fit ${number}, eight replicas, was stopped; its draws are kept\\.`));
}

async function clean(of: Page, part: string): Promise<void> {
  expect(await seriousFindings(of, part)).toEqual([]);
  expect(await sidewaysScroll(of)).toBeLessThanOrEqual(0);
}

/** The steps stand on each other, in this order. */
describe('more fits than a group may run', () => {
  it('wait in a queue, each told its place and why', async () => {
    await page.goto(`${url}${place}#chains`);
    await press('Start fit 3');
    await expect
      .poll(() => read(), { timeout: 20_000 })
      .toContain('First in the queue; your group has 2 fits running, the limit.');
    await press('Start fit 4');
    await expect
      .poll(() => read(), { timeout: 20_000 })
      .toContain('Second in the queue; your group has 2 fits running, the limit.');
    expect(await read()).toContain('It keeps its place when this page is closed.');
    await clean(page, '#chains');
  });

  it('begin in their order once one that runs is stopped, without a reload', async () => {
    const loads = wide.loads();
    await press('Show fit 1');
    await stop(1);
    await press('Show fit 3');
    await expect.poll(() => read(), { timeout: 120_000 }).toMatch(/Fit 3, four replicas, has met the gate/);
    await press('Show fit 2');
    await stop(2);
    await press('Show fit 4');
    await expect.poll(() => read(), { timeout: 120_000 }).toMatch(/Fit 4, four replicas, has met the gate/);
    expect(wide.loads()).toBe(loads);
    await clean(page, '#chains');
  });
});

describe('a fit that has ended', () => {
  it.each([
    { name: 'CSV', begins: Buffer.from('replica,draw,warmup,') },
    { name: 'ECSV', begins: Buffer.from('# %ECSV 1.0') },
    { name: 'Parquet', begins: Buffer.from('PAR1') },
    { name: 'NPZ', begins: Buffer.from('PK\u0003\u0004') },
  ])('gives its samples as $name, with the checksum of its manifest', async ({ name, begins }) => {
    const { id } = await fit(4);
    const manifest = await ask<{ outputs: { name: string; sha256: string }[] }>(
      page,
      'GET',
      `/fits/${id}/manifest`,
    );
    const [download] = await Promise.all([
      page.waitForEvent('download'),
      page.getByRole('link', { name: `Samples (${name})`, exact: true }).press('Enter'),
    ]);
    const bytes = readFileSync(await download.path());
    expect(bytes.subarray(0, begins.length)).toEqual(begins);
    expect(manifest.outputs).toContainEqual(
      expect.objectContaining({
        name: `samples.${name.toLowerCase()}`,
        bytes: bytes.length,
        sha256: createHash('sha256').update(bytes).digest('hex'),
      }),
    );
  });

  it('is resumed from where it was stopped, and stopped again, on a phone', async () => {
    const before = await fit(1);
    await phone.page.goto(`${url}${place}?fit=1#chains`);
    await press('Resume', phone.page);
    await expect.poll(() => read(phone.page), { timeout: 60_000 }).toMatch(/eight replicas, is sampling/);
    await expect
      .poll(async () => (await fit(1)).progress.draws, { timeout: 60_000 })
      .toBeGreaterThan(before.progress.draws);
    await stop(1, phone.page);
    await clean(phone.page, '#chains');
  });

  it('is extended by as many draws as are asked for, told beforehand what they cost', async () => {
    const { progress } = await fit(3);
    await phone.page.goto(`${url}${place}?fit=3#chains`);
    await press('Extend', phone.page);
    await chains(phone.page).getByLabel('Draws to add, a replica').fill('500');
    expect(await read(phone.page)).toMatch(/2 000 draws in all/);
    await clean(phone.page, '#chains');
    await press('Add them', phone.page);
    await expect
      .poll(async () => (await fit(3)).progress, { timeout: 60_000 })
      .toMatchObject({ draws: progress.draws + 500, maxDraws: progress.draws + 500 });
    await expect.poll(async () => (await fit(3)).status, { timeout: 20_000 }).toBe('converged');
    await expect
      .poll(() => read(phone.page), { timeout: 20_000 })
      .toMatch(/Fit 3, four replicas, has met the gate/);
  });

  it('has met no console error and no failing answer', () => {
    for (const { faults } of [wide, phone]) expect(faults).toEqual([]);
  });
});
