import { createTransport, type Transporter } from 'nodemailer';
import { config } from '@/lib/config';
import { log } from '@/lib/log';
import { AppError } from '@/lib/errors';

let transport: Transporter | undefined;

export interface Message {
  to: string;
  subject: string;
  text: string;
}

/** Sends one plain-text message, or throws `unavailable`. */
export async function sendMail({ to, subject, text }: Message): Promise<void> {
  transport ??= createTransport(config().smtpUrl, { from: config().mailFrom });
  try {
    await transport.sendMail({ to, subject, text });
  } catch (error) {
    log.error({ err: error }, 'mail could not be sent');
    throw new AppError('unavailable', 'The mail could not be sent. Try again in a few minutes.', [], {
      cause: error,
    });
  }
}
