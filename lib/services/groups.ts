import { Group, Membership } from '@/models';
import { database } from '@/lib/db';
import { notFound } from '@/lib/errors';
import { actionsFor, may } from '@/lib/policies';
import { roleSchema, type Group as GroupDto, type GroupNamed } from '@/lib/schemas';
import type { Access, Actor } from './access';
import { recordEvent } from './audit';
import { openInvitations } from './invitations';
import { measurementSummaries } from './measurements';
import { notebookSummaries } from './notebooks';
import { emailsOf } from './people';

/** Creates a group with its creator as lead. */
export async function createGroup(actor: Actor, body: { name: string }): Promise<{ id: string }> {
  return database().transaction(async (transaction) => {
    const now = new Date();
    const { id } = await Group.create({ name: body.name, createdAt: now }, { transaction });
    await Membership.create(
      { groupId: id, userId: actor.userId, role: 'lead', createdAt: now },
      { transaction },
    );
    await recordEvent(
      { groupId: id, actorId: actor.userId, action: 'group.create', subjectType: 'group', subjectId: id },
      transaction,
    );
    return { id };
  });
}

/** Gives a group another name; a name that stays what it was isn't recorded. */
export async function renameGroup(access: Access, { name }: { name: string }): Promise<GroupNamed> {
  access.require('group.rename');
  const { groupId, actor } = access;
  return database().transaction(async (transaction) => {
    const group = await Group.findByPk(groupId, { lock: transaction.LOCK.UPDATE, transaction });
    if (!group) throw notFound('group');
    const from = group.name;
    if (from === name) return { id: groupId, name };
    await group.update({ name }, { transaction });
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'group.rename',
        subjectType: 'group',
        subjectId: groupId,
        details: { from, name },
      },
      transaction,
    );
    return { id: groupId, name };
  });
}

/** A group's home as the asking member sees it: what the role doesn't read is left out. */
export async function readGroup(access: Access): Promise<GroupDto> {
  access.require('group.read');
  const { groupId, role } = access;
  const [group, memberships, invitations, notebooks, measurements] = await Promise.all([
    Group.findByPk(groupId),
    Membership.findAll({ where: { groupId }, order: [['createdAt', 'ASC']] }),
    may(role, 'group.invite') ? openInvitations(groupId) : [],
    may(role, 'notebook.read') ? notebookSummaries(groupId) : [],
    may(role, 'measurement.read') ? measurementSummaries(groupId) : [],
  ]);
  if (!group) throw notFound('group');
  const emails = await emailsOf(memberships.map(({ userId }) => userId));
  return {
    id: group.id,
    name: group.name,
    role,
    may: actionsFor(role),
    members: memberships.flatMap(({ userId, role: theirs, createdAt }) => {
      const email = emails.get(userId);
      if (email === undefined) return [];
      return [{ userId, email, role: roleSchema.parse(theirs), since: createdAt.toISOString() }];
    }),
    invitations,
    notebooks,
    measurements,
    createdAt: group.createdAt.toISOString(),
  };
}
