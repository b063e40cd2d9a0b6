import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { GET as stateRoute } from '@/app/api/v1/administration/route';
import { PATCH as limitsRoute } from '@/app/api/v1/administration/limits/route';
import { GET as storageRoute } from '@/app/api/v1/administration/storage/route';
import { GET as usersRoute } from '@/app/api/v1/administration/users/route';
import { PATCH as userRoute } from '@/app/api/v1/administration/users/[userId]/route';
import { DELETE as sessionsRoute } from '@/app/api/v1/administration/users/[userId]/sessions/route';
import { GET as meRoute } from '@/app/api/v1/me/route';
import { authHandlers } from '@/lib/auth/handlers';
import { createSignInLink } from '@/lib/auth/links';
import { actorOfSession, cookieName } from '@/lib/auth/sessions';
import { config } from '@/lib/config';
import { database } from '@/lib/db';
import { beat, endBeat } from '@/lib/jobs';
import { tellFacts } from '@/lib/jobs/worker-facts';
import {
  fitLimitsSchema,
  instanceStateSchema,
  siteUsersSchema,
  siteUserSchema,
  storageStateSchema,
} from '@/lib/schemas';
import { Membership, User } from '@/models';
import { storage } from '@/storage';
import {
  call,
  closeConnections,
  createGroup,
  createMember,
  createSession,
  createToken,
  createUser,
  errorOf,
  unique,
} from './harness';

let admin: { userId: string; email: string };
let token: string;

beforeAll(async () => {
  database();
  admin = await createUser();
  await User.update({ siteAdmin: true }, { where: { id: admin.userId } });
  token = await createToken(admin);
});
afterAll(closeConnections);

const find = async (search: string, more = '') =>
  siteUsersSchema.parse(
    await (await call(usersRoute, { token, path: `/?search=${encodeURIComponent(search)}${more}` })).json(),
  );
const change = (userId: string, disabled: boolean) =>
  call(userRoute, { method: 'PATCH', token, params: { userId }, json: { disabled } });
const useLink = (link: string) =>
  authHandlers.POST(
    new Request(`${config().url}/api/auth/callback/nodemailer`, {
      method: 'POST',
      headers: { origin: config().url },
      body: new URLSearchParams(Object.fromEntries(new URL(link).searchParams)),
    }),
  );
const sessionOf = (cookie: string) => cookie.slice(cookieName('session').length + 1);

describe('the site’s users', () => {
  it('are found by a part of the address, with groups, roles, sessions and tokens', async () => {
    const name = unique('team');
    const groupId = await createGroup(name);
    const { user } = await createMember(groupId, 'referee');
    await createSession(user);
    const { users, count, next } = await find(user.email.slice(2));
    expect([count, next]).toEqual([1, null]);
    expect(users).toEqual([
      {
        userId: user.userId,
        email: user.email,
        siteAdmin: false,
        lastSignInAt: null,
        disabledAt: null,
        sessions: 1,
        tokens: 1,
        groups: [{ id: groupId, name, role: 'referee' }],
      },
    ]);
  });

  it('are listed a page at a time, each once; signs of a pattern mean themselves', async () => {
    const word = unique('many');
    const made = await Promise.all(
      Array.from({ length: 5 }, (_, i) => createUser(`${word}-${i}@example.org`)),
    );
    const seen: string[] = [];
    let next: string | null = '';
    while (next !== null) {
      const page: Awaited<ReturnType<typeof find>> = await find(
        word,
        `&limit=2${next ? `&after=${encodeURIComponent(next)}` : ''}`,
      );
      seen.push(...page.users.map(({ email }) => email));
      next = page.next;
    }
    expect(seen).toEqual(made.map(({ email }) => email).sort());
    expect((await find(`${word.slice(0, 4)}%`)).count).toBe(0);
    expect((await find(word.replace('-', '_'))).count).toBe(0);
  });

  it('who are shut out have no session, no token and no way in by mail; they come back as they were', async () => {
    const groupId = await createGroup();
    const { user, token: theirs } = await createMember(groupId, 'analyst');
    const session = sessionOf(await createSession(user));
    const link = await createSignInLink(user.email);

    const shut = siteUserSchema.parse(await (await change(user.userId, true)).json());
    expect([shut.sessions, shut.disabledAt === null]).toEqual([0, false]);
    expect(await actorOfSession(session)).toBeNull();
    expect((await call(meRoute, { token: theirs })).status).toBe(401);
    expect((await useLink(link)).headers.get('location')).toContain('error=');
    const later = await useLink(await createSignInLink(user.email));
    expect(later.headers.get('location')).toBe(`${config().url}/sign-in/error?error=AccessDenied`);
    expect((await find(user.email)).users[0].sessions).toBe(0);

    const back = siteUserSchema.parse(await (await change(user.userId, false)).json());
    expect(back.disabledAt).toBeNull();
    expect((await call(meRoute, { token: theirs })).status).toBe(200);
    expect((await Membership.findOne({ where: { groupId, userId: user.userId } }))?.role).toBe('analyst');
    const before = Date.now();
    expect((await useLink(await createSignInLink(user.email))).headers.getSetCookie().join()).toContain(
      cookieName('session'),
    );
    const [found] = (await find(user.email)).users;
    expect(found.sessions).toBe(1);
    expect(Date.parse(found.lastSignInAt ?? '')).toBeGreaterThan(before - 1_000);
  });

  it('are mailed a link whether they are shut out or not, so that asking tells nobody', async () => {
    const { user } = await createMember(await createGroup(), 'reader');
    await change(user.userId, true);
    const answer = await authHandlers.POST(
      new Request(`${config().url}/api/auth/signin/nodemailer`, {
        method: 'POST',
        headers: { origin: config().url },
        body: new URLSearchParams({ email: user.email, callbackUrl: '/' }),
      }),
    );
    expect(answer.headers.get('location')).toBe(`${config().url}/sign-in/sent`);
  });

  it('keep their tokens when their sessions are ended', async () => {
    const { user, token: theirs } = await createMember(await createGroup(), 'analyst');
    const sessions = [await createSession(user), await createSession(user)].map(sessionOf);
    const ended = await call(sessionsRoute, { method: 'DELETE', token, params: { userId: user.userId } });
    expect(siteUserSchema.parse(await ended.json())).toMatchObject({ sessions: 0, tokens: 1 });
    for (const session of sessions) expect(await actorOfSession(session)).toBeNull();
    expect((await call(meRoute, { token: theirs })).status).toBe(200);
  });

  it('can’t shut themselves out, and one who doesn’t exist isn’t found', async () => {
    expect(await errorOf(await change(admin.userId, true))).toMatchObject({ status: 409, code: 'conflict' });
    expect((await call(meRoute, { token })).status).toBe(200);
    for (const userId of ['x', '00000000-0000-4000-8000-000000000000'])
      expect((await change(userId, true)).status).toBe(404);
  });
});

