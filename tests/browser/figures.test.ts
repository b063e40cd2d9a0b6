import { readFileSync } from 'node:fs';
import type { Browser, CDPSession, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, demoNotebook, fitted, signIn } from './fitted-notebook';

const { url } = inject('instance');

/** 4 × 25 000 draws are kept, since no gate is met before. */
const large = { maxDraws: 25_000, target: { ess: 1e6 } };

let browser: Browser;
let person: Visit;
let page: Page;
let notebook = '';

beforeAll(async () => {
  browser = await launchBrowser();
  person = await visit(browser);
  page = person.page;
  await signIn(page, url, 'analyst@demo.beatnote.example');
  notebook = await demoNotebook(page);
  const number = await fitted(page, notebook, large);
  notebook += `?fit=${number}`;
});
afterAll(() => browser.close());

const p95 = (values: number[]) => values.toSorted((a, b) => a - b)[Math.floor(0.95 * (values.length - 1))];

/** Processor time of the whole browser so far, in ms. */
async function spentBy(devtools: CDPSession): Promise<number> {
  const { processInfo } = await devtools.send('SystemInfo.getProcessInfo');
  return 1000 * processInfo.reduce((sum, { cpuTime }) => sum + cpuTime, 0);
}

interface Times {
  /** By the clock until the next frame. */
  clock: number[];
  /** Processor time of the page's own thread. */
  own: number[];
  /** Processor time of all the browser's processes, an act on average. */
  all: number;
}

/** Times what a page does in answer to each act, in ms. */
async function timed(acts: (() => Promise<number>)[]): Promise<Times> {
  const devtools = await person.context.newCDPSession(page);
  const whole = await browser.newBrowserCDPSession();
  await devtools.send('Performance.enable', { timeDomain: 'threadTicks' });
  const busy = async () => {
    const { metrics } = await devtools.send('Performance.getMetrics');
    return 1000 * (metrics.find(({ name }) => name === 'TaskDuration')?.value ?? NaN);
  };
  const clock: number[] = [];
  const own: number[] = [];
  const begun = await spentBy(whole);
  for (const act of acts) {
    const before = await busy();
    clock.push(await act());
    own.push((await busy()) - before);
  }
  const all = ((await spentBy(whole)) - begun) / acts.length;
  await devtools.detach();
  await whole.detach();
  return { clock, own, all };
}

/**
 * Answers come in time: 95 of 100 by the page's own work, and the middle one by the clock, or by all the work of the browser
 * where that is less: other work on the machine stretches the clock, and without it nothing takes longer than the work of all
 * processes one after the other.
 */
function expectPrompt({ clock, own, all }: Times) {
  expect(Math.min(...own)).toBeGreaterThan(0);
  expect(p95(own)).toBeLessThan(100);
  expect(all).toBeGreaterThan(0);
  expect(Math.min(all, clock.toSorted((a, b) => a - b)[Math.floor(clock.length / 2)])).toBeLessThan(100);
}

/** Walks down the page, so that whatever waits for being seen is loaded. */
async function seeAll(on: Page) {
  await on.waitForLoadState('networkidle');
  await on.evaluate(async () => {
    for (let y = 0; y < document.body.scrollHeight; y += 500) {
      window.scrollTo(0, y);
      await new Promise((resolve) => setTimeout(resolve, 60));
    }
    window.scrollTo(0, 0);
  });
  await on.waitForLoadState('networkidle');
}

describe('the script of the notebook’s page', () => {
  it('stays below 300 kB as it comes over the wire, workers included, with every figure drawn', async () => {
    const fresh = await visit(browser);
    await fresh.context.addCookies((await person.context.storageState()).cookies);
    const sizes: { address: string; bytes: Promise<number> }[] = [];
    fresh.page.on('requestfinished', (request) => {
      if (!/\.js(\?|$)/.test(new URL(request.url()).pathname)) return;
      const bytes = request.sizes().then(({ responseBodySize }) => responseBodySize);
      sizes.push({ address: request.url(), bytes });
    });
    await fresh.page.goto(`${url}${notebook}`);
    await seeAll(fresh.page);
    await expect.poll(() => fresh.page.locator('#posterior .c68').count()).toBeGreaterThan(5);
    const bytes = await Promise.all(sizes.map((each) => each.bytes));
    const total = bytes.reduce((sum, each) => sum + each, 0);
    expect(sizes.length).toBeGreaterThan(5);
    expect(total).toBeGreaterThan(100_000);
    expect(total).toBeLessThan(300_000);
    await fresh.context.close();
  });
});

