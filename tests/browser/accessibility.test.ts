import { readdirSync } from 'node:fs';
import path from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { faultsInAllLooks } from './accessible';
import { launchBrowser, visit, type Visit } from './browser';
import { ask, signInBy } from './fitted-notebook';
import { freshLinks } from './instance';

const { url, state } = inject('instance');
const links = freshLinks(state);
const app = path.resolve(import.meta.dirname, '../../app');

type Who = 'guest' | 'analyst' | 'lead' | 'admin';
interface Places {
  group: string;
  notebook: string;
  measurement: string;
}
interface Row {
  who: Who;
  place: (places: Places) => string;
  /** What has to be done before the page is the one that is meant. */
  before?: (page: Page) => Promise<void>;
  after?: (page: Page) => Promise<void>;
}

const nobody = '00000000-0000-4000-8000-000000000000';
const at = (place: string) => () => place;

/** An answer that no page reckons with: what a fault of ours looks like to whoever meets it. */
async function brokenAnswers(page: Page): Promise<void> {
  await page.route('**/api/v1/me', (route) => route.fulfill({ json: {} }));
}

/** Every section open and every part of it made. */
async function unfolded(page: Page): Promise<void> {
  for (const title of await page.locator('section h2 button[aria-expanded=false]').all()) await title.click();
  await page.waitForLoadState('networkidle');
}

/** Every file under app that draws a page, and how it is come to. */
const rows: Readonly<Record<string, Row | readonly Row[]>> = {
  'not-found.tsx': [
    { who: 'guest', place: at('/nothing') },
    { who: 'analyst', place: at('/administration') },
  ],
  'error.tsx': {
    who: 'analyst',
    place: at('/account'),
    before: brokenAnswers,
    after: (page) => page.getByRole('heading', { name: 'This page could not be drawn' }).waitFor(),
  },
  '(account)/sign-in/page.tsx': { who: 'guest', place: at('/sign-in') },
  '(account)/sign-in/sent/page.tsx': { who: 'guest', place: at('/sign-in/sent') },
  '(account)/sign-in/error/page.tsx': { who: 'guest', place: at('/sign-in/error?error=Verification') },
  '(account)/sign-in/confirm/page.tsx': [
    { who: 'guest', place: () => links['reader@demo.beatnote.example'].replace(url, '') },
    { who: 'guest', place: at('/sign-in/confirm') },
  ],
  '(account)/mailbox/page.tsx': { who: 'guest', place: at('/mailbox') },
  '(account)/account/page.tsx': { who: 'analyst', place: at('/account') },
  '(account)/administration/page.tsx': { who: 'admin', place: at('/administration') },
  '(group)/page.tsx': [
    { who: 'analyst', place: at('/?groups') },
    { who: 'admin', place: at('/') },
  ],
  '(group)/groups/[id]/page.tsx': { who: 'analyst', place: ({ group }) => group },
  '(group)/groups/[id]/not-found.tsx': { who: 'analyst', place: at(`/groups/${nobody}`) },
  '(group)/groups/[id]/log/page.tsx': { who: 'lead', place: ({ group }) => `${group}/log` },
  '(group)/groups/[id]/members/page.tsx': { who: 'lead', place: ({ group }) => `${group}/members` },
  '(group)/groups/[id]/measurements/page.tsx': {
    who: 'analyst',
    place: ({ group }) => `${group}/measurements`,
  },
  '(group)/groups/[id]/measurements/new/page.tsx': {
    who: 'analyst',
    place: ({ group }) => `${group}/measurements/new`,
  },
  '(group)/groups/[id]/notebooks/new/page.tsx': {
    who: 'analyst',
    place: ({ group }) => `${group}/notebooks/new`,
  },
  '(group)/notebooks/[id]/page.tsx': {
    who: 'analyst',
    place: ({ notebook }) => notebook,
    after: unfolded,
  },
  '(group)/notebooks/[id]/not-found.tsx': { who: 'analyst', place: at(`/notebooks/${nobody}`) },
  '(group)/notebooks/[id]/revisions/page.tsx': {
    who: 'analyst',
    place: ({ notebook }) => `${notebook}/revisions`,
  },
  '(group)/measurements/[id]/page.tsx': {
    who: 'analyst',
    place: ({ measurement }) => measurement,
    after: unfolded,
  },
  '(group)/measurements/[id]/not-found.tsx': { who: 'analyst', place: at(`/measurements/${nobody}`) },
  '(group)/measurements/[id]/versions/new/page.tsx': {
    who: 'analyst',
    place: ({ measurement }) => `${measurement}/versions/new`,
  },
};

let browser: Browser;
let places: Places;
const people = {} as Record<Who, Visit>;

beforeAll(async () => {
  browser = await launchBrowser();
  for (const who of ['guest', 'analyst', 'lead', 'admin'] as const) {
    people[who] = await visit(browser);
    const home = who === 'admin' ? /\/$/ : '**/groups/**';
    if (who !== 'guest') await signInBy(people[who].page, links[`${who}@demo.beatnote.example`], home);
  }
  const { page } = people.analyst;
  const first = async (start: string) =>
    (await page.locator(`a[href^="${start}"]`).first().getAttribute('href')) ?? '/';
  places = {
    group: new URL(page.url()).pathname,
    notebook: await first('/notebooks/'),
    measurement: await first('/measurements/'),
  };
  // A scan and its null heights stand in the notebook; asking for the same one again gives what is stored.
  await ask(page, 'POST', `${places.notebook}/scan`, { nulls: 200 });
});
afterAll(() => browser.close());

const pages = readdirSync(app, { recursive: true, encoding: 'utf8' }).filter((file) =>
  /(^|\/)(page|not-found|error|global-error|loading)\.tsx$/.test(file),
);

describe('every page, at 1440 and 390 px, light and dark', () => {
  it('has a row here', () => {
    expect(Object.keys(rows).toSorted()).toEqual(pages.toSorted());
  });

  it.each(
    Object.entries(rows).flatMap(([file, known]) => [known].flat().map((row, i) => ({ file, row, i }))),
  )('has no serious accessibility finding and no sideways scroll: $file, $i', async ({ row }) => {
    const { page } = people[row.who];
    await row.before?.(page);
    await page.goto(`${url}${row.place(places)}`);
    await page.waitForLoadState('networkidle');
    await row.after?.(page);
    expect(await faultsInAllLooks(page)).toEqual([]);
    await page.unrouteAll();
    await page.setViewportSize({ width: 1440, height: 900 });
  });

  it('begins with a link to the text for whoever uses the keyboard', async () => {
    const { page } = people.analyst;
    await page.goto(`${url}${places.group}`);
    await page.keyboard.press('Tab');
    const focused = await page.evaluate(() => document.activeElement?.getAttribute('href'));
    expect(focused).toBe('#text');
  });
});
