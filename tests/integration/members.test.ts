import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import { DELETE as takeBackRoute } from '@/app/api/v1/groups/[id]/invitations/[invitationId]/route';
import { POST as sendRoute } from '@/app/api/v1/groups/[id]/invitations/[invitationId]/send/route';
import { GET as listRoute, POST as inviteRoute } from '@/app/api/v1/groups/[id]/invitations/route';
import { DELETE as removeRoute, PATCH as roleRoute } from '@/app/api/v1/groups/[id]/members/[userId]/route';
import { GET as groupRoute, PATCH as renameRoute } from '@/app/api/v1/groups/[id]/route';
import { database } from '@/lib/db';
import { AppError } from '@/lib/errors';
import { listMailbox } from '@/lib/mail';
import { acceptInvitations } from '@/lib/services/invitations';
import * as transport from '@/lib/mail/transport';
import { createdSchema, groupSchema, invitationSchema, type Role } from '@/lib/schemas';
import { AuditEvent, Membership } from '@/models';
import { call, closeConnections, createGroup, createMember, createUser, errorOf, unique } from './harness';

beforeAll(() => void database());
afterAll(closeConnections);

type Person = Awaited<ReturnType<typeof createMember>>;

const mailTo = async (address: string) =>
  ((await listMailbox()) ?? []).filter((mail) => mail.to === address).map(({ text }) => text);

const changeRole = (groupId: string, by: Person, userId: string, role: string) =>
  call(roleRoute, { method: 'PATCH', token: by.token, json: { role }, params: { id: groupId, userId } });
const remove = (groupId: string, by: Person, userId: string) =>
  call(removeRoute, { method: 'DELETE', token: by.token, params: { id: groupId, userId } });
const takeBack = (groupId: string, by: Person, invitationId: string) =>
  call(takeBackRoute, { method: 'DELETE', token: by.token, params: { id: groupId, invitationId } });
const again = (groupId: string, by: Person, invitationId: string) =>
  call(sendRoute, { method: 'POST', token: by.token, params: { id: groupId, invitationId } });
const home = async (groupId: string, by: Person) =>
  groupSchema.parse(await (await call(groupRoute, { token: by.token, params: { id: groupId } })).json());
const roleOf = async (groupId: string, person: Person): Promise<string | undefined> =>
  (await Membership.findOne({ where: { groupId, userId: person.user.userId } }))?.role;
const logOf = async (groupId: string) =>
  (await AuditEvent.findAll({ where: { groupId }, order: [['createdAt', 'ASC']] })).map(
    ({ action, actorId, details }) => ({ action, actorId, details }),
  );

async function groupOf(...given: Role[]) {
  const name = unique('group');
  const groupId = await createGroup(name);
  const people: Person[] = [];
  for (const role of given) people.push(await createMember(groupId, role));
  return { groupId, name, people };
}

describe('a member’s role', () => {
  it('is changed by a lead, holds at once, is recorded, and mailed to the member', async () => {
    const { groupId, name, people } = await groupOf('lead', 'analyst');
    const [lead, member] = people;
    const answer = await changeRole(groupId, lead, member.user.userId, 'referee');
    expect(await answer.json()).toEqual({
      ...member.user,
      role: 'referee',
      since: expect.stringMatching(/Z$/) as string,
    });
    expect((await home(groupId, member)).role).toBe('referee');
    expect(await logOf(groupId)).toEqual([
      {
        action: 'group.roles',
        actorId: lead.user.userId,
        details: { email: member.user.email, from: 'analyst', role: 'referee' },
      },
    ]);
    const [mail, ...more] = await mailTo(member.user.email);
    expect(more).toEqual([]);
    for (const word of [lead.user.email, name, 'from analyst to referee']) expect(mail).toContain(word);
  });

  it('that stays what it was is neither recorded nor mailed', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst');
    expect((await changeRole(groupId, people[0], people[1].user.userId, 'analyst')).status).toBe(200);
    expect((await changeRole(groupId, people[0], people[0].user.userId, 'lead')).status).toBe(200);
    expect([await logOf(groupId), await mailTo(people[1].user.email)]).toEqual([[], []]);
  });

  it('of the only lead stays lead, with the remedy; with two of them one can be changed', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst');
    const [first, second] = people;
    const refused = await errorOf(await changeRole(groupId, first, first.user.userId, 'reader'));
    expect(refused).toMatchObject({ status: 409, code: 'conflict' });
    expect(refused.message).toMatch(/Make another member lead first/);
    expect(await roleOf(groupId, first)).toBe('lead');
    await changeRole(groupId, first, second.user.userId, 'lead');
    expect((await changeRole(groupId, second, first.user.userId, 'reader')).status).toBe(200);
    expect(await roleOf(groupId, first)).toBe('reader');
  });

  it('is no business of other roles, nor of leads of other groups, nor one that doesn’t exist', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst', 'referee', 'reader');
    const target = people[1].user.userId;
    for (const person of people.slice(1))
      expect((await changeRole(groupId, person, target, 'lead')).status).toBe(403);
    const stranger = (await groupOf('lead')).people[0];
    expect((await changeRole(groupId, stranger, target, 'lead')).status).toBe(404);
    expect((await changeRole(groupId, people[0], target, 'owner')).status).toBe(422);
    expect(await roleOf(groupId, people[1])).toBe('analyst');
  });
});

