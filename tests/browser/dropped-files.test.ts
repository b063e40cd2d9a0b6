import { readFileSync } from 'node:fs';
import path from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { gzip } from '../lib/measurements/binary-files';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);
const folder = path.resolve(import.meta.dirname, '../data/measurements/files');
const read = (name: string) => readFileSync(path.join(folder, name));

let browser: Browser;
let person: Visit;
let page: Page;
let group: string;
let measurement: string;
let notebook: string;

const text = () => page.locator('main').innerText();
const meanings = () => page.getByRole('region', { name: 'First rows of the file' });

/** Drops a file on the page as the browser does it, and takes the one before out. */
async function drop(name: string, bytes: Uint8Array): Promise<void> {
  const before = page.getByRole('button', { name: /^Leave out/ });
  while ((await before.count()) > 0) await before.first().click();
  await expect.poll(text).toContain('The columns stand here once a file is read.');
  const data = await page.evaluateHandle(
    ([called, base64]) => {
      const transfer = new DataTransfer();
      const content = Uint8Array.from(atob(base64), (letter) => letter.charCodeAt(0));
      transfer.items.add(new File([content], called));
      return transfer;
    },
    [name, Buffer.from(bytes).toString('base64')] as const,
  );
  await page
    .getByRole('group', { name: 'Choose or drop files' })
    .dispatchEvent('drop', { dataTransfer: data });
  await meanings().waitFor({ timeout: 15_000 });
}

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  await signInBy(page, links['analyst@demo.beatnote.example']);
  group = new URL(page.url()).pathname;
  await page.goto(`${url}${group}/measurements/new`);
});
afterAll(() => browser.close());

describe('files dropped on the page', () => {
  it.each([
    ['table.txt', 'hash_comments_whitespace.txt', (bytes: Uint8Array) => bytes],
    ['table.csv', 'clean.csv', (bytes: Uint8Array) => bytes],
    ['table.ecsv', 'basic.ecsv', (bytes: Uint8Array) => bytes],
    ['table.fits', 'table.fits', (bytes: Uint8Array) => bytes],
    ['table.fits.gz', 'table.fits', gzip],
    ['table.npy', 'structured.npy', (bytes: Uint8Array) => bytes],
  ])('%s is read with its columns recognised, and nothing stops it', async (name, source, change) => {
    await drop(name, change(read(source)));
    await expect.poll(text, { timeout: 15_000 }).toContain('Nothing stops the upload');
    expect(await text()).toContain('40 rows');
    expect(await meanings().locator('option:checked').allInnerTexts()).toEqual(
      expect.arrayContaining([
        'k_long, the soft mode',
        'k_short',
        'shape function S',
        'standard error of S or B',
      ]),
    );
  });

  it('table.npz without names waits until its columns are mapped by hand, and is stored', async () => {
    await drop('table.npz', read('compressed.npz'));
    await expect.poll(text).toContain('4 columns without names');
    for (const [j, role] of ['kLong', 'kShort', 'S', 'sigma'].entries()) {
      await meanings().locator(`select[name=meaning-${j}]`).selectOption(role);
    }
    await expect.poll(text, { timeout: 15_000 }).toContain('Nothing stops the upload');
    await page.getByLabel('Name', { exact: true }).fill('Dropped');
    await page.getByRole('button', { name: 'Store version 1' }).click();
    await page.waitForURL(/\/measurements\/[0-9a-f-]{36}$/);
    measurement = new URL(page.url()).pathname.split('/')[2];
  });

  it('a bispectrum asks for its power spectrum and units, and is stored as S with them', async () => {
    await page.goto(`${url}${group}/measurements/new`);
    const rows = ['k1,k2,k3,B,sigma_B', '0.2,0.2,0.004,-3.1e-6,1e-6', '0.15,0.2,0.08,2.5e-8,1e-9'];
    await drop('bispectrum.csv', Buffer.from(rows.join('\n')));
    await expect.poll(text).toContain('the amplitude A_s, the tilt n_s of the power spectrum are missing');
    await page.getByLabel(/^Amplitude/).fill('2.1e-9');
    await page.getByLabel(/^Tilt/).fill('0.965');
    await page.getByLabel(/^Pivot/).fill('0.05');
    await page.getByLabel('Unit of the wavenumbers').selectOption('h/Mpc');
    await page.getByLabel('Unit of B').selectOption('Mpc^6');
    await expect.poll(text, { timeout: 15_000 }).toContain('some are in units with h and others without');
    await page.getByLabel('h', { exact: true }).fill('0.7');
    await expect.poll(text, { timeout: 15_000 }).toContain('Nothing stops the upload');
    await page.getByLabel('Name', { exact: true }).fill('From B');
    await page.getByRole('button', { name: 'Store version 1' }).click();
    await page.waitForURL(/\/measurements\/[0-9a-f-]{36}$/);
    await expect.poll(text).toContain('The bispectrum B in Mpc^6 with k in h/Mpc');
    const { points } = await ask<{ points: { S: number[] } }>(page, 'GET', new URL(page.url()).pathname);
    // The formula of docs/measurement-files.md with 40 digits in mpmath.
    expect(points.S[0] / -1.3325707157615161).toBeCloseTo(1, 12);
  });
});

describe('a bin is left out', () => {
  it('by a click on its point and a reason, and drawn hollow with it', async () => {
    const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, {
      title: 'With a bin left out',
      measurement,
      template: { id: 'background', options: { background: [1, 2] } },
    });
    notebook = `/notebooks/${id}`;
    await page.goto(`${url}${notebook}`);
    const section = page.locator('#measurement');
    await section.locator('[data-point="6"] .reach').click();
    const bin = section.getByLabel('Leave out a bin');
    expect(await bin.inputValue()).toBe('7');
    expect(await section.getByRole('button', { name: 'Leave it out' }).getAttribute('aria-disabled')).toBe(
      'true',
    );
    await section.getByLabel('Why it is left out').fill('beam not modelled');
    await section.getByRole('button', { name: 'Leave it out' }).click();
    await expect.poll(text).toContain('one bin left out: 7 (beam not modelled)');
    expect(await section.locator('.pt.hollow').count()).toBe(1);
    expect(await section.locator('[data-point="6"] title').textContent()).toBe('Left out: beam not modelled');
    await section.getByRole('button', { name: /^Save/ }).first().click();
    await expect.poll(async () => (await ask<{ revision: number }>(page, 'GET', notebook)).revision).toBe(2);
    const { cuts, bins } = await ask<{ cuts: object; bins: object }>(page, 'GET', notebook);
    expect(cuts).toMatchObject({ excluded: [{ bin: 7, reason: 'beam not modelled' }] });
    expect(bins).toEqual({ kept: 39, all: 40 });
  });

  it('and put back from its row, by keyboard', async () => {
    const section = page.locator('#measurement');
    await section.getByRole('button', { name: 'Put back bin 7' }).focus();
    await page.keyboard.press('Enter');
    await expect.poll(() => section.locator('.pt.hollow').count()).toBe(0);
    await expect.poll(text).not.toContain('left out: 7');
  });

  it('while nothing failed in the browser', () => {
    expect(person.faults).toEqual([]);
  });
});
