import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { GET as logRoute } from '@/app/api/v1/groups/[id]/audit/route';
import { database } from '@/lib/db';
import { groupLogSchema, type GroupLog } from '@/lib/schemas';
import { AuditEvent } from '@/models';
import { call, closeConnections, createGroup, createMember, errorOf } from './harness';

beforeAll(() => void database());
afterAll(closeConnections);

type Person = Awaited<ReturnType<typeof createMember>>;

const ask = (groupId: string, by: Person, query = '') =>
  call(logRoute, { token: by.token, params: { id: groupId }, path: `/${query}` });
const log = async (groupId: string, by: Person, query = ''): Promise<GroupLog> =>
  groupLogSchema.parse(await (await ask(groupId, by, query)).json());

/** A line a second, but the last two within one millisecond, as transactions at once leave them. */
async function write(groupId: string, by: Person, number: number, subjectType = 'group') {
  for (let i = 0; i < number; i++)
    await AuditEvent.create({
      groupId,
      actorId: by.user.userId,
      action: `${subjectType}.act`,
      subjectType,
      subjectId: null,
      details: { number: i, value: 3.14, secret: 'withheld' },
      createdAt: new Date(Date.UTC(2026, 0, 1, 0, 0, Math.min(i, number - 2))),
    });
}

describe('a group’s log', () => {
  it('is read newest first, a page at a time, each line once', async () => {
    const groupId = await createGroup();
    const lead = await createMember(groupId, 'lead');
    await write(groupId, lead, 7);
    const seen: GroupLog['events'] = [];
    let next: string | null = '';
    let pages = 0;
    while (next !== null) {
      const page: GroupLog = await log(
        groupId,
        lead,
        `?limit=3${next ? `&before=${encodeURIComponent(next)}` : ''}`,
      );
      expect(page.events.length).toBeLessThanOrEqual(3);
      seen.push(...page.events);
      next = page.next;
      pages += 1;
    }
    expect([pages, new Set(seen.map(({ id }) => id)).size]).toEqual([3, 7]);
    const times = seen.map(({ at }) => at);
    expect(times).toEqual([...times].sort().reverse());
  });

  it('shows of the details what is on its list, and nothing else', async () => {
    const groupId = await createGroup();
    const lead = await createMember(groupId, 'lead');
    await write(groupId, lead, 2);
    const text = await (await ask(groupId, lead)).text();
    expect(text).not.toMatch(/3\.14|withheld/);
    expect((await log(groupId, lead)).events.map(({ details }) => details.number)).toContain(1);
  });

  it('is filtered by person and by kind, and names everyone who is in it', async () => {
    const groupId = await createGroup();
    const [lead, analyst] = [await createMember(groupId, 'lead'), await createMember(groupId, 'analyst')];
    await write(groupId, lead, 3, 'membership');
    await write(groupId, analyst, 2, 'notebook');
    const who = { userId: analyst.user.userId, email: analyst.user.email };
    const of = await log(groupId, lead, `?person=${who.userId}`);
    expect(of.events.map(({ actor }) => actor)).toEqual([who, who]);
    expect(of.people).toHaveLength(2);
    expect((await log(groupId, lead, '?kind=people')).events).toHaveLength(3);
    expect((await log(groupId, lead, '?kind=notebook')).events).toHaveLength(2);
    expect((await log(groupId, lead, `?kind=fit&person=${who.userId}`)).events).toEqual([]);
  });

  it('is for the roles that work in the group, not for readers, and holds nothing of another group', async () => {
    const groupId = await createGroup();
    const lead = await createMember(groupId, 'lead');
    await write(groupId, lead, 2);
    for (const role of ['analyst', 'referee'] as const)
      expect((await log(groupId, await createMember(groupId, role))).events).toHaveLength(2);
    expect((await ask(groupId, await createMember(groupId, 'reader'))).status).toBe(403);
    const other = await createGroup();
    const stranger = await createMember(other, 'lead');
    expect((await ask(groupId, stranger)).status).toBe(404);
    expect((await log(other, stranger)).events).toEqual([]);
  });

  it('refuses what names no page, with the place', async () => {
    const groupId = await createGroup();
    const lead = await createMember(groupId, 'lead');
    for (const query of ['?before=x', `?before=x_${randomUUID()}`, '?limit=0', '?limit=201', '?person=me']) {
      const refused = await errorOf(await ask(groupId, lead, query));
      expect([query, refused.status]).toEqual([query, 422]);
      expect(refused.details[0].path).toMatch(/before|limit|person/);
    }
  });
});