describe('a group’s name', () => {
  const rename = (groupId: string, by: Person, name: string) =>
    call(renameRoute, { method: 'PATCH', token: by.token, json: { name }, params: { id: groupId } });

  it('is changed by a lead, trimmed, and recorded with the old one', async () => {
    const { groupId, name, people } = await groupOf('lead', 'analyst');
    expect(await (await rename(groupId, people[0], '  Other name ')).json()).toEqual({
      id: groupId,
      name: 'Other name',
    });
    expect((await home(groupId, people[1])).name).toBe('Other name');
    await rename(groupId, people[0], 'Other name');
    expect(await logOf(groupId)).toEqual([
      { action: 'group.rename', actorId: people[0].user.userId, details: { from: name, name: 'Other name' } },
    ]);
  });

  it('is no business of others, and is never empty', async () => {
    const { groupId, name, people } = await groupOf('lead', 'analyst', 'referee', 'reader');
    for (const person of people.slice(1)) expect((await rename(groupId, person, 'x')).status).toBe(403);
    for (const bad of ['', '   ', 'x'.repeat(121)])
      expect((await rename(groupId, people[0], bad)).status).toBe(422);
    expect((await home(groupId, people[0])).name).toBe(name);
  });
});

describe('a membership', () => {
  it('is ended by a lead: the member sees the group no more, hears of it, and the record says who did it', async () => {
    const { groupId, name, people } = await groupOf('lead', 'referee');
    const [lead, member] = people;
    expect((await remove(groupId, lead, member.user.userId)).status).toBe(200);
    expect((await call(groupRoute, { token: member.token, params: { id: groupId } })).status).toBe(404);
    expect(await logOf(groupId)).toEqual([
      {
        action: 'group.remove',
        actorId: lead.user.userId,
        details: { email: member.user.email, role: 'referee' },
      },
    ]);
    const [mail] = await mailTo(member.user.email);
    for (const word of [lead.user.email, name, 'removed you']) expect(mail).toContain(word);
  });

  it.each(['analyst', 'referee', 'reader'] as const)('is ended by the %s who leaves', async (role) => {
    const { groupId, people } = await groupOf('lead', role);
    const [, member] = people;
    expect((await remove(groupId, member, member.user.userId)).status).toBe(200);
    expect(await roleOf(groupId, member)).toBeUndefined();
    expect((await logOf(groupId)).map(({ action, actorId }) => [action, actorId])).toEqual([
      ['group.leave', member.user.userId],
    ]);
    expect((await mailTo(member.user.email))[0]).toMatch(/You have left the group/);
  });

  it('of another is not ended by those who don’t lead', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst', 'referee', 'reader');
    for (const person of people.slice(1)) {
      const refused = await errorOf(await remove(groupId, person, people[0].user.userId));
      expect(refused).toMatchObject({ status: 403, code: 'forbidden' });
    }
    expect(await Membership.count({ where: { groupId } })).toBe(4);
  });

  it('of the only lead can’t be ended, with the remedy', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst');
    const refused = await errorOf(await remove(groupId, people[0], people[0].user.userId));
    expect(refused).toMatchObject({ status: 409, code: 'conflict' });
    expect(refused.message).toMatch(/Make another member lead first/);
    expect([await roleOf(groupId, people[0]), await logOf(groupId)]).toEqual(['lead', []]);
  });

  it('of one lead remains when two of them leave, or demote each other, at once', async () => {
    for (let round = 0; round < 5; round++) {
      const { groupId, people } = await groupOf('lead', 'lead');
      const [a, b] = people;
      const answers = await Promise.all(
        round % 2
          ? [remove(groupId, a, a.user.userId), remove(groupId, b, b.user.userId)]
          : [
              changeRole(groupId, a, b.user.userId, 'reader'),
              changeRole(groupId, b, a.user.userId, 'reader'),
            ],
      );
      expect(answers.filter(({ status }) => status === 200)).toHaveLength(1);
      expect(await Membership.count({ where: { groupId, role: 'lead' } })).toBe(1);
    }
  });

  it('can begin again after an end', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst');
    const [lead, member] = people;
    await remove(groupId, lead, member.user.userId);
    const json = { email: member.user.email, role: 'reader' };
    expect((await call(inviteRoute, { token: lead.token, json, params: { id: groupId } })).status).toBe(201);
    expect(await roleOf(groupId, member)).toBe('reader');
  });

  it('of another group, a missing one and a malformed id answer alike', async () => {
    const { groupId, people } = await groupOf('lead');
    const foreign = (await groupOf('lead', 'analyst')).people[1];
    const ids = [foreign.user.userId, randomUUID(), 'x'];
    for (const act of [
      (id: string) => remove(groupId, people[0], id),
      (id: string) => changeRole(groupId, people[0], id, 'reader'),
    ]) {
      const answers = await Promise.all(ids.map(async (id) => (await act(id)).text()));
      expect(new Set(answers).size).toBe(1);
      expect(answers[0]).toContain('not_found');
    }
  });
});

