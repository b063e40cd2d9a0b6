import type { Browser, Locator, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { seriousFindings, sidewaysScroll } from './accessible';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signIn } from './fitted-notebook';

const { url } = inject('instance');

let browser: Browser;
let person: Visit;
let page: Page;
let place: string;

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  await signIn(page, url, 'lead@demo.beatnote.example');
  const group = new URL(page.url()).pathname;
  const { measurements } = await ask<{ measurements: { id: string; blind: boolean }[] }>(page, 'GET', group);
  const { id } = await ask<{ id: string }>(page, 'POST', `${group}/notebooks`, {
    title: 'Four fields, to be believed',
    measurement: measurements.find(({ blind }) => !blind)?.id,
    template: { id: 'locked-squeezed', options: { fields: 4 } },
  });
  place = `/notebooks/${id}`;
  await page.goto(`${url}${place}#priors`);
  await kind('mass 1').waitFor();
});
afterAll(async () => {
  await ask(page, 'POST', `${place}/archive`);
  await browser.close();
});

const priors = (of: Page = page): Locator => of.locator('section#priors');
const kind = (label: string) => priors().getByLabel(`Prior of ${label}`, { exact: true });
const number = (label: string, which: string) => priors().getByLabel(`${label}, ${which}`, { exact: true });
const sketch = (label: RegExp) => priors().getByRole('img', { name: label });

/** Chooses a kind with the arrow keys on the focused list. */
async function choose(label: string, wanted: string): Promise<void> {
  const values = await kind(label)
    .locator('option')
    .evaluateAll((all) => all.map((option) => (option as HTMLOptionElement).value));
  expect(values).toContain(wanted);
  await kind(label).focus();
  await page.keyboard.press('Home');
  for (let i = 0; i < values.indexOf(wanted); i += 1) await page.keyboard.press('ArrowDown');
}

/** Types a number over the one that stands. */
async function write(label: string, which: string, value: string): Promise<void> {
  await number(label, which).focus();
  await page.keyboard.press('Control+A');
  await page.keyboard.type(value);
  await page.keyboard.press('Tab');
}

