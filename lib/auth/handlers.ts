import { Auth } from '@auth/core';
import { z } from 'zod';
import { config } from '@/lib/config';
import { AppError } from '@/lib/errors';
import { errorAnswer, translate } from '@/lib/http/answer';
import { limitRate } from '@/lib/http/rate-limit';
import { sendSignInLink } from '@/lib/mail';
import { authConfig, authPath, confirmPage, signInPages } from './config';

let known: ReturnType<typeof authConfig> | undefined;
const standing = () => (known ??= authConfig(sendSignInLink));

const formType = 'application/x-www-form-urlencoded';
const formLimit = 16 * 1024;
const emailSchema = z.email().max(254);

/** Next gives the request the name it knows the host by; links and cookies belong to the address that we publish. */
const atOurAddress = (request: Request): URL => {
  const { pathname, search } = new URL(request.url);
  return new URL(pathname + search, config().url);
};

const seeOther = (address: URL | string): Response =>
  new Response(null, { status: 303, headers: { Location: String(address), 'Cache-Control': 'no-store' } });

async function readForm(request: Request): Promise<URLSearchParams> {
  if ((request.headers.get('content-type') ?? '').split(';')[0].trim() !== formType) {
    throw new AppError('unsupported_media_type', `Send the form as ${formType}.`);
  }
  if (Number(request.headers.get('content-length') ?? 0) > formLimit) {
    throw new AppError('too_large', 'The form is too large.');
  }
  return new URLSearchParams(await request.text());
}

const headersOf = (request: Request): Headers => {
  const headers = new Headers();
  for (const name of ['cookie', 'origin', 'user-agent']) {
    const value = request.headers.get(name);
    if (value !== null) headers.set(name, value);
  }
  return headers;
};

/** Asks for a link: one answer whether the address is known or not; too many for one address are refused. */
async function signIn(url: URL, headers: Headers, form: URLSearchParams): Promise<Response> {
  const email = emailSchema.safeParse((form.get('email') ?? '').trim().toLowerCase());
  if (!email.success) return seeOther(new URL(`${signInPages.signIn}?error=EmailInvalid`, url));
  try {
    await limitRate('link', email.data);
  } catch (error) {
    if (error instanceof AppError) return seeOther(new URL(`${signInPages.signIn}?error=TooMany`, url));
    throw error;
  }
  const body = new URLSearchParams({ email: email.data, callbackUrl: form.get('callbackUrl') ?? '/' });
  const answer = await Auth(new Request(url, { method: 'POST', headers, body }), standing());
  const sent = new URL(answer.headers.get('location') ?? '', url).pathname.endsWith('/verify-request');
  return seeOther(new URL(sent ? signInPages.verifyRequest : `${signInPages.signIn}?error=MailFailed`, url));
}

/** Uses a link up: what the button of the confirm page posts. */
async function confirm(url: URL, headers: Headers, form: URLSearchParams): Promise<Response> {
  for (const name of ['token', 'email', 'callbackUrl']) {
    const value = form.get(name);
    if (value !== null) url.searchParams.set(name, value);
  }
  if (!url.searchParams.get('token')) {
    return seeOther(new URL(`${signInPages.error}?error=Verification`, url));
  }
  return Auth(new Request(url, { method: 'POST', headers }), standing());
}

async function post(request: Request): Promise<Response> {
  if (request.headers.get('origin') !== config().url) {
    throw new AppError('forbidden', 'This form was sent from another site. Open our page and try again.');
  }
  const url = atOurAddress(request);
  const form = await readForm(request);
  const headers = headersOf(request);
  switch (url.pathname) {
    case `${authPath}/signin/nodemailer`:
      return signIn(url, headers, form);
    case `${authPath}/callback/nodemailer`:
      return confirm(url, headers, form);
    case `${authPath}/signout`: {
      const body = new URLSearchParams({ callbackUrl: form.get('callbackUrl') ?? '/' });
      return Auth(new Request(url, { method: 'POST', headers, body }), standing());
    }
    default:
      throw new AppError('not_found', 'There is no such page.');
  }
}

async function get(request: Request): Promise<Response> {
  const url = atOurAddress(request);
  switch (url.pathname) {
    case `${authPath}/session`:
      return Auth(new Request(url, { headers: headersOf(request) }), standing());
    case `${authPath}/callback/nodemailer`:
      // Only a post uses a link up.
      return seeOther(new URL(confirmPage + url.search, url));
    default:
      throw new AppError('not_found', 'There is no such page.');
  }
}

const guarded = (handle: (request: Request) => Promise<Response>) => async (request: Request) => {
  try {
    return await handle(request);
  } catch (error) {
    return errorAnswer(translate(error, 'sign-in'));
  }
};

/**
 * What /api/auth answers, to plain forms of ours: `POST /api/auth/signin/nodemailer` (email, callbackUrl),
 * `POST /api/auth/callback/nodemailer` (token, email, callbackUrl), `POST /api/auth/signout` (callbackUrl) and
 * `GET /api/auth/session`.
 */
export const authHandlers = { GET: guarded(get), POST: guarded(post) };
