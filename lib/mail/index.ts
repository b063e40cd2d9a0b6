import { config } from '@/lib/config';
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
  invitation: { groupName: string; role: string; invitedBy: string; joined: boolean },
): Promise<void> =>
  sendMail({
    to: email,
    subject: `${invitation.groupName} on Beatnote`,
    text: [
      'Hello,',
      '',
      `${invitation.invitedBy} has ${invitation.joined ? 'added' : 'invited'} you to the group “${invitation.groupName}” as ${invitation.role}.`,
      'Sign in with this address, and the group is on your first page:',
      '',
      `${config().url}/sign-in`,
      '',
    ].join('\n'),
  });
