import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { POST as createGroupRoute } from '@/app/api/v1/groups/route';
import { POST as inviteRoute } from '@/app/api/v1/groups/[id]/invitations/route';
import { GET as meRoute } from '@/app/api/v1/me/route';
import { actorOfSession } from '@/lib/auth/sessions';
import { hashOfToken } from '@/lib/auth/tokens';
import { config } from '@/lib/config';
import { listMailbox } from '@/lib/mail';
import { acceptInvitations } from '@/lib/services/invitations';
import { createToken as issueToken } from '@/lib/services/tokens';
import { createdSchema, meSchema } from '@/lib/schemas';
import { database } from '@/lib/db';
import { ApiToken, AuditEvent, Invitation, Membership } from '@/models';
import {
  call,
  closeConnections,
  createGroup,
  createMember,
  createMembership,
  createSession,
  createToken,
  createUser,
  errorOf,
  unique,
} from './harness';

beforeAll(() => void database());
afterAll(closeConnections);

const mailTo = async (address: string) => ((await listMailbox()) ?? []).filter((mail) => mail.to === address);

describe('API tokens', () => {
  it('have 256 random bits and are kept as their SHA-256 alone', async () => {
    const user = await createUser();
    const token = await issueToken(user.email.toUpperCase(), 'notebook machine');
    expect(Buffer.from(token.replace(/^bn_/, ''), 'base64url')).toHaveLength(32);
    const kept = await ApiToken.findAll({ where: { userId: user.userId } });
    expect(kept.map((row) => row.tokenHash)).toEqual([hashOfToken(token)]);
    expect(JSON.stringify(kept)).not.toContain(token);
  });

  it('authenticate their owner and remember when they were used', async () => {
    const user = await createUser();
    const token = await createToken(user);
    const answer = await call(meRoute, { token });
    expect(answer.status).toBe(200);
    expect(meSchema.parse(await answer.json())).toEqual({ id: user.userId, email: user.email, groups: [] });
    const kept = await ApiToken.findOne({ where: { userId: user.userId } });
    expect(Math.abs(Date.now() - (kept?.lastUsedAt?.getTime() ?? 0))).toBeLessThan(10_000);
  });

  it('answer 401 when they are unknown, malformed or revoked', async () => {
    const token = await createToken(await createUser());
    await ApiToken.update({ revokedAt: new Date() }, { where: { tokenHash: hashOfToken(token) } });
    for (const bad of [token, 'bn_unknown', 'x']) {
      expect(await errorOf(await call(meRoute, { token: bad }))).toMatchObject({
        status: 401,
        code: 'unauthenticated',
      });
    }
    const basic = await call(meRoute, { headers: { authorization: 'Basic abc' } });
    expect(basic.status).toBe(401);
  });

  it('make cookies ignored: a bad token is not saved by a good session', async () => {
    const cookie = await createSession(await createUser());
    expect((await call(meRoute, { cookie })).status).toBe(200);
    expect((await call(meRoute, { cookie, token: 'bn_unknown' })).status).toBe(401);
  });

  it('are printed by the command alone, with nothing else on standard output', async () => {
    const user = await createUser();
    const command = ['--import', 'tsx', 'scripts/token.ts', '--email', user.email, '--name', 'cluster'];
    const { stdout } = await promisify(execFile)(process.execPath, command);
    expect(stdout).toMatch(/^bn_[A-Za-z0-9_-]{43}\n$/);
    expect((await call(meRoute, { token: stdout.trim() })).status).toBe(200);
    expect((await ApiToken.findOne({ where: { userId: user.userId } }))?.name).toBe('cluster');
    const unknown = promisify(execFile)(process.execPath, command.with(4, 'nobody@example.org'));
    await expect(unknown).rejects.toMatchObject({ stdout: '', code: 1 });
  });

  it('are for people who have an account', async () => {
    await expect(issueToken('nobody@example.org', 'x')).rejects.toMatchObject({ code: 'not_found' });
  });

  it('are slowed down only well above 20 requests a second', async () => {
    const token = await createToken(await createUser());
    const burst = await Promise.all(Array.from({ length: 60 }, () => call(meRoute, { token })));
    expect(burst.map((answer) => answer.status)).toEqual(Array(60).fill(200));
  });
});

describe('a session', () => {
  it('reads without an Origin and changes only from our own pages', async () => {
    const cookie = await createSession(await createUser());
    const json = { name: unique('group') };
    expect((await call(meRoute, { cookie })).status).toBe(200);
    for (const origin of [undefined, 'null', 'https://elsewhere.example', `${config().url}.example`]) {
      expect(await errorOf(await call(createGroupRoute, { cookie, json, origin }))).toMatchObject({
        status: 403,
        code: 'forbidden',
      });
    }
    expect((await call(createGroupRoute, { cookie, json, origin: config().url })).status).toBe(201);
  });

  it('is asked for where there is none', async () => {
    expect((await call(meRoute)).status).toBe(401);
    expect(await actorOfSession('made-up')).toBeNull();
  });
});

describe('request bodies', () => {
  it('answer 400 for what is no JSON, 415 for another type, 413 above the limit, 422 with the path of the fault', async () => {
    const token = await createToken(await createUser());
    const json = { 'content-type': 'application/json' };
    const send = async (body: string, headers: Record<string, string>) =>
      errorOf(await call(createGroupRoute, { token, body, headers }));
    expect(await send('{"name":', json)).toMatchObject({ status: 400, code: 'bad_request' });
    expect(await send('name=x', { 'content-type': 'text/plain' })).toMatchObject({ status: 415 });
    expect(await send(JSON.stringify({ name: 'x'.repeat(2e6) }), json)).toMatchObject({ status: 413 });
    const empty = await send(JSON.stringify({ name: '' }), json);
    expect(empty).toMatchObject({ status: 422, code: 'invalid', details: [{ path: 'name' }] });
    const extra = await send(JSON.stringify({ name: 'x', owner: 'me' }), json);
    expect(extra).toMatchObject({ status: 422, code: 'invalid' });
  });
});

