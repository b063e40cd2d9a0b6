import { ApiToken, User } from '@/models';
import type { Actor } from '@/lib/auth/actor';
import { hashOfToken, newToken } from '@/lib/auth/tokens';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { idSchema, type Token, type TokenCreated } from '@/lib/schemas';

async function store(userId: string, name: string): Promise<TokenCreated> {
  const token = newToken();
  const { id } = await ApiToken.create({
    userId,
    name,
    tokenHash: hashOfToken(token),
    createdAt: new Date(),
  });
  return { id, token };
}

/** Makes an API token for the owner of an address and returns it: the only time that it can be read. */
export async function createToken(email: string, name: string): Promise<string> {
  database();
  const user = await User.findOne({ where: { email: email.trim().toLowerCase() } });
  if (!user) throw new AppError('not_found', `Nobody with the address ${email} has an account here.`);
  return (await store(user.id, name)).token;
}

/**
 * Makes a personal token for whoever is signed in. A token may not make another: whoever got hold of one could
 * outlive its being revoked.
 */
export async function createOwnToken(
  caller: { actor: Actor; tokenId: string | null },
  body: { name: string },
): Promise<TokenCreated> {
  if (caller.tokenId !== null)
    throw new AppError(
      'forbidden',
      'A token may not make tokens. Sign in with a browser and make one on the page of your account.',
    );
  database();
  return store(caller.actor.userId, body.name);
}

const present = ({ id, name, createdAt, lastUsedAt, revokedAt }: ApiToken): Token => ({
  id,
  name,
  createdAt: createdAt.toISOString(),
  lastUsedAt: lastUsedAt?.toISOString() ?? null,
  revokedAt: revokedAt?.toISOString() ?? null,
});

/** One's own tokens, newest first, the revoked ones among them. */
export async function listTokens(actor: Actor): Promise<Token[]> {
  database();
  const tokens = await ApiToken.findAll({
    where: { userId: actor.userId },
    order: [
      ['createdAt', 'DESC'],
      ['id', 'ASC'],
    ],
  });
  return tokens.map(present);
}

/** Revokes one's own token from now on; one that is revoked already keeps its date. */
export async function revokeToken(actor: Actor, id: string): Promise<Token> {
  database();
  const found = idSchema.safeParse(id).success
    ? await ApiToken.findOne({ where: { id, userId: actor.userId } })
    : null;
  if (!found) throw notFound('token');
  if (found.revokedAt === null) await found.update({ revokedAt: new Date() });
  return present(found);
}
