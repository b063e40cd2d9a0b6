import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { DELETE as revokeRoute } from '@/app/api/v1/me/tokens/[id]/route';
import { GET as listRoute, POST as makeRoute } from '@/app/api/v1/me/tokens/route';
import { GET as meRoute } from '@/app/api/v1/me/route';
import { config } from '@/lib/config';
import { database } from '@/lib/db';
import { tokenCreatedSchema, tokenSchema, type Token } from '@/lib/schemas';
import { ApiToken } from '@/models';
import { call, closeConnections, createSession, createToken, createUser, errorOf } from './harness';

beforeAll(() => void database());
afterAll(closeConnections);

const origin = () => config().url;

async function signedIn() {
  const user = await createUser();
  const cookie = await createSession(user);
  const make = (json: unknown) => call(makeRoute, { cookie, origin: origin(), json });
  const list = async (): Promise<Token[]> =>
    tokenSchema.array().parse(await (await call(listRoute, { cookie })).json());
  const revoke = (id: string) =>
    call(revokeRoute, { method: 'DELETE', cookie, origin: origin(), params: { id } });
  return { user, cookie, make, list, revoke };
}

describe('personal tokens', () => {
  it('are made in a session, and stand for their owner', async () => {
    const { user, make } = await signedIn();
    const answer = await make({ name: '  cluster  ' });
    expect(answer.status).toBe(201);
    const { token } = tokenCreatedSchema.parse(await answer.json());
    expect(token).toMatch(/^bn_[\w-]{43}$/);
    expect(await (await call(meRoute, { token })).json()).toMatchObject({ id: user.userId });
  });

  it('are listed to their owner alone, newest first, without their secret or its hash', async () => {
    const { make, list, user } = await signedIn();
    const { token } = tokenCreatedSchema.parse(await (await make({ name: 'first' })).json());
    await make({ name: 'second' });
    await ApiToken.update(
      { createdAt: new Date(Date.now() - 60_000) },
      { where: { userId: user.userId, name: 'first' } },
    );
    const listed = await list();
    expect(listed.map(({ name, lastUsedAt, revokedAt }) => [name, lastUsedAt, revokedAt])).toEqual([
      ['second', null, null],
      ['first', null, null],
    ]);
    const hash = (await ApiToken.findByPk(listed[1].id))!.tokenHash;
    const raw = JSON.stringify(await (await call(listRoute, { token })).json());
    expect(raw).toContain(listed[1].id);
    expect(raw).not.toContain(token);
    expect(raw).not.toContain(hash);
    expect((await list())[1].lastUsedAt).not.toBeNull();
    expect(await (await signedIn()).list()).toEqual([]);
  });

  it('are refused to whoever asks with a token, and none is made', async () => {
    const { user, list } = await signedIn();
    const token = await createToken(user);
    const refused = await errorOf(await call(makeRoute, { token, json: { name: 'heir' } }));
    expect(refused).toMatchObject({ status: 403, code: 'forbidden' });
    expect(refused.message).toMatch(/may not make tokens/);
    expect((await list()).map(({ name }) => name)).toEqual(['test']);
  });

  it('need a name of 1 to 120 characters', async () => {
    const { make, list } = await signedIn();
    for (const json of [{}, { name: '  ' }, { name: 'x'.repeat(121) }, { name: 'x', token: 'bn_chosen' }])
      expect(await errorOf(await make(json))).toMatchObject({ status: 422, code: 'invalid' });
    expect(await list()).toEqual([]);
  });

  it('are refused once they are revoked, which keeps its first date', async () => {
    const { make, list, revoke } = await signedIn();
    const { id, token } = tokenCreatedSchema.parse(await (await make({ name: 'lost' })).json());
    expect((await call(meRoute, { token })).status).toBe(200);
    const first = tokenSchema.parse(await (await revoke(id)).json());
    expect(first.revokedAt).not.toBeNull();
    expect((await call(meRoute, { token })).status).toBe(401);
    expect(tokenSchema.parse(await (await revoke(id)).json()).revokedAt).toBe(first.revokedAt);
    expect((await list()).map(({ revokedAt }) => revokedAt)).toEqual([first.revokedAt]);
  });

  it('can revoke one another, and themselves', async () => {
    const { user, make, list } = await signedIn();
    const { id } = tokenCreatedSchema.parse(await (await make({ name: 'other' })).json());
    const token = await createToken(user);
    const own = (await list()).find(({ name }) => name === 'test')!.id;
    for (const target of [id, own])
      expect((await call(revokeRoute, { method: 'DELETE', token, params: { id: target } })).status).toBe(200);
    expect((await call(meRoute, { token })).status).toBe(401);
  });

  it('of another person, missing ones and malformed ids answer alike, and nothing is revoked', async () => {
    const owner = await signedIn();
    const { id, token } = tokenCreatedSchema.parse(await (await owner.make({ name: 'mine' })).json());
    const { revoke } = await signedIn();
    const answers = await Promise.all([id, randomUUID(), 'x'].map(async (one) => (await revoke(one)).text()));
    expect(new Set(answers).size).toBe(1);
    expect(answers[0]).toContain('not_found');
    expect((await call(meRoute, { token })).status).toBe(200);
  });
});
