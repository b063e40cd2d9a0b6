import { chromium, type Browser, type BrowserContext, type Page } from 'playwright-core';

const flags = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--disable-dev-shm-usage',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
  '--host-resolver-rules=MAP * ~NOTFOUND, EXCLUDE 127.0.0.1',
];

export function launchBrowser(): Promise<Browser> {
  return chromium.launch({ executablePath: '/usr/bin/chromium', args: flags });
}

export interface Visit {
  context: BrowserContext;
  page: Page;
  /** Console errors, uncaught errors and answers of 500 and above so far. */
  faults: string[];
  /** Full page loads so far; a walk without a reload has one for each address typed. */
  loads: () => number;
}

/** A person with a browser of their own: own cookies, a size of window, a colour scheme. */
export async function visit(
  browser: Browser,
  options: { width?: number; height?: number; colorScheme?: 'light' | 'dark' } = {},
): Promise<Visit> {
  const context = await browser.newContext({
    viewport: { width: options.width ?? 1440, height: options.height ?? 900 },
    colorScheme: options.colorScheme ?? 'light',
    reducedMotion: 'reduce',
    acceptDownloads: true,
  });
  const page = await context.newPage();
  const faults: string[] = [];
  let loads = 0;
  page.on('console', (message) => {
    if (message.type() === 'error') faults.push(`console: ${message.text()}`);
  });
  page.on('pageerror', (error) => faults.push(`page: ${error.message}`));
  page.on('response', (response) => {
    if (response.status() >= 500) faults.push(`${response.status()} ${response.url()}`);
  });
  page.on('load', () => (loads += 1));
  return { context, page, faults, loads: () => loads };
}