describe('the corner view of 100 000 draws', () => {
  it('is drawn within a second of the draws being there', async () => {
    const drawn = () =>
      page.evaluate(() => performance.getEntriesByName('corner view').map(({ duration }) => duration));
    const devtools = await browser.newBrowserCDPSession();
    const took: number[] = [];
    for (let i = 0; i < 3 && !took.some((each) => each < 1000); i++) {
      await page.goto(`${url}${notebook}`);
      await seeAll(page);
      await expect.poll(async () => (await drawn()).length, { timeout: 20_000 }).toBe(1);
      const before = await spentBy(devtools);
      await page
        .locator('#posterior')
        .getByRole('button', { name: /^Draw all/ })
        .click();
      await expect.poll(async () => (await drawn()).length, { timeout: 20_000 }).toBe(2);
      took.push(Math.min((await drawn())[1], (await spentBy(devtools)) - before));
    }
    await devtools.detach();
    expect(await page.locator('#posterior figcaption').first().innerText()).toMatch(
      /from 100.000 of its 100.000 draws/,
    );
    expect(Math.min(...took)).toBeGreaterThan(0);
    expect(Math.min(...took)).toBeLessThan(1000);
  });

  it('answers a choice of parameters within 100 ms, and takes any five', async () => {
    const boxes = page.locator('#posterior').getByRole('checkbox');
    const names = await boxes.evaluateAll((all) => all.map((box) => box.getAttribute('aria-label') ?? ''));
    expect(names.length).toBeGreaterThan(5);
    // One is taken out and another put in, through the whole list.
    const turn = (k: number) => () =>
      page.evaluate(async (k) => {
        const all = [...document.querySelectorAll<HTMLInputElement>('#posterior input[type=checkbox]')];
        const shown = all.filter((box) => box.checked);
        const others = all.filter((box) => !box.checked);
        const start = performance.now();
        (shown.length === 5 ? shown[k % 5] : others[k % others.length]).click();
        await new Promise((resolve) => requestAnimationFrame(() => setTimeout(resolve)));
        return performance.now() - start;
      }, k);
    expectPrompt(await timed(Array.from({ length: 2 * names.length }, (_, k) => turn(k))));
    expect(
      await boxes.evaluateAll((all) => all.filter((box) => (box as HTMLInputElement).checked).length),
    ).toBe(5);
    await expect.poll(() => page.locator('#posterior .c68').count()).toBeGreaterThanOrEqual(10);
  });
});

describe('sliders', () => {
  it('answer within 100 ms', async () => {
    const move = (share: number) => () =>
      page.evaluate(async (share) => {
        const slider = document.querySelector<HTMLInputElement>('#template input[type=range]');
        if (!slider) throw new Error('The template has no slider.');
        const set = Object.getOwnPropertyDescriptor(HTMLInputElement.prototype, 'value')?.set;
        const [lo, hi] = [Number(slider.min), Number(slider.max)];
        const start = performance.now();
        set?.call(slider, String(lo + (hi - lo) * share));
        slider.dispatchEvent(new Event('input', { bubbles: true }));
        await new Promise((resolve) => requestAnimationFrame(() => setTimeout(resolve)));
        return performance.now() - start;
      }, share);
    expectPrompt(await timed(Array.from({ length: 40 }, (_, i) => move((i + 1) / 42))));
  });
});

describe('what is laid over figures', () => {
  const posterior = () => page.locator('#posterior');

  it('is drawn with its name, and taken off again', async () => {
    const files = posterior().locator('input[type=file]');
    const samples = `mu1,mu2\n${Array.from({ length: 400 }, (_, i) => `${2 + Math.sin(i)},${3 + Math.cos(i * 1.7)}`).join('\n')}\n`;
    await files.first().setInputFiles({
      name: 'other.csv',
      mimeType: 'text/csv',
      buffer: Buffer.from(samples),
    });
    await files.nth(1).setInputFiles({
      name: 'curve.txt',
      mimeType: 'text/plain',
      buffer: Buffer.from('kappa S\n0.002 0\n0.3 0.1\n'),
    });
    await expect.poll(() => posterior().locator('svg text', { hasText: 'curve.txt' }).count()).toBe(1);
    await expect.poll(() => posterior().locator('svg path.over').count()).toBeGreaterThan(1);
    for (const name of ['other.csv', 'curve.txt'])
      await posterior()
        .getByRole('button', { name: `Take it off ${name}` })
        .click();
    await expect.poll(() => posterior().locator('svg path.over').count()).toBe(0);
  });

  it('is refused with line and column', async () => {
    await posterior()
      .locator('input[type=file]')
      .nth(1)
      .setInputFiles({
        name: 'bad.txt',
        mimeType: 'text/plain',
        buffer: Buffer.from('kappa S\n0.002 0\n0.3 high\n'),
      });
    await expect.poll(() => posterior().innerText()).toMatch(/Line 3, column 2: /);
  });
});

