import { cookies } from 'next/headers';
import { cache } from 'react';
import type { Actor } from './actor';
import { actorOfSession, cookieName } from './sessions';

/** Who looks at the page; null where nobody is signed in. Asked for once a page, however many parts ask. */
export const auth = cache(async (): Promise<Actor | null> => {
  const cookie = (await cookies()).get(cookieName('session'));
  return cookie ? actorOfSession(cookie.value) : null;
});