/** The steps stand on each other, in this order. */
describe('priors of four fields', () => {
  it('draw what order leaves of each mass over what is stated, and say what the two are', async () => {
    for (const n of [1, 2, 3, 4]) {
      const drawn = sketch(new RegExp(`^Prior of μ ?${n}, .*in order its median is`));
      await drawn.waitFor();
      expect(await drawn.locator('path.env').count()).toBe(1);
      expect(await drawn.locator(`path.ln.f${n}`).count()).toBe(1);
    }
    const words = (await priors().innerText()).replace(/\s+/g, ' ');
    // 1/4! of four equal priors.
    expect(words).toMatch(/Z = 0\.04167/);
    expect(words).toContain('Grey: the density as stated. Line: what order leaves of it.');
    // Median of the first of four uniforms on [0, 1]: 1 − 2^(−1/4) = 0.159; of the last 2^(−1/4) = 0.841 (Beta(1, 4), Beta(4, 1)).
    const median = async (n: number) =>
      Number(
        /median is ([\d.]+)/.exec(
          (await sketch(new RegExp(`^Prior of μ ?${n},`)).getAttribute('aria-label')) ?? '',
        )?.[1],
      );
    expect(Math.abs(((await median(1)) - 0.2) / 7.8 - 0.159)).toBeLessThan(0.002);
    expect(Math.abs(((await median(4)) - 0.2) / 7.8 - 0.841)).toBeLessThan(0.002);
  });

  it('draw each of three isotropic angles with the others integrated out', async () => {
    const shapes = await priors()
      .getByRole('img', { name: /^Prior of ϑ/ })
      .evaluateAll((all) => all.map((each) => each.querySelector('path.sum')?.getAttribute('d') ?? ''));
    expect(shapes).toHaveLength(3);
    const heights = shapes.map((d) =>
      [...d.matchAll(/[ML]?\s*[\d.]+[ ,]([\d.]+)/g)].map(([, y]) => Number(y)),
    );
    const rise = heights.map((y) => y[0] - y[y.length - 1]);
    // sin² and sin begin at nothing and end highest; the last angle's density is flat.
    expect(rise[0]).toBeGreaterThan(20);
    expect(rise[1]).toBeGreaterThan(20);
    expect(Math.abs(rise[2])).toBeLessThan(0.1);
  });

  it.each([
    { value: 'log-uniform', fields: ['from', 'to'] },
    { value: 'truncated-normal', fields: ['mean', 'sd', 'from', 'to'] },
    { value: 'fixed', fields: ['at'] },
    { value: 'uniform', fields: ['from', 'to'] },
  ])('take the kind $value by keyboard, with its own numbers', async ({ value, fields }) => {
    await choose('mass 2', value);
    expect(await kind('mass 2').inputValue()).toBe(value);
    for (const field of fields) expect(await number('mass 2', field).count(), field).toBe(1);
  });

  it('take half-normal, normal and isotropic where they make sense alone', async () => {
    await choose('coupling', 'half-normal');
    expect(await kind('coupling').inputValue()).toBe('half-normal');
    expect(await number('coupling', 'sd').count()).toBe(1);
    expect(await number('coupling', 'mean').count()).toBe(0);
    await choose('coupling', 'normal');
    expect(await kind('coupling').inputValue()).toBe('normal');
    for (const elsewhere of ['isotropic', 'normal', 'half-normal'])
      expect(await kind('mass 1').locator('option').allTextContents()).not.toContain(elsewhere);
    const angle = kind('mixing angle 2');
    await choose('mixing angle 2', 'uniform');
    expect(await kind('mixing angle 1').inputValue()).toBe('uniform');
    await choose('mixing angle 2', 'isotropic');
    expect([await kind('mixing angle 1').inputValue(), await angle.inputValue()]).toEqual([
      'isotropic',
      'isotropic',
    ]);
  });

  it('say at the number what is wrong and what to do, and can’t be saved so', async () => {
    await write('mass 1', 'from', '9');
    const text = async () => (await priors().innerText()).replace(/\s+/g, ' ');
    await expect.poll(text).toMatch(/lo must be below hi: swap or change the two bounds\./);
    expect(await number('mass 1', 'from').getAttribute('aria-invalid')).toBe('true');
    expect(
      await priors()
        .getByRole('img', { name: /in order its median/ })
        .count(),
    ).toBe(0);
    const save = priors().getByRole('button', { name: /^Save as revision/ });
    expect(await save.getAttribute('aria-disabled')).toBe('true');
    expect(await seriousFindings(page, '#priors')).toEqual([]);
    await write('mass 1', 'from', '0.2');
    await expect.poll(text).not.toContain('lo must be below hi');

    await write('mass 4', 'to', '0.4');
    await write('mass 4', 'from', '0.3');
    await write('mass 1', 'from', '1');
    await expect.poll(text).toContain('The priors don’t go together');
    await write('mass 1', 'from', '0.2');
    await write('mass 4', 'to', '8');
    await expect.poll(text).not.toContain('The priors don’t go together');
  });

  it('are saved by keyboard', async () => {
    await priors()
      .getByRole('button', { name: /^Save as revision/ })
      .press('Enter');
    await expect
      .poll(async () => (await ask<{ priors: Record<string, unknown> }>(page, 'GET', place)).priors.mu4)
      .toEqual({ kind: 'uniform', lo: 0.3, hi: 8 });
  });

  it.each([
    { width: 1440, colorScheme: 'dark' },
    { width: 390, colorScheme: 'light' },
  ] as const)('read and look well, $width px, $colorScheme', async (look) => {
    const other = await visit(browser, look);
    await other.context.addCookies((await person.context.storageState()).cookies);
    await other.page.goto(`${url}${place}#priors`);
    await priors(other.page)
      .getByRole('img', { name: /in order its median/ })
      .first()
      .waitFor();
    expect(await seriousFindings(other.page, '#priors')).toEqual([]);
    expect(await sidewaysScroll(other.page)).toBeLessThanOrEqual(0);
    expect(other.faults).toEqual([]);
    await other.context.close();
  });

  it('stop computing while they are folded, and come back as they were', async () => {
    const title = priors().locator('h2 button');
    await title.press('Enter');
    expect(await title.getAttribute('aria-expanded')).toBe('false');
    expect(await priors().locator('figure svg').count()).toBe(0);
    await title.press('Enter');
    await priors().locator('figure svg').first().waitFor();
    expect(await number('mass 4', 'from').inputValue()).toBe('0.3');
    expect(person.faults).toEqual([]);
  });
});