describe('groups', () => {
  it('are led by whoever creates them, and their log says so', async () => {
    const user = await createUser();
    const token = await createToken(user);
    const created = await call(createGroupRoute, { token, json: { name: '  Large scales  ' } });
    expect(created.status).toBe(201);
    const { id } = createdSchema.parse(await created.json());
    const me = meSchema.parse(await (await call(meRoute, { token })).json());
    expect(me.groups).toEqual([{ id, name: 'Large scales', role: 'lead' }]);
    const log = await AuditEvent.findAll({ where: { groupId: id } });
    expect(log.map((line) => [line.action, line.actorId])).toEqual([['group.create', user.userId]]);
  });
});

describe('invitations', () => {
  const inviteTo = (groupId: string, token: string, json: unknown) =>
    call(inviteRoute, { token, json, params: { id: groupId } });

  it('are mailed and turn into a membership when that address signs in', async () => {
    const groupId = await createGroup();
    const lead = await createMember(groupId, 'lead');
    const email = `${unique('guest')}@example.org`;
    const answer = await inviteTo(groupId, lead.token, { email: email.toUpperCase(), role: 'referee' });
    expect(answer.status).toBe(201);
    const [mail] = await mailTo(email);
    expect(mail.text).toContain(lead.user.email);
    expect(mail.links).toEqual([`${config().url}/groups/${groupId}`]);

    const guest = await createUser(email);
    expect(await Membership.count({ where: { userId: guest.userId } })).toBe(0);
    await acceptInvitations(guest.userId, email);
    await acceptInvitations(guest.userId, email);
    const memberships = await Membership.findAll({ where: { userId: guest.userId } });
    expect(memberships.map(({ groupId: group, role }) => [group, role])).toEqual([[groupId, 'referee']]);
    const log = await AuditEvent.findAll({ where: { groupId }, order: [['createdAt', 'ASC']] });
    expect(log.map((line) => line.action)).toEqual(['group.invite', 'group.join']);
  });

  it('make a person with an account a member at once', async () => {
    const groupId = await createGroup();
    const lead = await createMember(groupId, 'lead');
    const guest = await createUser();
    expect((await inviteTo(groupId, lead.token, { email: guest.email, role: 'reader' })).status).toBe(201);
    expect(await Membership.count({ where: { groupId, userId: guest.userId, role: 'reader' } })).toBe(1);
    const again = await inviteTo(groupId, lead.token, { email: guest.email, role: 'lead' });
    expect(await errorOf(again)).toMatchObject({ status: 409, code: 'conflict' });
  });

  it('take another role while they are open, and stay one', async () => {
    const groupId = await createGroup();
    const lead = await createMember(groupId, 'lead');
    const email = `${unique('guest')}@example.org`;
    await inviteTo(groupId, lead.token, { email, role: 'reader' });
    await inviteTo(groupId, lead.token, { email, role: 'analyst' });
    const open = await Invitation.findAll({ where: { groupId, email } });
    expect(open.map(({ role }) => role)).toEqual(['analyst']);
  });

  it('are for leads, of that very group', async () => {
    const groupId = await createGroup();
    const other = await createGroup();
    const json = { email: 'guest@example.org', role: 'lead' };
    for (const role of ['analyst', 'referee', 'reader'] as const) {
      const { token } = await createMember(groupId, role);
      expect(await errorOf(await inviteTo(groupId, token, json))).toMatchObject({
        status: 403,
        code: 'forbidden',
      });
    }
    const stranger = await createMember(other, 'lead');
    expect((await inviteTo(groupId, stranger.token, json)).status).toBe(404);
    expect(await Invitation.count({ where: { groupId } })).toBe(0);
  });

  it('answer a foreign group, a missing one and a malformed id alike', async () => {
    const { token } = await createMember(await createGroup(), 'lead');
    const foreign = await createGroup();
    const json = { email: 'guest@example.org', role: 'lead' };
    const ids = [foreign, '3f8f2f51-6a0e-4c3c-9a55-0d2b1f6f7a10', 'x', "' OR 1=1"];
    const answers = await Promise.all(ids.map(async (id) => (await inviteTo(id, token, json)).text()));
    expect(new Set(answers).size).toBe(1);
    expect(answers[0]).toContain('not_found');
  });

  it('judge the role before the body, so that nobody learns more than they may', async () => {
    const groupId = await createGroup();
    const { token } = await createMember(groupId, 'reader');
    expect((await inviteTo(groupId, token, { nonsense: true })).status).toBe(403);
  });
});

describe('roles', () => {
  it('differ from group to group', async () => {
    const [first, second] = [await createGroup(), await createGroup()];
    const user = await createUser();
    await createMembership(user, first, 'lead');
    await createMembership(user, second, 'reader');
    const token = await createToken(user);
    const json = () => ({ email: `${unique('guest')}@example.org`, role: 'reader' });
    expect((await call(inviteRoute, { token, json: json(), params: { id: first } })).status).toBe(201);
    expect((await call(inviteRoute, { token, json: json(), params: { id: second } })).status).toBe(403);
  });
});