describe('an open invitation', () => {
  async function invited(groupId: string, lead: Person) {
    const email = `${unique('guest')}@example.org`;
    const json = { email, role: 'analyst' };
    const answer = await call(inviteRoute, { token: lead.token, json, params: { id: groupId } });
    return { email, id: createdSchema.parse(await answer.json()).id };
  }

  it('is listed to leads alone, until it is answered', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst', 'referee', 'reader');
    const { email, id } = await invited(groupId, people[0]);
    const [seen, ...others] = await Promise.all(people.map((person) => home(groupId, person)));
    expect(seen.invitations).toMatchObject([{ id, email, role: 'analyst' }]);
    expect(others.map(({ invitations }) => invitations)).toEqual([[], [], []]);
    const guest = await createUser(email);
    await acceptInvitations(guest.userId, email);
    expect((await home(groupId, people[0])).invitations).toEqual([]);
  });

  it('is taken back by a lead: whoever signs in with it afterwards is no member, and was told', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst');
    const { email, id } = await invited(groupId, people[0]);
    expect((await takeBack(groupId, people[1], id)).status).toBe(403);
    expect((await takeBack(groupId, people[0], id)).status).toBe(200);
    const guest = await createUser(email);
    await acceptInvitations(guest.userId, email);
    expect(await Membership.count({ where: { groupId, userId: guest.userId } })).toBe(0);
    expect((await home(groupId, people[0])).invitations).toEqual([]);
    expect((await logOf(groupId)).map(({ action }) => action)).toEqual(['group.invite', 'group.uninvite']);
    expect((await mailTo(email)).filter((text) => text.includes('taken back'))).toHaveLength(1);
  });

  it('is listed by a route of its own, and mailed again with the same link, which is recorded', async () => {
    const { groupId, people } = await groupOf('lead', 'analyst');
    const { email, id } = await invited(groupId, people[0]);
    const list = async (by: Person) => call(listRoute, { token: by.token, params: { id: groupId } });
    const [before] = invitationSchema.array().parse(await (await list(people[0])).json());
    expect(before).toMatchObject({ id, email, role: 'analyst' });
    expect(before.sentAt).not.toBeNull();
    expect((await list(people[1])).status).toBe(403);

    expect((await again(groupId, people[1], id)).status).toBe(403);
    const after = invitationSchema.parse(await (await again(groupId, people[0], id)).json());
    expect(Date.parse(after.sentAt ?? '')).toBeGreaterThan(Date.parse(before.sentAt ?? ''));
    const mails = (await mailTo(email)).map((text) => text.includes(`/groups/${groupId}`));
    expect(mails).toEqual([true, true]);
    expect((await logOf(groupId)).map(({ details }) => details?.again)).toEqual([undefined, true]);
  });

  it('can be mailed again five times, then not before some minutes have passed', async () => {
    const { groupId, people } = await groupOf('lead');
    const { email, id } = await invited(groupId, people[0]);
    const statuses: number[] = [];
    for (let i = 0; i < 6; i++) statuses.push((await again(groupId, people[0], id)).status);
    expect(statuses).toEqual([200, 200, 200, 200, 200, 429]);
    expect(await mailTo(email)).toHaveLength(6);
  });

  it('stands where its mail can’t go out, and says so until it is mailed', async () => {
    const { groupId, people } = await groupOf('lead');
    const refused = vi.spyOn(transport, 'sendMail').mockRejectedValue(new AppError('unavailable', 'away'));
    const { id } = await invited(groupId, people[0]);
    expect((await home(groupId, people[0])).invitations).toMatchObject([{ id, sentAt: null }]);
    expect(await errorOf(await again(groupId, people[0], id))).toMatchObject({ status: 503 });
    refused.mockRestore();
    expect((await again(groupId, people[0], id)).status).toBe(200);
    expect((await home(groupId, people[0])).invitations[0].sentAt).not.toBeNull();
  });

  it('of another group, one that was answered, a missing one and a malformed id answer alike', async () => {
    const { groupId, people } = await groupOf('lead');
    const other = await groupOf('lead');
    const foreign = await invited(other.groupId, other.people[0]);
    const answered = await invited(groupId, people[0]);
    const guest = await createUser(answered.email);
    await acceptInvitations(guest.userId, answered.email);
    const ids = [foreign.id, answered.id, randomUUID(), 'x'];
    for (const act of [takeBack, again]) {
      const answers = await Promise.all(ids.map(async (id) => (await act(groupId, people[0], id)).text()));
      expect(new Set(answers).size).toBe(1);
      expect(answers[0]).toContain('not_found');
    }
    expect((await home(other.groupId, other.people[0])).invitations).toHaveLength(1);
    expect(await Membership.count({ where: { groupId, userId: guest.userId } })).toBe(1);
  });
});
