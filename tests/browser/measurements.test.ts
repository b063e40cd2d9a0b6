import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import path from 'node:path';
import type { AxeResults } from 'axe-core';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);
const data = path.resolve(import.meta.dirname, '../data/measurements');
const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

const looks = [
  { name: 'wide and light', width: 1440, colorScheme: 'light' },
  { name: 'a phone in the dark', width: 390, colorScheme: 'dark' },
] as const;

let browser: Browser;
let person: Visit;
let page: Page;
let group: string;
let measurement: string;
let notebook: string;
const name = `Shelf ${Date.now()}`;

const heads = readFileSync(path.join(data, 'two-field.csv'), 'utf8').trimEnd().split('\n');
const table = heads.filter((line) => !line.startsWith('#'));

/** The same points, the third raised by a unit, without a header and with twenty columns that mean nothing. */
function changed(): { name: string; mimeType: string; buffer: Buffer } {
  const at = table[0].split(',').findIndex((each) => each.trim() === 'S');
  const rows = table.slice(1).map((row, i) => {
    const cells = row.split(',').map((cell, j) => (i === 2 && j === at ? String(Number(cell) + 1) : cell));
    return [...cells, ...Array.from({ length: 20 }, () => '7')].join(',');
  });
  return { name: 'wide.csv', mimeType: 'text/csv', buffer: Buffer.from(rows.join('\n')) };
}

const choose = (files: Parameters<ReturnType<Page['locator']>['setInputFiles']>[0]) =>
  page.locator('input[type=file]').first().setInputFiles(files);
const text = () => page.locator('main').innerText();

async function ask<T>(method: 'GET' | 'POST', place: string, body?: unknown): Promise<T> {
  return page.evaluate(
    async ([how, where, what]) => {
      const answer = await fetch(`/api/v1${where}`, {
        method: how as string,
        headers: { 'content-type': 'application/json' },
        body: what === undefined ? undefined : JSON.stringify(what),
      });
      return answer.json() as Promise<unknown>;
    },
    [method, place, body] as const,
  ) as Promise<T>;
}

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  await signInBy(page, links['lead@demo.beatnote.example']);
  group = new URL(page.url()).pathname;
});
afterAll(() => browser.close());