describe('the menus of the figures', () => {
  it('save every figure as SVG with its colours and fonts, as PNG at three pixels a unit, and its numbers', async () => {
    const figures = page.locator('figure:has(summary)');
    const count = await figures.count();
    expect(count).toBeGreaterThanOrEqual(6);
    for (let i = 0; i < count; i++) {
      const figure = figures.nth(i);
      const label = (await figure.locator('[role=img]').getAttribute('aria-label')) ?? '';
      await figure.locator('summary').click();
      const saved = async (name: string) => {
        const [download] = await Promise.all([
          page.waitForEvent('download'),
          figure.getByRole('button', { name, exact: true }).click(),
        ]);
        return readFileSync(await download.path());
      };
      const svg = (await saved('SVG')).toString('utf8');
      expect(svg, label).toMatch(/^<svg[^>]*xmlns="http:\/\/www\.w3\.org\/2000\/svg"/);
      expect(svg, label).not.toMatch(/var\(--|class="/);
      expect(svg, label).toMatch(/@font-face[^}]*url\("?data:/);
      expect(svg, label).toMatch(/stroke: rgb\(/);
      const width = Number(/<svg[^>]* width="([\d.]+)"/.exec(svg)?.[1]);
      const png = await saved('PNG');
      expect(png.subarray(1, 4).toString('latin1'), label).toBe('PNG');
      // Width and height stand at bytes 16 and 20 of a PNG (ISO/IEC 15948, 11.2.2).
      expect(png.readUInt32BE(16), label).toBe(Math.round(3 * width));
      const [head, first] = (await saved('Numbers (CSV)')).toString('utf8').split('\n');
      expect(head.split(',').length, label).toBeGreaterThan(1);
      expect(
        first.split(',').some((cell) => Number.isFinite(Number(cell))),
        label,
      ).toBe(true);
      await figure.locator('summary').click();
    }
  });
});

interface Shift {
  value: number;
  hadRecentInput: boolean;
  sources: { node: Node | null }[];
}
interface Moved {
  by: number;
  what: string[];
}

describe('a page whose numbers move', () => {
  it.each([1440, 390])('never jumps while a fit runs, at %i px', async (width) => {
    const live = await visit(browser, { width });
    await live.context.addCookies((await person.context.storageState()).cookies);
    const place = notebook.split('?')[0];
    const { id } = await ask<{ id: string }>(page, 'POST', `${place}/fits`, {
      maxDraws: 400_000,
      target: { ess: 1e7 },
    });
    await live.page.goto(`${url}${place}`);
    const chains = live.page.locator('#chains');
    if ((await chains.locator('h2 button').getAttribute('aria-expanded')) === 'false')
      await chains.locator('h2 button').click();
    await expect.poll(() => chains.innerText(), { timeout: 60_000 }).toMatch(/sampling/);
    await chains.locator('table').first().scrollIntoViewIfNeeded();
    // What comes once has to be there: both tables, the traces, and below them what the posterior is drawn from.
    await expect.poll(() => chains.locator('table').count(), { timeout: 60_000 }).toBeGreaterThan(1);
    await expect
      .poll(() => chains.locator('figure svg path').count(), { timeout: 60_000 })
      .toBeGreaterThan(4);
    const posterior = live.page.locator('#posterior');
    if ((await posterior.locator('h2 button').getAttribute('aria-expanded')) === 'true')
      await expect.poll(() => posterior.locator('.c68').count(), { timeout: 60_000 }).toBeGreaterThan(2);
    await live.page.waitForLoadState('networkidle');
    await live.page.evaluate(() => {
      const moved: Moved[] = [];
      Object.assign(window, { moved });
      new PerformanceObserver((list) => {
        for (const entry of list.getEntries() as unknown as Shift[])
          if (!entry.hadRecentInput)
            moved.push({
              by: entry.value,
              what: entry.sources.map(({ node }) => node?.parentElement?.outerHTML.slice(0, 90) ?? ''),
            });
      }).observe({ type: 'layout-shift', buffered: false });
    });
    // Two updates of the live numbers, however long they take on a busy machine.
    const numbers = () => chains.locator('dl').first().innerText();
    for (let updates = 0, before = await numbers(); updates < 2; updates++) {
      await expect.poll(numbers, { timeout: 60_000 }).not.toBe(before);
      before = await numbers();
    }
    const moved = await live.page.evaluate(() => (window as unknown as { moved: Moved[] }).moved);
    await ask(page, 'POST', `/fits/${id}/stop`);
    expect(
      moved.reduce((sum, { by }) => sum + by, 0),
      JSON.stringify(moved),
    ).toBeLessThan(0.01);
    expect(live.faults).toEqual([]);
    await live.context.close();
  });
});

describe('with reduced motion', () => {
  it('nothing moves by itself', async () => {
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

  it('has met no console error and no failing answer in all this', () => {
    expect(person.faults).toEqual([]);
  });
});
