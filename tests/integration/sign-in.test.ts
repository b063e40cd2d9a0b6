import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { authHandlers } from '@/lib/auth/handlers';
import { createSignInLink } from '@/lib/auth/links';
import { actorOfSession, cookieName, cookieOf } from '@/lib/auth/sessions';
import { config } from '@/lib/config';
import { database } from '@/lib/db';
import { listMailbox } from '@/lib/mail';
import { Invitation, Membership, Session, User, VerificationToken } from '@/models';
import { closeConnections, createGroup, createSession, createUser, errorOf, unique } from './harness';

beforeAll(() => void database());
afterAll(closeConnections);

const post = (path: string, form: Record<string, string>, headers: Record<string, string> = {}) =>
  authHandlers.POST(
    new Request(`${config().url}/api/auth${path}`, {
      method: 'POST',
      headers: { origin: config().url, ...headers },
      body: new URLSearchParams(form),
    }),
  );

const get = (path: string, headers: Record<string, string> = {}) =>
  authHandlers.GET(new Request(`${config().url}/api/auth${path}`, { headers }));

const fieldsOf = (link: string) => Object.fromEntries(new URL(link).searchParams);
const useLink = (link: string) => post('/callback/nodemailer', fieldsOf(link));
const placeOf = (response: Response) => response.headers.get('location') ?? '';

const sessionOf = (response: Response) => {
  const cookie = response.headers.getSetCookie().find((line) => line.startsWith(`${cookieName('session')}=`));
  return { cookie, value: cookieOf(cookie?.split(';')[0] ?? null, cookieName('session')) };
};

const newAddress = () => `${unique('reader')}@example.org`;

async function mailTo(address: string) {
  return ((await listMailbox()) ?? []).filter((mail) => mail.to === address);
}

describe('the mailed link', () => {
  it('arrives by mail, opens our confirm page and signs its owner in when the button posts', async () => {
    const email = newAddress();
    const asked = await post('/signin/nodemailer', { email, callbackUrl: '/groups' });
    expect(placeOf(asked)).toContain('/sign-in/sent');
    const [mail] = await mailTo(email);
    expect(mail.subject).toBe('Your sign-in link for Beatnote');
    expect(mail.links).toHaveLength(1);
    expect(mail.links[0].startsWith(`${config().url}/sign-in/confirm?`)).toBe(true);

    const used = await useLink(mail.links[0]);
    expect(used.status).toBe(302);
    expect(placeOf(used)).toBe(`${config().url}/groups`);
    const { cookie, value } = sessionOf(used);
    expect(cookie).toMatch(/HttpOnly/i);
    expect(cookie).toMatch(/SameSite=Lax/i);
    expect(await actorOfSession(value ?? '')).toMatchObject({ email });
  });

  it('keeps only a hash of what it mails', async () => {
    const email = newAddress();
    const { token } = fieldsOf(await createSignInLink(email));
    const kept = await VerificationToken.findOne({ where: { identifier: email } });
    expect(token.length).toBeGreaterThanOrEqual(32);
    expect(kept?.token).toMatch(/^[0-9a-f]{64}$/);
    expect(kept?.token).not.toBe(token);
  });

  it('is not used up by a program that only looks at it', async () => {
    const email = newAddress();
    const link = await createSignInLink(email);
    const looked = await get(`/callback/nodemailer${new URL(link).search}`);
    expect(looked.status).toBe(303);
    expect(placeOf(looked)).toBe(link);
    expect(await VerificationToken.count({ where: { identifier: email } })).toBe(1);
    expect(sessionOf(await useLink(link)).value).toBeTruthy();
  });

  it('works once: the second use lands on a page that says so', async () => {
    const link = await createSignInLink(newAddress());
    expect(sessionOf(await useLink(link)).value).toBeTruthy();
    const again = await useLink(link);
    expect(placeOf(again)).toBe(`${config().url}/sign-in/error?error=Verification`);
    expect(sessionOf(again).value).toBeNull();
  });

  it('lets exactly one of ten simultaneous uses in', async () => {
    const link = await createSignInLink(newAddress());
    const answers = await Promise.all(Array.from({ length: 10 }, () => useLink(link)));
    expect(answers.filter((answer) => sessionOf(answer).value !== null)).toHaveLength(1);
  });

  it('is not burnt by a wrong token for the same address', async () => {
    const email = newAddress();
    const link = await createSignInLink(email);
    const wrong = await post('/callback/nodemailer', { ...fieldsOf(link), token: 'f'.repeat(64) });
    expect(placeOf(wrong)).toContain('error=Verification');
    expect(sessionOf(await useLink(link)).value).toBeTruthy();
  });

  it('is refused after it has run out', async () => {
    const email = newAddress();
    const link = await createSignInLink(email);
    await VerificationToken.update(
      { expires: new Date(Date.now() - 1000) },
      { where: { identifier: email } },
    );
    const late = await useLink(link);
    expect(placeOf(late)).toContain('error=Verification');
    expect(await User.count({ where: { email } })).toBe(0);
  });

  it('makes whoever was invited a member', async () => {
    const groupId = await createGroup();
    const lead = await createUser();
    const email = newAddress();
    const invitation = { groupId, email, role: 'analyst', invitedBy: lead.userId, createdAt: new Date() };
    await Invitation.create(invitation);
    const { value } = sessionOf(await useLink(await createSignInLink(email)));
    const actor = await actorOfSession(value ?? '');
    const membership = await Membership.findOne({ where: { groupId, userId: actor?.userId } });
    expect(membership?.role).toBe('analyst');
  });

  it('never leads to another site', async () => {
    const link = await createSignInLink(newAddress());
    const used = await post('/callback/nodemailer', {
      ...fieldsOf(link),
      callbackUrl: 'https://elsewhere.example/',
    });
    expect(new URL(placeOf(used)).origin).toBe(config().url);
  });

  it('is mailed at most ten times in a row to one address', async () => {
    const email = newAddress();
    for (let count = 0; count < 10; count += 1) await post('/signin/nodemailer', { email });
    const refused = await post('/signin/nodemailer', { email });
    expect(placeOf(refused)).toBe(`${config().url}/sign-in?error=TooMany`);
    expect(await mailTo(email)).toHaveLength(10);
  });

  it('is not sent to what is no address', async () => {
    expect(placeOf(await post('/signin/nodemailer', { email: 'nobody' }))).toContain('error=EmailInvalid');
  });
});