describe('a measurement from file to versions', () => {
  it('shows the first rows with a choice of meaning above each column', async () => {
    await page.goto(`${url}${group}/measurements/new`);
    await choose(['two-field.csv', 'two-field-mocks.csv'].map((file) => path.join(data, file)));
    const rows = page.getByRole('region', { name: 'First rows of the file' });
    await rows.waitFor({ timeout: 30_000 });
    expect(await rows.locator('tbody tr').count()).toBe(6);
    expect(await rows.locator('select').count()).toBe(table[0].split(',').length);
    const s = rows.getByLabel(/, S$/);
    await s.selectOption('');
    await expect.poll(text).toContain('The mapping has no column for S');
    await s.focus();
    await s.selectOption('S');
    await expect.poll(text, { timeout: 15_000 }).toContain('Nothing stops the upload');
    await page.getByLabel('Name', { exact: true }).fill(name);
    await page.getByRole('button', { name: 'Store version 1' }).click();
    await page.waitForURL(/\/measurements\/[0-9a-f-]{36}$/);
    measurement = new URL(page.url()).pathname;
  });

  it('draws the correlation matrix, whose numbers are reached by keyboard', async () => {
    const matrix = page.getByRole('application', { name: /Correlation of the bins/ });
    await matrix.waitFor({ timeout: 15_000 });
    await matrix.focus();
    await page.keyboard.press('ArrowUp');
    await page.keyboard.press('End');
    const { values } = await ask<{ values: number[] }>('GET', `${measurement}/correlation`);
    // Below the diagonal, row by row: the pair of the last bin and the second.
    const r = values[(39 * 38) / 2 + 1];
    const said = `${r < 0 ? '−' : '+'}${Math.abs(r).toFixed(3)}`;
    await expect.poll(text).toContain(`Bins 2 and 40`);
    expect(await text()).toContain(said);
    expect(await text()).toContain('From n = 600 mocks');
  });

  it('is renamed and described in place', async () => {
    await page.getByRole('button', { name: 'Rename or describe' }).click();
    await page.getByLabel('Description').fill('Two fields on a shelf.');
    await page.getByRole('button', { name: 'Save name and description' }).click();
    await expect.poll(text).toContain('Two fields on a shelf.');
  });

  it('takes a newer file without header, with more than twenty columns, as version 2', async () => {
    const { id } = await ask<{ id: string }>('POST', `${group}/notebooks`, {
      title: 'On the shelf',
      measurement: measurement.split('/')[2],
      template: { id: 'background', options: { background: [1, 2] } },
      likelihood: { kind: 'normal' },
    });
    notebook = `/notebooks/${id}`;
    await page.getByRole('link', { name: 'Add a newer version' }).click();
    await page.waitForURL('**/versions/new');
    const mocks = readFileSync(path.join(data, 'two-field-mocks.csv'));
    await choose([changed(), { name: 'shelf-mocks.csv', mimeType: 'text/csv', buffer: mocks }]);
    const rows = page.getByRole('region', { name: 'First rows of the file' });
    await rows.waitFor({ timeout: 30_000 });
    expect(await rows.innerText()).toContain('no header');
    const width = await rows.evaluate((box) => [box.scrollWidth, box.clientWidth]);
    expect(width[0]).toBeGreaterThan(width[1]);
    const meanings = { kappa_lo: 'kappaLo', kappa_hi: 'kappaHi', S: 'S', sigma_S: 'sigma' };
    for (const [j, head] of table[0].split(',').entries()) {
      const role = Object.entries(meanings).find(([word]) => word === head.trim())?.[1] ?? '';
      await rows.locator(`select[name=meaning-${j}]`).selectOption(role);
    }
    await expect.poll(text, { timeout: 15_000 }).toContain('Nothing stops the upload');
    await page.getByRole('button', { name: 'Store version 2' }).click();
    await page.waitForURL(new RegExp(`${measurement}$`));
    await expect.poll(text).toContain('Version 2 against version 1');
    expect(await text()).toContain('one value moved');
    expect(await text()).toContain('On the shelf');
  });

  it('keeps a notebook on its version until it takes the newer one up', async () => {
    await page.goto(`${url}${notebook}`);
    await expect.poll(text).toContain('A newer version exists');
    expect(await text()).toContain('version 1');
    await page.getByRole('button', { name: 'Take up version 2 and run all fits again' }).click();
    await expect.poll(text).toContain('Version 2 is taken up as revision 2');
    await expect.poll(text).toContain('version 2:');
  });

  it('is found in the library by words, and an empty search result says so', async () => {
    await page.goto(`${url}${group}/measurements`);
    await page.getByLabel('Search by words').fill('shelf two-fields-nowhere');
    await expect.poll(text).toContain('No measurement has all of these words');
    await page.getByLabel('Search by words').fill(`${name} mocks`);
    await expect.poll(text).toMatch(/One measurement of \d+/);
    await page.getByLabel('Order').selectOption('name');
    await page.getByRole('link', { name: `${name}, version` }).waitFor();
  });
});

describe.each(looks)('pages of measurements, $name', (look) => {
  it('have no serious accessibility finding, and never scroll sideways', async () => {
    const reader = await visit(browser, look);
    await reader.context.addCookies((await person.context.storageState()).cookies);
    const all: string[] = [];
    const places = [
      `${group}/measurements`,
      `${group}/measurements/new`,
      measurement,
      `${measurement}?version=1`,
      `${measurement}/versions/new`,
      notebook,
    ];
    for (const place of places) {
      await reader.page.goto(`${url}${place}`);
      await reader.page.waitForLoadState('networkidle');
      if (place.endsWith('/new')) {
        await reader.page.locator('input[type=file]').first().setInputFiles(changed());
        await reader.page.getByRole('region', { name: 'First rows of the file' }).waitFor();
      }
      const [content, window] = await reader.page.evaluate(() => [
        document.documentElement.scrollWidth,
        document.documentElement.clientWidth,
      ]);
      if (content > window) all.push(`${place}: ${content} px wide`);
      await reader.page.evaluate(axe);
      const { violations } = await reader.page.evaluate(() =>
        (globalThis as unknown as { axe: { run(): Promise<AxeResults> } }).axe.run(),
      );
      all.push(
        ...violations
          .filter(({ impact }) => impact === 'serious' || impact === 'critical')
          .map(({ id, help, nodes }) => `${place}: ${id}: ${help}: ${nodes[0].target.join(' ')}`),
      );
    }
    expect(all).toEqual([]);
    expect(reader.faults).toEqual([]);
    await reader.context.close();
  });
});
