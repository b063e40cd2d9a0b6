import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit } from './browser';
import { demoNotebook, fitted, signIn } from './fitted-notebook';

const { url } = inject('instance');

let browser: Browser;
let page: Page;
let notebook = '';

beforeAll(async () => {
  browser = await launchBrowser();
  const person = await visit(browser, { width: 390, height: 844 });
  page = person.page;
  await signIn(page, url, 'analyst@demo.beatnote.example');
  notebook = await demoNotebook(page);
  notebook += `?fit=${await fitted(page, notebook, { maxDraws: 600, target: { ess: 1e6 } })}`;
});
afterAll(() => browser.close());

/** What the page holds at the moment when the browser lays it out for paper, in the same turn of its loop. */
interface OnPaper {
  figures: { label: string; marks: number; width: number }[];
  sections: number;
}

async function printed(): Promise<{ pdf: Buffer; onPaper: OnPaper }> {
  await page.evaluate(() => {
    const look = () => {
      const figures = [...document.querySelectorAll('figure [role=img]')].map((image) => ({
        label: image.getAttribute('aria-label') ?? '',
        // Points and pieces of lines: a figure of one long curve is drawn too.
        marks: [...image.querySelectorAll('svg path, svg circle')].reduce(
          (sum, mark) => sum + Math.max(1, (mark.getAttribute('d')?.match(/[A-Za-z]/g)?.length ?? 0) / 10),
          0,
        ),
        width: Number(image.querySelector('svg')?.getAttribute('width') ?? 0),
      }));
      const sections = document.querySelectorAll('section[id] > div[id]').length;
      Object.assign(window, { onPaper: { figures, sections } });
    };
    // Listens after the page's own listeners, and looks after what those have set has been drawn.
    window.matchMedia('print').addEventListener('change', ({ matches }) => {
      if (matches) queueMicrotask(() => queueMicrotask(look));
    });
  });
  const pdf = await page.pdf({ preferCSSPageSize: true, printBackground: true });
  const onPaper = await page.evaluate(() => (window as unknown as { onPaper: OnPaper }).onPaper);
  return { pdf, onPaper };
}

describe('a notebook on paper', () => {
  it('holds every figure, whole and as wide as on a desk, although all sections are folded on a phone', async () => {
    await page.goto(`${url}${notebook}`);
    await page.waitForLoadState('networkidle');
    for (const button of await page.locator('section h2 button[aria-expanded=true]').all())
      await button.click();
    expect(await page.locator('figure svg').count()).toBe(0);
    // Once more from the start, so that no section was ever opened.
    await page.reload();
    await page.waitForLoadState('networkidle');
    expect(await page.locator('figure svg').count()).toBe(0);
    const { pdf, onPaper } = await printed();
    expect(onPaper.figures.map(({ label }) => label)).toHaveLength(7);
    for (const { label, marks, width } of onPaper.figures) {
      expect(marks, label).toBeGreaterThan(8);
      expect(width, label).toBe(720);
    }
    // A4 in points (ISO 216: 210 × 297 mm), and more than one page of it.
    const text = pdf.toString('latin1');
    expect(text).toMatch(/\/MediaBox \[0 0 59[45](\.\d+)? 84[12](\.\d+)?\]/);
    expect(text.match(/\/Type \/Page\b/g)?.length).toBeGreaterThan(2);
  });

  it('shows no control, overlaps nothing and breaks inside no figure', async () => {
    await page.emulateMedia({ media: 'print' });
    await page.setViewportSize({ width: 643, height: 957 });
    await expect.poll(() => page.locator('#posterior .c68').count()).toBeGreaterThan(2);
    expect(
      await page
        .locator('nav:visible, footer:visible, main button:visible:not(h2 button, table button)')
        .count(),
    ).toBe(0);
    const overlapping = await page.evaluate(() =>
      [...document.querySelectorAll('figure')].flatMap((figure) => {
        const svg = figure.querySelector('[role=img] svg')?.getBoundingClientRect();
        const caption = figure.querySelector('figcaption')?.getBoundingClientRect();
        return svg && caption && svg.bottom > caption.top + 1 ? [figure.textContent?.slice(0, 60)] : [];
      }),
    );
    expect(overlapping).toEqual([]);
    const breaks = await page
      .locator('figure')
      .evaluateAll((all) => all.map((figure) => getComputedStyle(figure).breakInside));
    expect(new Set(breaks)).toEqual(new Set(['avoid']));
    const sideways = await page.evaluate(() =>
      [...document.querySelectorAll('main table, main figure, main p')]
        .filter((element) => element.getBoundingClientRect().right > window.innerWidth + 1)
        .map((element) => element.textContent?.slice(0, 60)),
    );
    expect(sideways).toEqual([]);
    await page.emulateMedia({ media: null });
  });
});
