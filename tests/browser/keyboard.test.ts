import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);

let browser: Browser;
let person: Visit;
let page: Page;
let group: string;
let place: string;

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  await signInBy(page, links['lead@demo.beatnote.example']);
  group = new URL(page.url()).pathname;
  await page.waitForLoadState('networkidle');
});
afterAll(async () => {
  await ask(page, 'POST', `${place}/archive`);
  await browser.close();
});

interface Focused {
  /** Label or words of what has the focus. */
  name: string;
  /** Part of the page in which it stands. */
  part: 'skip' | 'head' | 'contents' | 'text' | 'foot';
  /** True where the ring is drawn: 2 px round it, or round a slider's thumb. */
  ring: boolean;
  key: string;
}

/** What has the focus, and how it shows. */
const focused = (): Promise<Focused> =>
  page.evaluate(() => {
    const element = document.activeElement as HTMLElement;
    const labels =
      element instanceof HTMLInputElement || element instanceof HTMLSelectElement ? element.labels : null;
    const name =
      element.getAttribute('aria-label') ??
      ([...(labels ?? [])].map((label) => label.innerText).join(' ') || element.innerText || '');
    const inside = (selector: string) => element.closest(selector) !== null;
    const style = getComputedStyle(element);
    const thumb = element.parentElement?.querySelector('.ring');
    const ring = element.matches('input[type=range]')
      ? thumb !== null && thumb !== undefined && getComputedStyle(thumb).stroke !== 'rgba(0, 0, 0, 0)'
      : style.outlineStyle !== 'none' && parseFloat(style.outlineWidth) >= 2;
    element.dataset.at ??= String(document.querySelectorAll('[data-at]').length);
    return {
      name: name.replace(/\s+/g, ' ').trim(),
      part: inside('header')
        ? ('head' as const)
        : inside('main')
          ? ('text' as const)
          : inside('footer')
            ? ('foot' as const)
            : inside('nav')
              ? ('contents' as const)
              : ('skip' as const),
      ring,
      key: element.dataset.at,
    };
  });

/** Goes on with Tab until what has the focus is called so: a person without a pointer finds it, or the test fails. */
async function tabTo(name: RegExp, key: 'Tab' | 'Shift+Tab' = 'Tab'): Promise<void> {
  for (let presses = 0; presses < 140; presses++) {
    await page.keyboard.press(key);
    const at = await focused();
    if (!name.test(at.name)) continue;
    expect(at.ring, `the focus on “${at.name}” can be seen`).toBe(true);
    return;
  }
  throw new Error(`Tab never comes to ${String(name)}.`);
}

const press = async (...keys: string[]) => {
  for (const key of keys) await page.keyboard.press(key);
};
const chains = () => page.locator('#chains').innerText();
const notebook = () => ask<{ revision: number; fits: { status: string }[] }>(page, 'GET', place);

