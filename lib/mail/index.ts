import { config } from '@/lib/config';
import { AppError } from '@/lib/errors';
import type { FitStatus, Role } from '@/lib/schemas';
import { sendMail } from './transport';

export { listMailbox, type CaughtMail } from './mailbox';

/** The one-time link that signs a person in. */
export const sendSignInLink = (email: string, address: string): Promise<void> =>
  sendMail({
    to: email,
    subject: 'Your sign-in link for Beatnote',
    text: [
      'Hello,',
      '',
      'open this page and press its button to sign in to Beatnote:',
      '',
      address,
      '',
      'The link works once, within a day. If you didn’t ask for it, you can leave it unused.',
      '',
    ].join('\n'),
  });

/** Tells a person that they were invited into a group, or, with an account already, that they are in it. */
export const sendInvitation = (
  email: string,
  invitation: { groupId: string; groupName: string; role: Role; invitedBy: string; joined: boolean },
): Promise<void> =>
  sendMail({
    to: email,
    subject: `${invitation.groupName} on Beatnote`,
    text: [
      'Hello,',
      '',
      `${invitation.invitedBy} has ${invitation.joined ? 'added' : 'invited'} you to the group “${invitation.groupName}” as ${invitation.role}.`,
      invitation.joined
        ? `You are a member from now on. The group’s page, for ${email}:`
        : `To accept, open the group’s page and sign in with this address, ${email}; no password is needed:`,
      '',
      `${config().url}/groups/${invitation.groupId}`,
      '',
      invitation.joined
        ? 'If you don’t want to belong to it, leave it on its page of members.'
        : 'If you don’t want to belong to it, there is nothing that you have to do.',
      '',
    ].join('\n'),
  });

const onGroup = (email: string, groupName: string, lines: string[]): Promise<void> =>
  sendMail({
    to: email,
    subject: `${groupName} on Beatnote`,
    text: ['Hello,', '', ...lines, ''].join('\n'),
  });

/** Tells a member that their role was changed. */
export const sendRoleChange = (
  email: string,
  change: { groupId: string; groupName: string; from: Role; role: Role; changedBy: string },
): Promise<void> =>
  onGroup(email, change.groupName, [
    `${change.changedBy} has changed your role in the group “${change.groupName}” from ${change.from} to ${change.role}.`,
    'It holds from your next page on. What each role may do stands on the page of members:',
    '',
    `${config().url}/groups/${change.groupId}/members`,
  ]);

/** Tells a person that they were taken out of a group. */
export const sendRemoved = (
  email: string,
  removal: { groupName: string; removedBy: string },
): Promise<void> =>
  onGroup(email, removal.groupName, [
    `${removal.removedBy} has removed you from the group “${removal.groupName}”.`,
    'What you did there stays in its record under your name. Your account and your other groups are as they were.',
  ]);

/** Confirms to a person that they have left a group. */
export const sendLeft = (email: string, left: { groupName: string }): Promise<void> =>
  onGroup(email, left.groupName, [
    `You have left the group “${left.groupName}”.`,
    'What you did there stays in its record under your name. A lead of the group can invite you again.',
  ]);

/** Tells a person that an invitation which they haven't answered was taken back. */
export const sendInvitationTakenBack = (
  email: string,
  invitation: { groupName: string; takenBackBy: string },
): Promise<void> =>
  onGroup(email, invitation.groupName, [
    `${invitation.takenBackBy} has taken back your invitation to the group “${invitation.groupName}”.`,
    'There is nothing that you have to do.',
  ]);

/**
 * For a mail about what is done already: that stands where no mail can go out, and the transport has logged why. Says
 * whether it went out.
 */
export async function sendOrLog(mail: Promise<void>): Promise<boolean> {
  try {
    await mail;
    return true;
  } catch (error) {
    if (!(error instanceof AppError && error.code === 'unavailable')) throw error;
    return false;
  }
}

const endings: Readonly<Partial<Record<FitStatus, string>>> = {
  converged: 'has met its target',
  stopped: 'was stopped by another member of the group; its draws are kept',
  'budget-spent': 'has used its draws up before its target was met',
  failed: 'has failed; the page says why, and the draws up to there are kept',
};

/** Tells a person that a fit of theirs has ended: how, and where it is to be seen. Never a value, nor a title that may hold one. */
export const sendFitEnded = (
  email: string,
  end: {
    mailId: string;
    groupName: string;
    notebookId: string;
    notebookNumber: number;
    fitNumber: number;
    endedAs: FitStatus;
  },
): Promise<void> =>
  sendMail({
    id: end.mailId,
    to: email,
    subject: `Fit ${end.fitNumber} of notebook ${end.notebookNumber} has ended`,
    text: [
      'Hello,',
      '',
      `fit ${end.fitNumber} of notebook ${end.notebookNumber} in the group “${end.groupName}” ${endings[end.endedAs] ?? 'has ended'}:`,
      '',
      `${config().url}/notebooks/${end.notebookId}?fit=${end.fitNumber}`,
      '',
      'If you want no mail about fits, switch it off on your page:',
      '',
      `${config().url}/account`,
      '',
    ].join('\n'),
  });
