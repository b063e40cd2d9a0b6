import { Group, Membership } from '@/models';
import { database } from '@/lib/db';
import { notFound } from '@/lib/errors';
import { actionsFor } from '@/lib/policies';
import {
  roleSchema,
  type Group as GroupDto,
  type MeasurementSummary,
  type NotebookSummary,
} from '@/lib/schemas';
import type { Access, Actor } from './access';
import { recordEvent } from './audit';
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

/** What a member finds in a group; each list is empty where the role doesn't read it. */
export interface GroupContents {
  notebooks: NotebookSummary[];
  measurements: MeasurementSummary[];
}

/** A group's home as the asking member sees it. */
export async function readGroup(access: Access, contents: GroupContents): Promise<GroupDto> {
  access.require('group.read');
  const [group, memberships] = await Promise.all([
    Group.findByPk(access.groupId),
    Membership.findAll({ where: { groupId: access.groupId }, order: [['createdAt', 'ASC']] }),
  ]);
  if (!group) throw notFound('group');
  const emails = await emailsOf(memberships.map(({ userId }) => userId));
  return {
    id: group.id,
    name: group.name,
    role: access.role,
    may: actionsFor(access.role),
    members: memberships.flatMap(({ userId, role }) => {
      const email = emails.get(userId);
      return email === undefined ? [] : [{ email, role: roleSchema.parse(role) }];
    }),
    notebooks: contents.notebooks,
    measurements: contents.measurements,
    createdAt: group.createdAt.toISOString(),
  };
}
