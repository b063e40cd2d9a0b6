import { Auth } from '@auth/core';
import { AppError } from '@/lib/errors';
import { config } from '@/lib/config';
import { authConfig, authPath } from './config';

/**
 * Issues a one-time sign-in link and returns its address instead of mailing it: for the terminal of `npm start` and for
 * tests. Whoever reads it can sign in as `email`.
 */
export async function createSignInLink(email: string, returnTo = '/'): Promise<string> {
  const origin = config().url;
  let issued: string | undefined;
  const request = new Request(`${origin}${authPath}/signin/nodemailer`, {
    method: 'POST',
    headers: { origin },
    body: new URLSearchParams({ email, callbackUrl: new URL(returnTo, origin).href }),
  });
  await Auth(
    request,
    authConfig(async (_email, address) => {
      issued = address;
    }),
  );
  if (issued === undefined) throw new AppError('invalid', `No sign-in link can be made for ${email}.`);
  return issued;
}
