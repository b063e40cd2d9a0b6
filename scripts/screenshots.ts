import { mkdirSync } from 'node:fs';
import path from 'node:path';
import { chromium, type Page } from 'playwright-core';
import { createSignInLink } from '@/lib/auth/links';
import { closeDatabase } from '@/lib/db';
import { demoEmail } from './demo/scenario';
import { takeInstanceEnvironment } from './instance-environment';

/** `npm run screenshots -- FOLDER`: a PNG of every screen of the running demo, light, dark and at 390 px. */

takeInstanceEnvironment();
const folder = process.argv[2];
const origin = process.env.BEATNOTE_URL;
if (!folder || !origin) {
  process.stderr.write(
    'Say where to: npm run screenshots -- FOLDER, beside a running instance (BEATNOTE_STATE names it).\n',
  );
  process.exit(1);
}
mkdirSync(folder, { recursive: true });

const looks = [
  { name: '1440-light', width: 1440, colorScheme: 'light' },
  { name: '1440-dark', width: 1440, colorScheme: 'dark' },
  { name: '390-light', width: 390, colorScheme: 'light' },
  { name: '390-dark', width: 390, colorScheme: 'dark' },
] as const;

const browser = await chromium.launch({
  executablePath: '/usr/bin/chromium',
  args: [
    '--no-sandbox',
    '--disable-gpu',
    '--disable-dev-shm-usage',
    '--disable-background-networking',
    '--host-resolver-rules=MAP * ~NOTFOUND, EXCLUDE 127.0.0.1',
  ],
});

async function signedIn() {
  const context = await browser.newContext();
  const page = await context.newPage();
  await page.goto(await createSignInLink(demoEmail('analyst')));
  await page.getByRole('button', { name: /sign in/i }).click();
  await page.waitForURL('**/groups/**');
  const first = (place: string) => page.locator(`a[href^="${place}"]`).first().getAttribute('href');
  const group = new URL(page.url()).pathname;
  const [notebook, measurement] = [await first('/notebooks/'), await first('/measurements/')];
  // The notebook is shown with a scan; asking for the same one again gives what is stored.
  if (notebook) {
    const answer = await page.request.post(`${origin}/api/v1${notebook}/scan`, {
      data: { nulls: 2_000 },
      headers: { origin: new URL(page.url()).origin },
      timeout: 90_000,
    });
    if (!answer.ok()) throw new Error(`The scan was refused: ${await answer.text()}`);
  }
  const session = await context.storageState();
  await context.close();
  return { session, group, notebook, measurement };
}

/** Somebody else's session, for pages that only they have. */
async function sessionOf(name: string) {
  const context = await browser.newContext();
  const page = await context.newPage();
  await page.goto(await createSignInLink(demoEmail(name)));
  await page.getByRole('button', { name: /sign in/i }).click();
  await page.waitForURL((there) => !there.pathname.startsWith('/sign-in'));
  const session = await context.storageState();
  await context.close();
  return session;
}

const { session, group, notebook, measurement } = await signedIn();
const others = { lead: await sessionOf('lead'), admin: await sessionOf('admin') };
const screens: { name: string; place: string; guest?: boolean; as?: keyof typeof others }[] = [
  { name: 'sign-in', place: '/sign-in', guest: true },
  { name: 'link-sent', place: '/sign-in/sent', guest: true },
  { name: 'link-unusable', place: '/sign-in/error?error=Verification', guest: true },
  { name: 'mailbox', place: '/mailbox', guest: true },
  { name: 'group', place: group },
  { name: 'measurements', place: `${group}/measurements` },
  { name: 'measurement-new', place: `${group}/measurements/new` },
  { name: 'measurement', place: measurement ?? '/' },
  { name: 'measurement-version', place: measurement ? `${measurement}/versions/new` : '/' },
  { name: 'notebook-new', place: `${group}/notebooks/new` },
  { name: 'notebook', place: notebook ?? '/' },
  { name: 'members', place: `${group}/members`, as: 'lead' },
  { name: 'log', place: `${group}/log`, as: 'lead' },
  { name: 'groups', place: '/?groups', as: 'lead' },
  { name: 'no-group', place: '/', as: 'admin' },
  { name: 'administration', place: '/administration', as: 'admin' },
  { name: 'account', place: '/account' },
  { name: 'not-found', place: '/nothing-here' },
];

async function settle(page: Page): Promise<void> {
  await page.waitForLoadState('networkidle');
  await page.evaluate(() => document.fonts.ready.then(() => undefined));
  await page.waitForTimeout(700);
}

for (const { name: look, width, colorScheme } of looks) {
  for (const { name, place, guest, as } of screens) {
    const context = await browser.newContext({
      viewport: { width, height: 900 },
      colorScheme,
      reducedMotion: 'reduce',
      ...(guest ? {} : { storageState: as ? others[as] : session }),
    });
    const page = await context.newPage();
    await page.goto(`${origin}${place}`);
    await settle(page);
    await page.screenshot({ path: path.join(folder, `${name}-${look}.png`), fullPage: true });
    await context.close();
  }
}
await browser.close();
await closeDatabase();
process.stdout.write(`${looks.length * screens.length} pictures in ${folder}\n`);
process.exit(0);
