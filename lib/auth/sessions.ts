import { Op } from 'sequelize';
import { Session, User } from '@/models';
import { config } from '@/lib/config';
import { database } from '@/lib/db';
import type { Actor } from './actor';

/** Cookies ignore ports, and two instances may share a browser: the port is in the name. */
export function cookieName(purpose: 'session' | 'callback' | 'csrf'): string {
  const { url, secure } = config();
  const port = new URL(url).port || (secure ? '443' : '80');
  return `${secure ? '__Secure-' : ''}beatnote-${port}.${purpose}`;
}

export function cookieOf(header: string | null, name: string): string | null {
  for (const pair of (header ?? '').split(';')) {
    const at = pair.indexOf('=');
    if (at > 0 && pair.slice(0, at).trim() === name) return pair.slice(at + 1).trim();
  }
  return null;
}

/** Whose session this is; null where it is unknown or over, or they may not sign in. */
export async function actorOfSession(sessionToken: string): Promise<Actor | null> {
  database();
  const user = await User.findOne({
    attributes: ['id', 'email'],
    where: { disabledAt: null },
    include: [
      {
        model: Session,
        attributes: [],
        where: { sessionToken, expires: { [Op.gt]: new Date() } },
        required: true,
      },
    ],
    subQuery: false,
  });
  return user && { userId: user.id, email: user.email };
}
