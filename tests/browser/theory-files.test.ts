import { readFileSync } from 'node:fs';
import path from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, fitted, signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);
const folder = path.resolve(import.meta.dirname, '../data/measurements');
const points = readFileSync(path.join(folder, 'one-field.csv'));
const rows = points
  .toString('utf8')
  .split('\n')
  .filter((line) => /^\d/.test(line))
  .map((line) => line.split(',').map(Number));

/** Each bin sees a tenth of its neighbours; the theory has a bin more at either end. */
const windowText = [
  [rows[0][0] / 1.1, ...rows.map(([lo]) => lo), rows[rows.length - 1][1]],
  [rows[0][0], ...rows.map(([, hi]) => hi), rows[rows.length - 1][1] * 1.1],
  ...rows.map((_, i) =>
    Array.from({ length: rows.length + 2 }, (_unused, j) =>
      j === i + 1 ? 0.8 : Math.abs(j - i - 1) === 1 ? 0.1 : 0,
    ),
  ),
]
  .map((line) => line.join(' '))
  .join('\n');
const columnText = ['gravity', ...rows.map(([, , kappa]) => Math.sin(9 * kappa))].join('\n');

let browser: Browser;
let person: Visit;
let page: Page;
let group: string;
let notebook: string;

const text = () => page.locator('main').innerText();

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  await signInBy(page, links['analyst@demo.beatnote.example']);
  group = new URL(page.url()).pathname;
});
afterAll(() => browser.close());

describe('a window and columns dropped beside the points', () => {
  it('are recognised by their names, checked, stored, and drawn on the measurement’s page', async () => {
    await page.goto(`${url}${group}/measurements/new`);
    await page.locator('input[name=files]').setInputFiles([
      { name: 'one-field.csv', mimeType: 'text/csv', buffer: points },
      { name: 'window.txt', mimeType: 'text/plain', buffer: Buffer.from(windowText) },
      { name: 'columns.csv', mimeType: 'text/csv', buffer: Buffer.from(columnText) },
    ]);
    await expect
      .poll(text, { timeout: 15_000 })
      .toContain('One column to be fitted beside the template: gravity.');
    expect(await text()).toContain('every row adds up to 1');
    expect(await page.getByLabel('What window.txt holds').inputValue()).toBe('window');
    await page.getByLabel('Name', { exact: true }).fill('Through a window');
    await page.getByRole('button', { name: 'Store version 1' }).click();
    await page.waitForURL(/\/measurements\/[0-9a-f-]{36}$/);
    await expect.poll(text).toContain('A window takes');
    expect(await page.getByRole('img', { name: 'Window of Through a window' }).count()).toBe(1);
    expect(await page.locator('.fig-svg rect.cor-pos').count()).toBeGreaterThanOrEqual(3 * rows.length);
  });

  it('a file of columns with the name of a parameter is refused before anything is stored', async () => {
    await page.goto(`${url}${group}/measurements/new`);
    await page.locator('input[name=files]').setInputFiles([
      { name: 'one-field.csv', mimeType: 'text/csv', buffer: points },
      {
        name: 'columns.csv',
        mimeType: 'text/csv',
        buffer: Buffer.from(columnText.replace('gravity', 'mu1')),
      },
    ]);
    await expect.poll(text, { timeout: 15_000 }).toContain('mu1 is the name of a parameter');
    expect(await page.getByRole('button', { name: 'Store version 1' }).getAttribute('aria-disabled')).toBe(
      'true',
    );
  });

  it('give each column a prior, which can be switched off and on, and a row in the posterior', async () => {
    const measurements = await ask<{ id: string; name: string }[]>(page, 'GET', `${group}/measurements`);
    const measurement = measurements.find(({ name }) => name === 'Through a window')?.id;
    const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, {
      title: 'Through a window',
      measurement,
      template: { id: 'background', options: { background: [1, 2] } },
    });
    notebook = `/notebooks/${id}`;
    const fit = await fitted(page, notebook, { seed: '1', maxDraws: 1000 });
    await page.goto(`${url}${notebook}?fit=${fit}`);
    const posterior = page.locator('#posterior');
    await expect.poll(() => posterior.innerText(), { timeout: 15_000 }).toContain('gravity');
    const priors = page.locator('#priors');
    await priors.getByRole('button', { name: 'Leave it out, column gravity' }).click();
    await priors.getByRole('button', { name: 'Fit it, column gravity' }).waitFor();
    await priors.getByRole('button', { name: /^Save/ }).first().click();
    await expect
      .poll(async () => (await ask<{ priors: Record<string, object> }>(page, 'GET', notebook)).priors.gravity)
      .toEqual({ kind: 'fixed', value: 0 });
  });

  it('while nothing failed in the browser', () => {
    expect(person.faults).toEqual([]);
  });
});
