import type { Transaction } from 'sequelize';
import { Group, Invitation, Membership, User } from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { sendInvitation, sendInvitationTakenBack, sendOrLog } from '@/lib/mail';
import { idSchema, roleSchema, type Invitation as InvitationDto, type Role } from '@/lib/schemas';
import type { Access, Actor } from './access';
import { recordEvent } from './audit';

async function join(invitation: Invitation, userId: string, transaction: Transaction): Promise<void> {
  const { groupId, role } = invitation;
  const now = new Date();
  const [membership, isNew] = await Membership.findOrCreate({
    where: { groupId, userId },
    defaults: { groupId, userId, role, createdAt: now },
    transaction,
  });
  await invitation.update({ acceptedAt: now }, { transaction });
  if (!isNew) return;
  await recordEvent(
    {
      groupId,
      actorId: userId,
      action: 'group.join',
      subjectType: 'membership',
      subjectId: membership.id,
      details: { role },
    },
    transaction,
  );
}

/** Turns every open invitation of an address into a membership; called when its owner has signed in. */
export async function acceptInvitations(userId: string, email: string): Promise<void> {
  await database().transaction(async (transaction) => {
    const open = await Invitation.findAll({
      where: { email: email.toLowerCase(), acceptedAt: null },
      lock: transaction.LOCK.UPDATE,
      transaction,
    });
    for (const invitation of open) await join(invitation, userId, transaction);
  });
}

/**
 * Invites a person by e-mail, or changes the role of an invitation that is still open. Whoever has an account is a
 * member at once; anyone else when they first sign in with that address. `conflict` where they are a member already.
 */
export async function invite(access: Access, body: { email: string; role: Role }): Promise<{ id: string }> {
  access.require('group.invite');
  const { groupId, actor } = access;
  const group = await Group.findByPk(groupId);
  if (!group) throw notFound('group');

  const { invitation, joined } = await database().transaction(async (transaction) => {
    const user = await User.findOne({ where: { email: body.email }, transaction });
    const member = user && (await Membership.findOne({ where: { groupId, userId: user.id }, transaction }));
    if (member)
      throw new AppError('conflict', `${body.email} is a member of this group already, as ${member.role}.`);
    const values = {
      ...body,
      groupId,
      invitedBy: actor.userId,
      createdAt: new Date(),
      acceptedAt: null,
      sentAt: null,
    };
    const [invitation, isNew] = await Invitation.findOrCreate({
      where: { groupId, email: body.email },
      defaults: values,
      transaction,
    });
    if (!isNew) await invitation.update(values, { transaction });
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'group.invite',
        subjectType: 'invitation',
        subjectId: invitation.id,
        details: { email: body.email, role: body.role },
      },
      transaction,
    );
    if (user) await join(invitation, user.id, transaction);
    return { invitation, joined: user !== null };
  });
  await mail(invitation, group, actor, joined);
  return { id: invitation.id };
}

/**
 * Mails an invitation and notes when. One that no mail can go out for stands all the same: its list says so, and a lead
 * can send it again.
 */
async function mail(invitation: Invitation, group: Group, actor: Actor, joined: boolean): Promise<void> {
  const { email, role } = invitation;
  const sent = await sendOrLog(
    sendInvitation(email, {
      groupId: group.id,
      groupName: group.name,
      role: roleSchema.parse(role),
      invitedBy: actor.email,
      joined,
    }),
  );
  if (sent) await invitation.update({ sentAt: new Date() });
}

const present = ({ id, email, role, createdAt, sentAt }: Invitation): InvitationDto => ({
  id,
  email,
  role: roleSchema.parse(role),
  createdAt: createdAt.toISOString(),
  sentAt: sentAt?.toISOString() ?? null,
});

/** The open invitations, for whoever may invite. */
export async function listInvitations(access: Access): Promise<InvitationDto[]> {
  access.require('group.invite');
  return openInvitations(access.groupId);
}

/** Mails an open invitation once more. One that was answered is a membership, and not found here. */
export async function sendAgain(access: Access, id: string): Promise<InvitationDto> {
  access.require('group.invite');
  const { groupId, actor } = access;
  if (!idSchema.safeParse(id).success) throw notFound('invitation');
  const group = await Group.findByPk(groupId);
  const invitation = await Invitation.findOne({ where: { id, groupId, acceptedAt: null } });
  if (!group || !invitation) throw notFound('invitation');
  const before = invitation.sentAt;
  await mail(invitation, group, actor, false);
  if (invitation.sentAt === before)
    throw new AppError('unavailable', 'The mail could not be sent. The invitation stands; try again later.');
  await recordEvent({
    groupId,
    actorId: actor.userId,
    action: 'group.invite',
    subjectType: 'invitation',
    subjectId: id,
    details: { email: invitation.email, role: invitation.role, again: true },
  });
  return present(invitation);
}

/** Invitations of a group that nobody has answered yet, oldest first. */
export async function openInvitations(groupId: string): Promise<InvitationDto[]> {
  const open = await Invitation.findAll({
    where: { groupId, acceptedAt: null },
    order: [
      ['createdAt', 'ASC'],
      ['id', 'ASC'],
    ],
  });
  return open.map(present);
}

/** Takes an open invitation back and mails its address. One that was answered is a membership, and not found here. */
export async function takeBackInvitation(access: Access, id: string): Promise<InvitationDto> {
  access.require('group.invite');
  const { groupId, actor } = access;
  if (!idSchema.safeParse(id).success) throw notFound('invitation');
  const { invitation, groupName } = await database().transaction(async (transaction) => {
    const group = await Group.findByPk(groupId, { transaction });
    const found = await Invitation.findOne({
      where: { id, groupId, acceptedAt: null },
      lock: transaction.LOCK.UPDATE,
      transaction,
    });
    if (!group || !found) throw notFound('invitation');
    await found.destroy({ transaction });
    await recordEvent(
      {
        groupId,
        actorId: actor.userId,
        action: 'group.uninvite',
        subjectType: 'invitation',
        subjectId: id,
        details: { email: found.email, role: found.role },
      },
      transaction,
    );
    return { invitation: found, groupName: group.name };
  });
  await sendOrLog(sendInvitationTakenBack(invitation.email, { groupName, takenBackBy: actor.email }));
  return present(invitation);
}
