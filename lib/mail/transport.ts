import { createTransport, type Transporter } from 'nodemailer';
import { config } from '@/lib/config';
import { log } from '@/lib/log';
import { AppError } from '@/lib/errors';

let transport: Transporter | undefined;

export interface Message {
  to: string;
  subject: string;
  text: string;
  /** Names a mail that may have to be sent again, so that its reader's program knows it. */
  id?: string;
}

/** Sends one plain-text message, or throws `unavailable`. */
export async function sendMail({ to, subject, text, id }: Message): Promise<void> {
  transport ??= createTransport(config().smtpUrl, { from: config().mailFrom });
  try {
    const messageId = id === undefined ? undefined : `<${id}@${new URL(config().url).hostname}>`;
    await transport.sendMail({ to, subject, text, messageId });
  } catch (error) {
    log.error({ err: error }, 'mail could not be sent');
    throw new AppError('unavailable', 'The mail could not be sent. Try again in a few minutes.', [], {
      cause: error,
    });
  }
}

/** Rejects where the mail server doesn't answer; sends nothing. */
export async function mailAnswers(): Promise<void> {
  transport ??= createTransport(config().smtpUrl, { from: config().mailFrom });
  await transport.verify();
}
