import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';

/** Nothing listens here. */
const nowhere = '127.0.0.1:9';

afterAll(() => vi.unstubAllEnvs());

/** The program with fresh connections, made under the environment as it is at that moment. */
async function freshProgram() {
  vi.resetModules();
  const harness = await import('./harness');
  const me = await import('@/app/api/v1/me/route');
  const groups = await import('@/app/api/v1/groups/route');
  const health = await import('@/app/api/v1/health/route');
  return { ...harness, me: me.GET, createGroupRoute: groups.POST, health: health.GET };
}

describe('while Redis is away', () => {
  let program: Awaited<ReturnType<typeof freshProgram>>;
  beforeAll(async () => {
    vi.stubEnv('REDIS_URL', `redis://${nowhere}`);
    program = await freshProgram();
  });
  afterAll(async () => {
    await program.closeConnections();
    vi.unstubAllEnvs();
  });

  it('requests are let through without being counted, and without a long wait', async () => {
    const token = await program.createToken(await program.createUser());
    const started = performance.now();
    expect((await program.call(program.me, { token })).status).toBe(200);
    expect(performance.now() - started).toBeLessThan(2_000);
  });

  it('health names it', async () => {
    const answer = await program.call(program.health);
    expect(answer.status).toBe(200);
    expect(await answer.json()).toMatchObject({
      status: 'degraded',
      database: 'ok',
      queue: 'away',
      workers: 0,
    });
  });
});

describe('while the database is away', () => {
  let program: Awaited<ReturnType<typeof freshProgram>>;
  beforeAll(async () => {
    vi.stubEnv('DATABASE_URL', `mariadb://nobody:secret@${nowhere}/beatnote`);
    program = await freshProgram();
  });
  afterAll(async () => {
    await program.closeConnections();
    vi.unstubAllEnvs();
  });

  it('requests answer 503 in one plain sentence that tells no address and no password', async () => {
    const answer = await program.call(program.me, { token: 'bn_any' });
    const body = await answer.text();
    expect(answer.status).toBe(503);
    expect(JSON.parse(body)).toMatchObject({ error: { code: 'unavailable' } });
    expect(body).not.toMatch(/127\.0\.0\.1|secret|nobody|Sequelize/);
  });

  it('health names it', async () => {
    expect(await (await program.call(program.health)).json()).toMatchObject({
      status: 'degraded',
      database: 'away',
      queue: 'ok',
    });
  });
});

describe('while mail can’t be sent', () => {
  it('asking for a link leads back to the form, which says so', async () => {
    vi.stubEnv('SMTP_URL', `smtp://${nowhere}`);
    const program = await freshProgram();
    const { authHandlers } = await import('@/lib/auth/handlers');
    const origin = process.env.BEATNOTE_URL!;
    const answer = await authHandlers.POST(
      new Request(`${origin}/api/auth/signin/nodemailer`, {
        method: 'POST',
        headers: { origin },
        body: new URLSearchParams({ email: `${program.unique('reader')}@example.org` }),
      }),
    );
    expect(answer.headers.get('location')).toBe(`${origin}/sign-in?error=MailFailed`);
    await program.closeConnections();
    vi.unstubAllEnvs();
  });
});

describe('an unexpected fault of ours', () => {
  it('answers 500 with the number it is logged under and nothing of itself', async () => {
    vi.resetModules();
    vi.doMock('@/lib/services/accounts', () => ({
      readMe: () => Promise.reject(new Error('the secret inside')),
    }));
    const program = await freshProgram();
    const token = await program.createToken(await program.createUser());
    const answer = await program.call(program.me, { token });
    const { error } = (await answer.json()) as { error: { code: string; message: string } };
    expect(answer.status).toBe(500);
    expect(error.code).toBe('internal');
    expect(error.message).not.toContain('secret');
    expect(error.message).toContain(answer.headers.get('x-request-id'));
    vi.doUnmock('@/lib/services/accounts');
    await program.closeConnections();
  });
});

describe('health', () => {
  it('is ok when everything answers', async () => {
    const program = await freshProgram();
    const { storage } = await import('@/storage');
    await storage().ensureBucket();
    expect(await (await program.call(program.health)).json()).toEqual({
      status: 'ok',
      database: 'ok',
      queue: 'ok',
      storage: 'ok',
      workers: expect.any(Number) as number,
      version: expect.stringMatching(/^\d+\.\d+\.\d+$/) as string,
    });
    await program.closeConnections();
  });
});
