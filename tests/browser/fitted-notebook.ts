import type { Page } from 'playwright-core';

/** Signs a person in by the link that the mailbox of the instance shows, and waits for the place they come to. */
export async function signIn(
  page: Page,
  url: string,
  email: string,
  place: string | RegExp = '**/groups/**',
): Promise<void> {
  await page.goto(`${url}/sign-in`);
  await page.getByLabel('E-mail address').fill(email);
  await page.getByRole('button', { name: 'Mail me a link' }).click();
  await page.waitForURL('**/sign-in/sent**');
  await page.goto(`${url}/mailbox`);
  await page
    .locator(`a[href*="/sign-in/confirm"][href*="${encodeURIComponent(email)}"]`)
    .first()
    .click();
  await page.getByRole('button', { name: /sign in/i }).click();
  await page.waitForURL(place);
}

/** Signs a person in by one of the one-time links of `freshLinks`. */
export async function signInBy(
  page: Page,
  link: string,
  place: string | RegExp = '**/groups/**',
): Promise<void> {
  await page.goto(link);
  await page.getByRole('button', { name: /sign in/i }).click();
  await page.waitForURL(place);
}

/** Asks the API in the name of whoever is signed in on the page. */
export function ask<T>(page: Page, method: 'GET' | 'POST', path: string, body?: object): Promise<T> {
  return page.evaluate(
    async ([method, path, body]) => {
      const answer = await fetch(`/api/v1${path}`, {
        method,
        headers: body ? { 'Content-Type': 'application/json' } : undefined,
        body: body ? JSON.stringify(body) : undefined,
      });
      if (!answer.ok) throw new Error(`${method} ${path}: ${answer.status} ${await answer.text()}`);
      return (await answer.json()) as T;
    },
    [method, path, body] as const,
  );
}

/** The demo's notebook of two mixed fields, from the page of its group: whatever other tests add, it is this one. */
export async function demoNotebook(page: Page): Promise<string> {
  const link = page.locator('a[href^="/notebooks/"]', {
    hasText: 'Two mixed fields in the Larkfield deep field',
  });
  const href = await link.first().getAttribute('href');
  if (!href) throw new Error('The group has no notebook of two mixed fields.');
  return href;
}

/** Starts a fit of a notebook and waits until it has ended; gives its number. */
export async function fitted(page: Page, notebook: string, settings: object): Promise<number> {
  const { id } = await ask<{ id: string }>(page, 'POST', `${notebook}/fits`, settings);
  for (;;) {
    const fit = await ask<{ number: number; status: string; message: string | null }>(
      page,
      'GET',
      `/fits/${id}`,
    );
    if (['converged', 'budget-spent'].includes(fit.status)) return fit.number;
    if (['failed', 'stopped'].includes(fit.status))
      throw new Error(`The fit ended as ${fit.status}: ${fit.message ?? ''}`);
    await page.waitForTimeout(500);
  }
}