describe('forms of sign-in', () => {
  it.each(['/signin/nodemailer', '/callback/nodemailer', '/signout'])(
    'POST /api/auth%s is refused from another origin',
    async (path) => {
      const answer = await post(path, { email: 'a@example.org' }, { origin: 'https://elsewhere.example' });
      expect(await errorOf(answer)).toMatchObject({ status: 403, code: 'forbidden' });
    },
  );

  it('answers 404 for anything that the pages do not use', async () => {
    expect((await get('/providers')).status).toBe(404);
    expect((await post('/session', {})).status).toBe(404);
  });
});

describe('a session', () => {
  it('has the port in its cookie’s name, so that two instances share one browser', () => {
    expect(cookieName('session')).toBe(`beatnote-${new URL(config().url).port}.session`);
  });

  it('tells the client who is signed in, and never its own token', async () => {
    const user = await createUser();
    const cookie = await createSession(user);
    const body = await (await get('/session', { cookie })).text();
    expect(JSON.parse(body)).toEqual({
      user: { id: user.userId, email: user.email },
      expires: expect.any(String) as string,
    });
    expect(body).not.toContain(cookie.split('=')[1]);
  });

  it('ends for good at sign-out', async () => {
    const cookie = await createSession(await createUser());
    const sessionToken = cookie.split('=')[1];
    const left = await post('/signout', { callbackUrl: '/' }, { cookie });
    expect(left.status).toBe(302);
    expect(sessionOf(left).value).toBe('');
    expect(await Session.count({ where: { sessionToken } })).toBe(0);
    expect(await actorOfSession(sessionToken)).toBeNull();
  });

  it('is over when its time has run out', async () => {
    const user = await createUser();
    const sessionToken = unique('old');
    await Session.create({ userId: user.userId, sessionToken, expires: new Date(Date.now() - 1) });
    expect(await actorOfSession(sessionToken)).toBeNull();
  });
});
