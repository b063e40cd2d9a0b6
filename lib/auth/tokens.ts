import { createHash, randomBytes } from 'node:crypto';
import { ApiToken, User } from '@/models';
import { database } from '@/lib/db';
import type { Actor } from './actor';

const prefix = 'bn_';

/** What is kept of a token. 256 random bits need no salt and no slow hash. */
export const hashOfToken = (token: string): string => createHash('sha256').update(token).digest('hex');

/** A new token: shown once, kept as its hash. */
export const newToken = (): string => prefix + randomBytes(32).toString('base64url');

/** How stale `lastUsedAt` may be, so that reading costs no write. */
const usedPrecision = 60_000;

/** Whose token this is; null where it is unknown or revoked, or its owner may not sign in. */
export async function actorOfToken(token: string): Promise<{ actor: Actor; tokenId: string } | null> {
  if (!token.startsWith(prefix)) return null;
  database();
  const found = await ApiToken.findOne({ where: { tokenHash: hashOfToken(token), revokedAt: null } });
  const user = found && (await User.findByPk(found.userId));
  if (!found || user?.disabledAt !== null) return null;
  const now = new Date();
  if (!found.lastUsedAt || now.getTime() - found.lastUsedAt.getTime() > usedPrecision) {
    await found.update({ lastUsedAt: now });
  }
  return {
    actor: { userId: user.id, email: user.email },
    tokenId: found.id,
  };
}
