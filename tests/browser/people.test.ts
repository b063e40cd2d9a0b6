import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';
import { launchBrowser, visit, type Visit } from './browser';

const { url } = inject('instance');
const word = Date.now().toString(36);
const leadAddress = `lead-${word}@people.example`;
const guestAddress = `guest-${word}@people.example`;
const groupName = `People ${word}`;

let browser: Browser;
let lead: Visit;
let guest: Visit;
let group = '';
beforeAll(async () => {
  browser = await launchBrowser();
  lead = await visit(browser);
  guest = await visit(browser, { width: 390, colorScheme: 'dark' });
});
afterAll(() => browser.close());

/** The text of the newest mail to an address. */
async function mailTo(page: Page, address: string): Promise<string> {
  await page.goto(`${url}/mailbox`);
  return page
    .locator('main ol > li', { hasText: `to ${address}` })
    .first()
    .innerText();
}

/** Asks for a link and uses it, as people do who have the mail. */
async function signIn(page: Page, address: string, place = '/'): Promise<void> {
  await page.goto(`${url}${place}`);
  await page.waitForURL('**/sign-in**');
  await page.getByLabel('E-mail address').fill(address);
  await page.getByRole('button', { name: 'Mail me a link' }).click();
  await page.waitForURL('**/sign-in/sent**');
  await page.goto(`${url}/mailbox`);
  await page
    .locator(`a[href*="/sign-in/confirm"][href*="${encodeURIComponent(address)}"]`)
    .first()
    .click();
  await page.getByRole('button', { name: /sign in/i }).click();
  await page.waitForURL((there) => !there.pathname.startsWith('/sign-in'));
}

/** Goes on with Tab until what has the focus is called so: a person without a pointer finds it, or the test fails. */
async function tabTo(page: Page, name: RegExp): Promise<void> {
  for (let presses = 0; presses < 80; presses++) {
    await page.keyboard.press('Tab');
    const focused = await page.evaluate(() => {
      const element = document.activeElement;
      // Tables that may scroll take the focus too, and hold the words of all their buttons.
      if (!element?.matches('a, button, input, select')) return '';
      const labels =
        element instanceof HTMLInputElement || element instanceof HTMLSelectElement ? element.labels : null;
      return [...(labels ?? [])].map((label) => label.innerText).join(' ') || (element.textContent ?? '');
    });
    if (name.test(focused)) return;
  }
  throw new Error(`Tab never comes to ${String(name)}.`);
}

/** Opens a page and waits until its script has taken over. */
async function open(page: Page, place: string): Promise<void> {
  await page.goto(`${url}${place}`);
  await page.waitForLoadState('networkidle');
}

const text = (page: Page) => page.locator('main').innerText();

