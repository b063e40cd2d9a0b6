import type { EmailConfig } from 'next-auth/providers/email';
import Nodemailer from 'next-auth/providers/nodemailer';
import type { NextAuthConfig } from 'next-auth';
import { skipCSRFCheck } from '@auth/core';
import { config } from '@/lib/config';
import { log } from '@/lib/log';
import { maySignIn, noteSignIn } from '@/lib/services/accounts';
import { acceptInvitations } from '@/lib/services/invitations';
import { createAdapter } from './adapter';
import { cookieName } from './sessions';

export const authPath = '/api/auth';
export const signInPages = {
  signIn: '/sign-in',
  verifyRequest: '/sign-in/sent',
  error: '/sign-in/error',
} as const;
/** Opened by the mailed link; its button posts token, email and callbackUrl of its address. */
export const confirmPage = '/sign-in/confirm';

/** How long a mailed link can be used, in seconds. */
export const linkLifetime = 24 * 60 * 60;
const sessionLifetime = 30 * 24 * 60 * 60;

/** Faults that people meet by using an old link or a bad form; they get a page, we get one line. */
const theirFaults = new Set(['Verification', 'AccessDenied', 'UnknownAction', 'InvalidCallbackUrl']);

/** Sends or keeps what was issued; `address` is the page of ours that the person opens. */
export type Deliver = (email: string, address: string) => Promise<void>;

/** A mailed link opens our page, whose button posts: programs that only look at links can't use one up. */
function confirmAddress(callback: string): string {
  const address = new URL(confirmPage, config().url);
  address.search = new URL(callback).search;
  return address.href;
}

/**
 * The configuration of sign-in. Our own route demands our Origin on every post, which is stricter than the library's
 * double-submitted cookie, so that is off and forms need no script.
 */
export function authConfig(deliver: Deliver): NextAuthConfig {
  const { secure, authSecret, mailFrom, smtpUrl } = config();
  const cookie = { path: '/', sameSite: 'lax', httpOnly: true, secure } as const;
  return {
    adapter: createAdapter(),
    basePath: authPath,
    secret: authSecret,
    trustHost: true,
    useSecureCookies: secure,
    skipCSRFCheck,
    pages: signInPages,
    session: { strategy: 'database', maxAge: sessionLifetime },
    cookies: {
      sessionToken: { name: cookieName('session'), options: cookie },
      callbackUrl: { name: cookieName('callback'), options: cookie },
      csrfToken: { name: cookieName('csrf'), options: cookie },
    },
    providers: [
      Nodemailer({
        server: smtpUrl,
        from: mailFrom,
        maxAge: linkLifetime,
        sendVerificationRequest: ({ identifier, url }) => deliver(identifier, confirmAddress(url)),
      }) as EmailConfig,
    ],
    callbacks: {
      // A link is mailed to everyone alike; only using it tells whoever owns the address that they may not come in.
      signIn: async ({ user, email }) =>
        email?.verificationRequest === true || !user.email || maySignIn(user.email),
      // A fresh object: the one that comes in holds the session's token.
      session: ({ user, session }) => ({
        user: { id: user.id, email: user.email },
        expires: new Date(session.expires).toISOString() as Date & string,
      }),
    },
    events: {
      async signIn({ user }) {
        if (!user.id || !user.email) return;
        await noteSignIn(user.id);
        await acceptInvitations(user.id, user.email);
      },
    },
    logger: {
      error: (error) => {
        if (theirFaults.has(error.name) || theirFaults.has((error as { type?: string }).type ?? '')) {
          log.info({ fault: error.name }, 'sign-in refused');
        } else {
          log.error({ err: error }, 'sign-in failed');
        }
      },
      warn: (code) => log.debug({ code }, 'sign-in warning'),
      debug: () => undefined,
    },
  };
}