describe('the state of the site', () => {
  const state = async () => instanceStateSchema.parse(await (await call(stateRoute, { token })).json());

  it('says how fast each service answers', async () => {
    const { services } = await state();
    expect(services.map(({ name }) => name)).toEqual(['database', 'queue', 'storage', 'mail']);
    for (const { state: standing, milliseconds } of services) {
      expect(standing).toBe('ok');
      expect(milliseconds).toBeGreaterThan(0);
      expect(milliseconds).toBeLessThan(2_000);
    }
  });

  it('lists living workers with what they told of themselves, and forgets those that ended', async () => {
    const id = unique('worker');
    await beat(id, 4);
    expect((await state()).workers).toContainEqual(expect.objectContaining({ id, host: null }));
    const facts = {
      host: 'here',
      pid: 7,
      threads: 2,
      fits: 4,
      version: '1',
      startedAt: '2026-01-01T00:00:00.000Z',
    };
    await tellFacts(id, facts);
    const found = (await state()).workers?.find((worker) => worker.id === id);
    expect(found).toMatchObject(facts);
    expect(found?.silentFor).toBeLessThan(5);
    await endBeat(id);
    expect((await state()).workers?.some((worker) => worker.id === id)).toBe(false);
  });

  it('counts tables and objects with their bytes', async () => {
    const objects = async () => {
      const answer = storageStateSchema.parse(await (await call(storageRoute, { token })).json());
      expect(answer.tableBytes).toBe(answer.tables.reduce((sum, { bytes }) => sum + bytes, 0));
      expect(answer.tables.map(({ name }) => name)).toContain('users');
      return answer.objects;
    };
    await storage().ensureBucket();
    await storage().putVerified(unique('objects/counted'), new Uint8Array(12_345));
    const seen = await objects();
    expect(seen?.count).toBeGreaterThan(0);
    expect(seen?.bytes).toBeGreaterThanOrEqual(12_345);
  });
});

describe('the limit of fits', () => {
  const set = (json: unknown) => call(limitsRoute, { method: 'PATCH', token, json });

  it('of a group is set and taken back; what is no limit is refused at its field', async () => {
    const groupId = await createGroup();
    const limitOf = async (answer: Response) =>
      fitLimitsSchema.parse(await answer.json()).groups.find(({ id }) => id === groupId)?.limit;
    expect(await limitOf(await set({ groupId, fits: 5 }))).toBe(5);
    for (const fits of [0, 65, 1.5]) {
      const refused = await errorOf(await set({ groupId, fits }));
      expect([refused.status, refused.details[0].path]).toEqual([422, 'fits']);
    }
    expect(await limitOf(await set({ groupId, fits: null }))).toBeNull();
    const missing = { groupId: '00000000-0000-4000-8000-000000000000', fits: 1 };
    expect((await set(missing)).status).toBe(404);
  });
});
