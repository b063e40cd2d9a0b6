import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);

let browser: Browser;
let person: Visit;
let page: Page;
let before: string[];

/** Titles of the group's measurements, as its home lists them. */
async function measurements(): Promise<string[]> {
  await page.goto(`${url}/`);
  await page.waitForURL('**/groups/**');
  return page.locator('a[href^="/measurements/"]').allInnerTexts();
}

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  await signInBy(page, links['lead@demo.beatnote.example']);
  before = await measurements();
  expect(before.length).toBeGreaterThan(0);
});
afterAll(() => browser.close());

const good = [
  'kappa_lo,kappa_hi,S,sigma_S',
  ...Array.from({ length: 12 }, (_, i) => {
    const edge = (n: number) => 0.01 * 1.3 ** n;
    return [edge(i).toFixed(6), edge(i + 1).toFixed(6), (0.1 * Math.sin(i)).toFixed(5), '0.02'].join(',');
  }),
];
const text = (lines: readonly string[]): Buffer => Buffer.from(`${lines.join('\n')}\n`);
const withLine = (line: number, change: (cells: string[]) => string[]): string[] =>
  good.map((row, i) => (i === line - 1 ? change(row.split(',')).join(',') : row));
const identity = (n: number, diagonal: number): string[] =>
  Array.from({ length: n }, (_, i) =>
    Array.from({ length: n }, (_, j) => (i === j ? diagonal : 0)).join(' '),
  );
const noise = (rows: number): string[] =>
  Array.from({ length: rows }, (_, i) =>
    Array.from({ length: 12 }, (_, j) => Math.sin(1 + 7 * i + 3.1 * j * j).toFixed(4)).join(','),
  );

interface Case {
  what: string;
  files: Record<string, Buffer>;
  says: RegExp[];
}

const cases: Case[] = [
  {
    what: 'a file that is no table',
    files: { 'paper.pdf': Buffer.from('%PDF-1.7\n%âãÏÓ\n1 0 obj') },
    says: [/PDF/],
  },
  {
    what: 'a column that is missing',
    files: { 'points.csv': text(good.map((row) => row.split(',').slice(0, 2).join(','))) },
    says: [/\bS\b/],
  },
  {
    what: 'a cell that is no number, by line and column',
    files: { 'points.csv': text(withLine(5, ([lo, hi, , sigma]) => [lo, hi, 'NaN', sigma])) },
    says: [/5/, /3/, /NaN/],
  },
  {
    what: 'an upper edge below the lower one',
    files: { 'points.csv': text(withLine(7, ([lo, hi, S, sigma]) => [hi, lo, S, sigma])) },
    says: [/7/, /edge/i],
  },
  {
    what: 'a covariance that is not positive definite',
    files: { 'points.csv': text(good), 'covariance.txt': text(identity(12, -0.0004)) },
    says: [/positive/],
  },
  {
    what: 'too few mocks, and how many are needed',
    files: { 'points.csv': text(good), 'mocks.csv': text(noise(14)) },
    says: [/14/, /17/],
  },
];

describe('bad input on the upload page', () => {
  it.each(cases)('names $what and stores nothing', async ({ files, says }) => {
    await page.goto(`${url}/`);
    await page.getByRole('link', { name: 'Add a measurement' }).click();
    await page.waitForURL('**/measurements/new');
    await page
      .locator('input[type=file]')
      .first()
      .setInputFiles(
        Object.entries(files).map(([name, buffer]) => ({ name, buffer, mimeType: 'text/plain' })),
      );
    const finding = page
      .getByRole('row')
      .filter({ hasText: /^\s*error/ })
      .first();
    await finding.waitFor({ timeout: 20_000 });
    for (const expected of says) expect(await finding.innerText()).toMatch(expected);
    const store = page.getByRole('button', { name: /^Store/ });
    expect(await store.getAttribute('aria-disabled')).toBe('true');
  });

  it('leaves the group as it was', async () => {
    expect(await measurements()).toEqual(before);
  });

  it('answers a page that isn’t there with words and 404', async () => {
    const missing = await page.goto(`${url}/notebooks/00000000-0000-4000-8000-000000000000`);
    expect(missing?.status()).toBe(404);
    expect(await page.getByRole('heading', { level: 1 }).innerText()).not.toBe('');
    expect(await page.getByRole('link').count()).toBeGreaterThan(0);
  });
});