/** The steps stand on each other, in this order; no pointer is used. */
describe('the main job by keyboard alone', () => {
  it('goes past the head by the first link', async () => {
    await press('Tab');
    expect(await focused()).toMatchObject({ name: 'To the text', part: 'skip', ring: true });
    await press('Enter');
    await press('Tab');
    expect((await focused()).part).toBe('text');
  });

  it('opens a notebook with a title and a template', async () => {
    await tabTo(/^New notebook$/);
    await press('Enter');
    await page.waitForURL('**/notebooks/new');
    await page.waitForLoadState('networkidle');
    await tabTo(/^Measurement$/);
    await page.keyboard.type('Larkfield wide');
    await tabTo(/^Template$/);
    await page.keyboard.type('Oscillations');
    await tabTo(/^Number of fields$/);
    await page.keyboard.type('one');
    await tabTo(/^Title$/);
    await press('Control+A');
    await page.keyboard.type('By keyboard alone');
    await press('Enter');
    await page.waitForURL(/\/notebooks\/[0-9a-f-]{36}$/);
    place = new URL(page.url()).pathname;
    await page.getByRole('heading', { level: 1, name: 'By keyboard alone' }).waitFor();
    await page.waitForLoadState('networkidle');
  });

  it('comes to everything that can be used, in the order of the page, with a ring round each', async () => {
    await page.goto(`${url}${place}`);
    await page.waitForLoadState('networkidle');
    const order: Focused[] = [];
    for (;;) {
      await press('Tab');
      // After the last one the focus leaves the page for the browser's own bars.
      if (await page.evaluate(() => document.activeElement === document.body)) break;
      const at = await focused();
      if (order.some(({ key }) => key === at.key) || order.length > 200) break;
      order.push(at);
    }
    const parts = order.map(({ part }) => part);
    const rank = { skip: 0, head: 1, contents: 2, text: 3, foot: 4 };
    expect(parts.map((part) => rank[part])).toEqual(parts.map((part) => rank[part]).toSorted());
    expect(new Set(parts)).toEqual(new Set(['skip', 'head', 'contents', 'text', 'foot']));
    expect(order.filter(({ ring }) => !ring)).toEqual([]);
    expect(order.filter(({ name }) => !name)).toEqual([]);
    const missed = await page.evaluate(() =>
      [...document.querySelectorAll<HTMLElement>('a[href], button, input, select, textarea, summary')]
        .filter((element) => element.checkVisibility() && element.tabIndex >= 0 && !element.dataset.at)
        .map((element) => element.outerHTML.slice(0, 90)),
    );
    expect(missed).toEqual([]);
  });

  it('goes to a section from the contents, folds it and opens it', async () => {
    await page.goto(`${url}${place}`);
    await page.waitForLoadState('networkidle');
    await tabTo(/^2 Template/);
    await press('Enter');
    await expect.poll(() => new URL(page.url()).hash).toBe('#template');
    await tabTo(/^2 ?Template$/);
    await press('Enter');
    await page.locator('#template .katex').first().waitFor({ state: 'hidden' });
    expect((await focused()).name).toMatch(/^2 ?Template$/);
    await press('Enter');
    await page.locator('#template .katex').first().waitFor();
  });

  it('moves a slider by a step, by ten and to the ends of its prior', async () => {
    await tabTo(/^mass 1$/);
    const value = () => page.evaluate(() => Number((document.activeElement as HTMLInputElement).value));
    const [lo, hi, step] = await page.evaluate(() => {
      const { min, max, step } = document.activeElement as HTMLInputElement;
      return [min, max, step].map(Number);
    });
    await press('Home');
    expect(await value()).toBeCloseTo(lo);
    await press('ArrowRight');
    expect(await value()).toBeCloseTo(lo + step);
    await press('PageUp');
    expect(await value()).toBeCloseTo(lo + 11 * step);
    await press('End');
    expect(await value()).toBeCloseTo(hi);
  });

  it('opens what a figure can be saved as, and its numbers, and closes them again', async () => {
    await tabTo(/^Save the figure$|^Save figure 2$/);
    await press('Enter');
    await tabTo(/^Numbers here$/);
    await press('Enter');
    await page.getByRole('region', { name: /^Numbers: / }).waitFor();
    expect((await focused()).name).toBe('Close the table');
    await press('Enter');
    await expect.poll(() => page.getByRole('region', { name: /^Numbers: / }).count()).toBe(0);
  });

  it('opens a form of the whole notebook and leaves it, with the focus back where it was', async () => {
    await tabTo(/^change the title$/, 'Shift+Tab');
    for (const [open, leave] of [
      [/^change the title$/, /^Leave it$/],
      [/^archive or delete$/, /^Leave it$/],
    ] as const) {
      if (!open.test((await focused()).name)) await tabTo(open);
      await press('Enter');
      await page.getByRole('button', { name: leave }).waitFor();
      await tabTo(leave);
      await press('Enter');
      await expect.poll(async () => (await focused()).name).toMatch(open);
    }
  });

  it('saves a cut, and stays on the button that did', async () => {
    await tabTo(/^Highest κ$/);
    await page.keyboard.type('0.2');
    await tabTo(/^Save as revision 2$/);
    await press('Enter');
    await expect.poll(async () => (await notebook()).revision).toBe(2);
    await expect.poll(async () => (await focused()).name).toBe('Save as revision 3');
  });

  it('starts a fit, hears that it has ended, and reads its posterior', async () => {
    await tabTo(/^Draws a replica at most$/);
    await press('Control+A');
    await page.keyboard.type('200');
    await tabTo(/^Start fit 1$/);
    await press('Enter');
    await expect
      .poll(async () => (await notebook()).fits.map(({ status }) => status), { timeout: 120_000 })
      .toEqual([expect.stringMatching(/converged|budget-spent/)]);
    await expect.poll(chains, { timeout: 15_000 }).toMatch(/Fit 1, four replicas, has/);
    const told = page.locator('#chains [role=status]').filter({ hasText: /^Fit 1 has/ });
    await expect.poll(() => told.count()).toBe(1);
    await expect.poll(() => page.locator('#posterior .c68').count(), { timeout: 20_000 }).toBeGreaterThan(2);
  });

  it('changes what the corner view shows, and downloads the samples', async () => {
    await page.goto(`${url}${place}`);
    await page.waitForLoadState('networkidle');
    await tabTo(/^6 Posterior/);
    await press('Enter');
    const shown = () => page.locator('#posterior input[type=checkbox]:checked').count();
    const before = await shown();
    for (;;) {
      await press('Tab');
      if (await page.evaluate(() => document.activeElement?.matches('#posterior input:checked'))) break;
    }
    await press('Space');
    await expect.poll(shown).toBe(before - 1);
    await tabTo(/^Samples \(CSV\)$/);
    const [download] = await Promise.all([page.waitForEvent('download'), press('Enter')]);
    expect(download.suggestedFilename()).toMatch(/\.csv$/);
  });

  it('has met no console error and no failing answer', () => {
    expect(person.faults).toEqual([]);
  });
});

describe('with reduced motion', () => {
  it.each(['notebook', 'group', 'members'])('nothing on the page moves by itself: %s', async (which) => {
    const where = { notebook: place, group, members: `${group}/members` }[which];
    await page.goto(`${url}${where}`);
    const moving = await page.evaluate(() =>
      [...document.querySelectorAll('*')]
        .filter((element) => {
          const { transitionDuration, animationName } = getComputedStyle(element);
          return animationName !== 'none' || transitionDuration.split(',').some((d) => parseFloat(d) > 0);
        })
        .map((element) => element.outerHTML.slice(0, 80)),
    );
    expect(moving).toEqual([]);
  });
});
