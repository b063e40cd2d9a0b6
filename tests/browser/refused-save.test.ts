import type { Browser, Locator, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { faultsInAllLooks } from './accessible';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);

type Cookies = Awaited<ReturnType<Visit['context']['cookies']>>;

let browser: Browser;
let place: string;
let group: string;
const cookies: Record<string, Cookies> = {};
beforeAll(async () => {
  browser = await launchBrowser();
  for (const who of ['analyst', 'lead']) {
    const { page, context } = await visit(browser);
    await signInBy(page, links[`${who}@demo.beatnote.example`]);
    group = new URL(page.url()).pathname;
    cookies[who] = await context.cookies();
    await context.close();
  }
});
afterAll(() => browser.close());

const section = (page: Page, name: string): Locator => page.locator(`section#${name}`);
const highest = (page: Page) => section(page, 'measurement').getByLabel(/^Highest/);
const words = (page: Page) => section(page, 'statement').getByLabel('Words');
const save = (page: Page, name: string) =>
  section(page, name).getByRole('button', { name: /^Save as revision/ });
const revision = async (page: Page) => (await ask<{ revision: number }>(page, 'GET', place)).revision;

async function unfold(page: Page, name: string): Promise<void> {
  const title = section(page, name).locator('h2 button');
  if ((await title.getAttribute('aria-expanded')) === 'false') await title.click();
}

async function cut(page: Page, value: string): Promise<void> {
  await highest(page).fill(value);
  await highest(page).press('Tab');
}

/**
 * Two people at one section, the second of whom hears nothing of the first: the network lets through what they ask for, and
 * not what the server tells by itself. So their save is really refused. The steps stand on each other.
 */
