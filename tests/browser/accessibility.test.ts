import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import type { AxeResults } from 'axe-core';
import type { Browser } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';
import { signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);
const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

const looks = [
  { name: 'wide and light', width: 1440, colorScheme: 'light' },
  { name: 'a phone in the dark', width: 390, colorScheme: 'dark' },
] as const;

const guestScreens = [
  '/sign-in',
  '/sign-in/sent',
  '/sign-in/error?error=Verification',
  '/mailbox',
  '/nothing',
];

let browser: Browser;
const people: Partial<Record<string, Visit>> = {};
let screens: string[] = [];

beforeAll(async () => {
  browser = await launchBrowser();
  const first = await visit(browser);
  await signInBy(first.page, links['referee@demo.beatnote.example']);
  const group = new URL(first.page.url()).pathname;
  const own = await first.page
    .locator('a[href^="/notebooks/"], a[href^="/measurements/"]')
    .evaluateAll((anchors) => anchors.map((anchor) => anchor.getAttribute('href') ?? ''));
  const one = (start: string) => own.find((place) => place.startsWith(start)) ?? '/';
  screens = [group, one('/notebooks/'), one('/measurements/'), '/account'];
  const session = await first.context.storageState();
  await first.context.close();
  for (const look of looks) {
    people[look.name] = await visit(browser, look);
    await people[look.name]!.context.addCookies(session.cookies);
  }
});
afterAll(() => browser.close());

async function findings(person: Visit, place: string): Promise<string[]> {
  await person.page.goto(`${url}${place}`);
  await person.page.waitForLoadState('networkidle');
  await person.page.evaluate(axe);
  const { violations } = await person.page.evaluate(() =>
    (globalThis as unknown as { axe: { run(): Promise<AxeResults> } }).axe.run(),
  );
  return violations
    .filter(({ impact }) => impact === 'serious' || impact === 'critical')
    .map(({ id, help, nodes }) => `${place}: ${id}: ${help}: ${nodes[0].target.join(' ')}`);
}

describe.each(looks)('pages, $name', ({ name }) => {
  it('have no serious accessibility finding for a guest', async () => {
    const all: string[] = [];
    for (const place of guestScreens) all.push(...(await findings(people[name]!, place)));
    expect(all).toEqual([]);
  });

  it('have no serious accessibility finding for a member', async () => {
    expect(screens).toHaveLength(4);
    const all: string[] = [];
    for (const place of screens) all.push(...(await findings(people[name]!, place)));
    expect(all).toEqual([]);
  });

  it('never scroll sideways', async () => {
    const { page } = people[name]!;
    for (const place of [...guestScreens, ...screens]) {
      await page.goto(`${url}${place}`);
      await page.waitForLoadState('networkidle');
      const [content, window] = await page.evaluate(() => [
        document.documentElement.scrollWidth,
        document.documentElement.clientWidth,
      ]);
      expect(content, place).toBeLessThanOrEqual(window);
    }
  });

  it('begin with a link to the text for whoever uses the keyboard', async () => {
    const { page } = people[name]!;
    await page.goto(`${url}${screens[0]}`);
    await page.keyboard.press('Tab');
    const focused = await page.evaluate(() => document.activeElement?.getAttribute('href'));
    expect(focused).toBe('#text');
  });
});
