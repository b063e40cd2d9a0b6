import { createHash } from 'node:crypto';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';

const { url } = inject('instance');
const data = path.resolve(import.meta.dirname, '../data/measurements');
const email = 'analyst@demo.beatnote.example';

let browser: Browser;
let person: Visit;
let page: Page;
const folder = mkdtempSync(path.join(tmpdir(), 'beatnote-walk-'));

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
});
afterAll(async () => {
  await browser.close();
  rmSync(folder, { recursive: true, force: true });
});

const section = (name: string) =>
  page.locator('section').filter({ has: page.getByRole('heading', { name, exact: false }) });

/**
 * The walk of one person from the mailed link to the downloaded samples. The steps stand on each other, in this order.
 */
describe('the main job in a browser', () => {
  it('mails a sign-in link, which the mailbox shows and whose button signs in', async () => {
    await page.goto(`${url}/sign-in`);
    await page.getByLabel('E-mail address').fill(email);
    await page.getByRole('button', { name: 'Mail me a link' }).click();
    await page.waitForURL('**/sign-in/sent**');
    await page.goto(`${url}/mailbox`);
    await page
      .locator(`a[href*="/sign-in/confirm"][href*="${encodeURIComponent(email)}"]`)
      .first()
      .click();
    await page.getByRole('button', { name: /sign in/i }).click();
    await page.waitForURL('**/groups/**');
    expect(await page.getByRole('heading', { level: 1 }).innerText()).toBe('Demo group');
  });

  it('refuses the same link a second time with a friendly page', async () => {
    const stranger = await visit(browser);
    await stranger.page.goto(`${url}/mailbox`);
    const link = stranger.page.locator(`a[href*="/sign-in/confirm"][href*="${encodeURIComponent(email)}"]`);
    await link.first().click();
    await stranger.page.getByRole('button', { name: /sign in/i }).click();
    await expect.poll(() => stranger.page.locator('main').innerText()).toMatch(/link/i);
    expect(stranger.page.url()).not.toContain('/groups/');
    expect(stranger.faults).toEqual([]);
    await stranger.context.close();
  });

  it('reads dropped files in the page, shows what it found, and stores them', async () => {
    await page.getByRole('link', { name: 'Add a measurement' }).click();
    await page.waitForURL('**/measurements/new');
    await page
      .locator('input[type=file]')
      .first()
      .setInputFiles(['two-field.csv', 'two-field-mocks.csv'].map((name) => path.join(data, name)));
    await expect
      .poll(() => page.locator('main').innerText(), { timeout: 20_000 })
      .toContain('Mocks against bins: 600 for 40');
    await page.getByLabel('Name', { exact: true }).fill('Walked measurement');
    await page.getByRole('button', { name: /^Store/ }).click();
    await page.waitForURL(/\/measurements\/[0-9a-f-]{36}$/);
    expect(await page.getByRole('heading', { level: 1 }).innerText()).toContain('Walked measurement');
  });

  it('opens a notebook with a two-field template', async () => {
    await page.getByRole('link', { name: /notebook on it/i }).click();
    await page.waitForURL('**/notebooks/new**');
    await page.getByLabel('Template').selectOption('locked-squeezed');
    await page.getByLabel('Number of fields').selectOption('2');
    await page.getByLabel('Title').fill('A walked notebook');
    await page.getByRole('button', { name: /open/i }).click();
    await page.waitForURL(/\/notebooks\/[0-9a-f-]{36}$/);
    expect(await page.locator('.katex').count()).toBeGreaterThan(0);
  });

  it('redraws the prediction while a slider moves, and changes nothing in the notebook', async () => {
    const template = section('Template');
    const caption = template.locator('figcaption').first();
    const before = await caption.innerText();
    expect(before).toMatch(/χ2? ?|χ/);
    const slider = template.getByRole('slider').first();
    await slider.focus();
    for (let i = 0; i < 5; i++) await page.keyboard.press('PageUp');
    await expect.poll(() => caption.innerText()).not.toBe(before);
    await expect.poll(() => section('Template').innerText()).toContain('revision 1');
  });

  it('saves a cut as revision 2', async () => {
    const measurement = section('Measurement');
    await measurement.getByLabel('Highest κ').fill('0.2');
    await measurement.getByRole('button', { name: /Save as revision 2/ }).click();
    await expect.poll(() => page.locator('main').innerText()).toContain('revision 2');
  });

  it('starts a fit and watches it converge live, without a reload', async () => {
    const loads = person.loads();
    await page.getByRole('button', { name: /Start fit 1/ }).click();
    const chains = section('Chains');
    await expect.poll(() => chains.innerText(), { timeout: 60_000 }).toMatch(/warming up|sampling|converged/);
    await expect.poll(() => chains.innerText(), { timeout: 150_000 }).toContain('converged');
    expect(await chains.locator('table').first().innerText()).toContain('met');
    expect(person.loads()).toBe(loads);
  });

  it('shows corner view and marginal table of the draws', async () => {
    const posterior = section('Posterior');
    await expect.poll(() => posterior.locator('svg path').count(), { timeout: 20_000 }).toBeGreaterThan(10);
    const table = await posterior.locator('table').first().innerText();
    for (const column of ['median', '68 % interval', 'MCSE']) {
      expect(table.replaceAll(/\s/g, ' ')).toContain(column);
    }
  });

  it('downloads samples whose SHA-256 is that of the manifest', async () => {
    const save = async (name: RegExp) => {
      const [download] = await Promise.all([
        page.waitForEvent('download'),
        page.getByRole('link', { name }).first().click(),
      ]);
      const file = path.join(folder, download.suggestedFilename());
      await download.saveAs(file);
      return readFileSync(file);
    };
    const samples = await save(/samples/i);
    const manifest = JSON.parse((await save(/manifest/i)).toString('utf8')) as {
      outputs: { name: string; bytes: number; sha256: string }[];
    };
    expect(manifest.outputs).toContainEqual({
      name: 'samples.csv',
      bytes: samples.length,
      sha256: createHash('sha256').update(samples).digest('hex'),
    });
    expect(samples.toString('utf8', 0, 60)).toMatch(
      /^replica,draw,warmup,log_likelihood,log_prior,mu1,mu2,theta,g/,
    );
  });

  it('has met no console error and no failing answer on the whole walk', () => {
    expect(person.faults).toEqual([]);
  });
});
