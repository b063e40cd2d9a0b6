import { actorOfSession, cookieName, cookieOf } from '@/lib/auth/sessions';
import { actorOfToken } from '@/lib/auth/tokens';
import type { Actor } from '@/lib/auth/actor';
import { config } from '@/lib/config';
import { AppError } from '@/lib/errors';

export interface Authenticated {
  actor: Actor;
  /** Null with a session. */
  tokenId: string | null;
}

const safeVerbs = new Set(['GET', 'HEAD', 'OPTIONS']);

/**
 * Who sent the request. With an Authorization header only that counts and cookies are ignored. A session's cookie is
 * sent by the browser on its own, so an unsafe verb must come from a page of ours: its Origin has to be our address.
 */
export async function authenticate(request: Request): Promise<Authenticated> {
  const authorization = request.headers.get('authorization');
  if (authorization !== null) {
    const token = /^Bearer +(\S+)$/i.exec(authorization.trim())?.[1];
    const found = token === undefined ? null : await actorOfToken(token);
    if (!found) {
      throw new AppError(
        'unauthenticated',
        'This API token is unknown or revoked. Send `Authorization: Bearer TOKEN` with one that is valid.',
      );
    }
    return found;
  }
  const cookie = cookieOf(request.headers.get('cookie'), cookieName('session'));
  const actor = cookie === null ? null : await actorOfSession(cookie);
  if (!actor) throw new AppError('unauthenticated', 'Sign in first, or send an API token.');
  if (!safeVerbs.has(request.method) && request.headers.get('origin') !== config().url) {
    throw new AppError(
      'forbidden',
      'This request came from another site. With a session, changes are taken from our own pages only.',
    );
  }
  return { actor, tokenId: null };
}