describe.each([1440, 390])('a save that is refused because somebody else saved first, at %i px', (width) => {
  let first: Visit;
  let second: Visit;
  let statuses: number[] = [];

  beforeAll(async () => {
    [first, second] = [await visit(browser, { width }), await visit(browser, { width })];
    await first.context.addCookies(cookies.analyst);
    await second.context.addCookies(cookies.lead);
    await first.page.goto(`${url}${group}`);
    const measured = await ask<{ id: string; name: string }[]>(first.page, 'GET', `${group}/measurements`);
    const { id } = await ask<{ id: string }>(first.page, 'POST', `${group}/notebooks`, {
      title: `Refused at ${width}`,
      measurement: measured.find(({ name }) => name === 'Larkfield wide strip')?.id,
      template: { id: 'free-phase', options: { fields: 1, background: [1, 2] } },
    });
    place = `/notebooks/${id}`;
    await second.page.route('**/events**', (route) => route.abort());
    statuses = [];
    second.page.on('response', (response) => {
      if (response.request().method() === 'PATCH') statuses.push(response.status());
    });
    for (const { page } of [first, second]) {
      await page.goto(`${url}${place}`);
      // Before the script has taken over nobody knows what is folded.
      await page.waitForLoadState('networkidle');
      for (const name of ['measurement', 'statement']) await unfold(page, name);
    }
  });
  afterAll(async () => {
    await ask(second.page, 'POST', `${place}/archive`);
    for (const { context } of [first, second]) await context.close();
  });

  it('shows both versions, changes nothing, and loses nothing of either', async () => {
    await cut(second.page, '0.12');
    await cut(first.page, '0.2');
    await save(first.page, 'measurement').click();
    await expect.poll(() => revision(first.page)).toBe(2);
    await save(second.page, 'measurement').click();
    const told = section(second.page, 'measurement');
    await told.getByText('Revision 2 was saved by analyst').waitFor();
    expect(statuses).toEqual([409]);
    expect(await revision(first.page)).toBe(2);
    const sides = (await told.getByRole('table', { name: 'Both sides' }).innerText()).replace(/\s+/g, ' ');
    expect(sides).toMatch(/Highest κ 0\.2 0\.12/);
    expect(await highest(second.page).inputValue()).toBe('0.12');
    expect(await save(second.page, 'measurement').isDisabled()).toBe(true);
    expect(await faultsInAllLooks(second.page, '#measurement')).toEqual([]);
    await second.page.setViewportSize({ width, height: 900 });
  });

  it('keeps their own when they choose so; the other person sees it without a reload', async () => {
    const loads = first.loads();
    await section(second.page, 'measurement')
      .getByRole('button', { name: 'Save yours as revision 3' })
      .click();
    await expect.poll(() => revision(first.page)).toBe(3);
    await expect.poll(() => highest(first.page).inputValue(), { timeout: 2_000 }).toBe('0.12');
    expect(first.loads()).toBe(loads);
    expect(statuses).toEqual([409, 200]);
    // What was first stays in the record.
    const { cuts } = await ask<{ cuts: object }>(first.page, 'GET', `${place}/revisions/2`);
    expect(cuts).toMatchObject({ kappaMax: 0.2 });
    expect(
      await section(second.page, 'measurement')
        .getByText(/while you edited/)
        .count(),
    ).toBe(0);
  });

  it('takes the other’s when they choose so, and nothing is saved by that', async () => {
    await cut(second.page, '0.15');
    await cut(first.page, '0.18');
    await save(first.page, 'measurement').click();
    await expect.poll(() => revision(first.page)).toBe(4);
    await save(second.page, 'measurement').click();
    await section(second.page, 'measurement').getByRole('button', { name: 'Take revision 4' }).click();
    await expect.poll(() => highest(second.page).inputValue()).toBe('0.18');
    expect(await revision(first.page)).toBe(4);
  });

  it('does the same for words of the statement', async () => {
    for (const [person, text] of [
      [first, 'No oscillation is seen.'],
      [second, 'The amplitude is bounded.'],
    ] as const) {
      await section(person.page, 'statement').getByRole('button', { name: 'Write the statement' }).click();
      await words(person.page).fill(text);
    }
    await save(first.page, 'statement').click();
    await expect.poll(() => revision(first.page)).toBe(5);
    await save(second.page, 'statement').click();
    const both = section(second.page, 'statement').getByRole('table', { name: 'Both sides' });
    await both.waitFor();
    expect(await both.innerText()).toMatch(/No oscillation is seen\.\s+The amplitude is bounded\./);
    expect(await words(second.page).inputValue()).toBe('The amplitude is bounded.');
    await section(second.page, 'statement').getByRole('button', { name: 'Save yours as revision 6' }).click();
    await expect
      .poll(() => section(first.page, 'statement').innerText(), { timeout: 3_000 })
      .toContain('The amplitude is bounded.');
    const earlier = await ask<{ statement: string }>(first.page, 'GET', `${place}/revisions/5`);
    expect(earlier.statement).toBe('No oscillation is seen.');
  });

  it('tells that a title met another one, and saves it when asked again', async () => {
    const retitle = async ({ page }: Visit, title: string) => {
      await page.getByRole('button', { name: 'change the title' }).click();
      await page.getByLabel('Title').fill(title);
    };
    await retitle(second, `Theirs at ${width}`);
    await retitle(first, `Mine at ${width}`);
    await first.page.getByRole('button', { name: 'Save the title' }).click();
    await expect.poll(() => revision(first.page)).toBe(7);
    await second.page.getByRole('button', { name: 'Save the title' }).click();
    await second.page.getByText('Revision 7 was saved while you wrote; the title was not').waitFor();
    expect(await second.page.getByLabel('Title').inputValue()).toBe(`Theirs at ${width}`);
    expect(await second.page.locator('main').innerText()).toContain(`is titled “Mine at ${width}” meanwhile`);
    await second.page.getByRole('button', { name: 'Save the title' }).click();
    await expect
      .poll(() => first.page.getByRole('heading', { level: 1 }).innerText(), { timeout: 2_000 })
      .toBe(`Theirs at ${width}`);
  });

  it('meets no failing answer of the server but the refusals', () => {
    expect(first.faults).toEqual([]);
    // The browser's own lines about refused saves and about the stream that was cut off are what the test made.
    expect(second.faults.filter((fault) => !/ERR_FAILED|409/.test(fault))).toEqual([]);
  });
});
