import type { Transaction } from 'sequelize';
import { Group, Membership, User } from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { sendLeft, sendOrLog, sendRemoved, sendRoleChange } from '@/lib/mail';
import { mayOrThrow, type Action } from '@/lib/policies';
import { idSchema, roleSchema, type Member, type Role } from '@/lib/schemas';
import type { Access } from './access';
import { recordEvent } from './audit';

interface Found {
  groupName: string;
  membership: Membership;
  member: Member;
  /** Nobody else leads the group. */
  onlyLead: boolean;
}

/**
 * A member of the group, for a change. The group's row is locked, so that of two leads who leave at once the second
 * one sees that it is the last; whoever asks is judged again by the role that they have then.
 */
async function findMember(
  access: Access,
  userId: string,
  action: Action,
  transaction: Transaction,
): Promise<Found> {
  const { groupId, actor } = access;
  const group = await Group.findByPk(groupId, { lock: transaction.LOCK.UPDATE, transaction });
  const memberships = await Membership.findAll({
    where: { groupId },
    lock: transaction.LOCK.UPDATE,
    transaction,
  });
  const asking = memberships.find((one) => one.userId === actor.userId);
  if (!group || !asking) throw notFound('group');
  mayOrThrow(roleSchema.parse(asking.role), action);
  const membership = memberships.find((one) => one.userId === userId);
  const user = membership && (await User.findByPk(userId, { transaction }));
  if (!membership || !user) throw notFound('member');
  const leads = memberships.filter(({ role }) => role === 'lead');
  return {
    groupName: group.name,
    membership,
    member: {
      userId,
      email: user.email,
      role: roleSchema.parse(membership.role),
      since: membership.createdAt.toISOString(),
    },
    onlyLead: leads.length === 1 && leads[0].userId === userId,
  };
}

/** Ids that aren't UUIDs name nobody. */
function wellFormed(userId: string): string {
  if (!idSchema.safeParse(userId).success) throw notFound('member');
  return userId;
}

/** Gives a member another role and mails them. `conflict` where the group would have no lead. */
export async function changeRole(access: Access, userId: string, body: { role: Role }): Promise<Member> {
  access.require('group.roles');
  const { groupId, actor } = access;
  const { role } = body;
  const { before, groupName } = await database().transaction(async (transaction) => {
    const found = await findMember(access, wellFormed(userId), 'group.roles', transaction);
    const { member, membership, onlyLead } = found;
    if (member.role === role) return { before: member, groupName: found.groupName };
    if (onlyLead)
      throw new AppError(
        'conflict',
        `${member.email} is the only lead of this group. Make another member lead first.`,
      );
    await membership.update({ role }, { transaction });
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'group.roles',
        subjectType: 'membership',
        subjectId: membership.id,
        details: { email: member.email, from: member.role, role },
      },
      transaction,
    );
    return { before: member, groupName: found.groupName };
  });
  if (before.role !== role)
    await sendOrLog(
      sendRoleChange(before.email, { groupId, groupName, from: before.role, role, changedBy: actor.email }),
    );
  return { ...before, role };
}

/** Ends a membership, another's or one's own, and mails whose it was. `conflict` for the group's only lead. */
export async function removeMember(access: Access, userId: string): Promise<Member> {
  const { groupId, actor } = access;
  const leaving = userId === actor.userId;
  const action = leaving ? 'group.leave' : 'group.remove';
  access.require(action);
  const { member, groupName } = await database().transaction(async (transaction) => {
    const found = await findMember(access, wellFormed(userId), action, transaction);
    // Whoever removes another leads the group too, so that the only lead is always the one who asks.
    if (found.onlyLead)
      throw new AppError('conflict', 'You are the only lead of this group. Make another member lead first.');
    await found.membership.destroy({ transaction });
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action,
        subjectType: 'membership',
        subjectId: found.membership.id,
        details: { email: found.member.email, role: found.member.role },
      },
      transaction,
    );
    return found;
  });
  await sendOrLog(
    leaving
      ? sendLeft(member.email, { groupName })
      : sendRemoved(member.email, { groupName, removedBy: actor.email }),
  );
  return member;
}