describe('people, by keyboard alone', () => {
  it('somebody new finds a calm page that says how to get in, and creates a group', async () => {
    const { page } = lead;
    await signIn(page, leadAddress);
    expect(await text(page)).toContain('No group yet');
    expect(await text(page)).toContain(leadAddress);
    await page.waitForLoadState('networkidle');
    await tabTo(page, /Name of the group/);
    await page.keyboard.type(groupName);
    await page.keyboard.press('Enter');
    await page.waitForURL('**/groups/*');
    group = new URL(page.url()).pathname;
  });

  it('a lead invites by e-mail; the invitation stands in the list and is in the mail', async () => {
    const { page } = lead;
    await open(page, `${group}/members`);
    expect(await text(page)).toContain('A group always has a lead');
    expect(await text(page)).toContain('stays, as the only lead');
    await tabTo(page, /Invite by e-mail/);
    await page.keyboard.type(guestAddress);
    await page.keyboard.press('Tab');
    await page.keyboard.type('ref');
    expect(await page.getByLabel('As').inputValue()).toBe('referee');
    expect(await text(page)).toMatch(/A referee may .*read the log/);
    await tabTo(page, /^Invite$/);
    await page.keyboard.press('Enter');
    await expect.poll(() => text(page)).toContain(`${guestAddress} is invited as referee`);
    const list = page.getByRole('region', { name: 'Open invitations' });
    expect(await list.innerText()).toMatch(/referee[\s\S]*waits, mailed/);
    const mail = await mailTo(page, guestAddress);
    expect(mail).toContain(`${leadAddress} has invited you to the group “${groupName}” as referee`);
    expect(mail).toContain(`${url}${group}`);
  });

  it('the invited person opens the mailed address, signs in and is in the group', async () => {
    await signIn(guest.page, guestAddress, group);
    await guest.page.waitForURL(`**${group}`);
    expect(await guest.page.getByRole('heading', { level: 1 }).innerText()).toBe(groupName);
  });

  it('the lead gives them another role, with the focus back where it was; a mail tells of it', async () => {
    const { page } = lead;
    await open(page, `${group}/members`);
    const loads = lead.loads();
    await tabTo(page, new RegExp(`Change role of ${guestAddress}`));
    await page.keyboard.press('Enter');
    await tabTo(page, /New role/);
    await page.keyboard.type('ana');
    await tabTo(page, /Make analyst/);
    await page.keyboard.press('Enter');
    await expect.poll(() => text(page)).toContain(`${guestAddress} is analyst from now on`);
    await expect
      .poll(() => page.evaluate(() => document.activeElement?.textContent))
      .toBe(`Change role of ${guestAddress}`);
    expect(lead.loads()).toBe(loads);
    expect(await mailTo(page, guestAddress)).toContain('from referee to analyst');
  });

  it('the member sees the list without a lead’s controls, and changes group by the menu', async () => {
    const { page } = guest;
    await open(page, `${group}/members`);
    const members = page.getByRole('region', { name: 'Members and their roles' });
    expect(await members.innerText()).not.toMatch(/Change role|Remove/);
    expect(await page.getByRole('region', { name: 'Invitations' }).count()).toBe(0);
    await tabTo(page, new RegExp(groupName));
    await page.keyboard.press('ArrowDown');
    await expect
      .poll(() => page.evaluate(() => document.activeElement?.textContent))
      .toBe(`${groupName}analyst`);
    await page.keyboard.press('Escape');
    expect(await page.evaluate(() => document.activeElement?.getAttribute('aria-expanded'))).toBe('false');
    await page.keyboard.press('Enter');
    await tabTo(page, /All groups, or a new one/);
    await page.keyboard.press('Enter');
    await page.waitForURL('**/?groups');
    expect(await text(page)).toContain('as analyst');
  });

  it('the member leaves, after a question that names the group, and the address then names nothing for them', async () => {
    const { page } = guest;
    await open(page, `${group}/members`);
    await tabTo(page, /^Leave the group$/);
    await page.keyboard.press('Enter');
    await expect.poll(() => text(page)).toContain(`Leave “${groupName}”?`);
    await tabTo(page, /^Leave the group$/);
    await page.keyboard.press('Enter');
    await page.waitForURL('**/?groups');
    await page.goto(`${url}${group}`);
    expect(await text(page)).toContain(`signed in as ${guestAddress}`);
  });

  it('the log tells all of it, by kind', async () => {
    const { page } = lead;
    await open(page, `${group}/log`);
    const log = page.getByRole('region', { name: 'Log of the group' });
    for (const line of [
      'left the group, as analyst',
      `changed the role of ${guestAddress} from referee to analyst`,
      'joined as referee',
      `invited ${guestAddress} as referee`,
      'created the group',
    ])
      expect(await log.innerText()).toContain(line);
    await page.getByLabel('About').selectOption('fit');
    await expect.poll(() => text(page)).toContain('Nothing in the log is of this kind');
    expect(page.url()).toContain('kind=fit');
  });

  it('a session that has ended is said in a line that leads back to the same place', async () => {
    const { page, context } = lead;
    await open(page, `${group}/members`);
    await context.clearCookies();
    await page.getByLabel('Name of the group').fill('Another');
    await page.getByRole('button', { name: 'Rename the group' }).click();
    const way = page.getByRole('link', { name: 'Sign in and come back here' });
    await way.waitFor();
    expect(await way.getAttribute('href')).toBe(
      `/sign-in?callbackUrl=${encodeURIComponent(`${group}/members`)}`,
    );
  });
});
