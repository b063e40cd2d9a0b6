import { Op, type WhereOptions } from 'sequelize';
import { ApiToken, Group, Membership, Session, User, VerificationToken } from '@/models';
import { database } from '@/lib/db';
import { AppError, notFound } from '@/lib/errors';
import { log } from '@/lib/log';
import { idSchema, roleSchema, type SiteUser, type SiteUsers, type UsersQuery } from '@/lib/schemas';
import type { Administration } from './administration';

/** How often each user's id occurs. */
function tally(rows: readonly { userId: string | null }[]): ReadonlyMap<string, number> {
  const counts = new Map<string, number>();
  for (const { userId } of rows) if (userId !== null) counts.set(userId, (counts.get(userId) ?? 0) + 1);
  return counts;
}

async function present(users: readonly User[]): Promise<SiteUser[]> {
  const userId = users.map(({ id }) => id);
  const [sessions, tokens, memberships] = await Promise.all([
    Session.findAll({ where: { userId, expires: { [Op.gt]: new Date() } }, attributes: ['userId'] }),
    ApiToken.findAll({ where: { userId, revokedAt: null }, attributes: ['userId'] }),
    Membership.findAll({ where: { userId } }),
  ]);
  const groups = await Group.findAll({ where: { id: memberships.map(({ groupId }) => groupId) } });
  const names = new Map(groups.map(({ id, name }) => [id, name]));
  const open = tally(sessions);
  const held = tally(tokens);
  return users.map((user) => ({
    userId: user.id,
    email: user.email,
    siteAdmin: user.siteAdmin,
    lastSignInAt: user.lastSignInAt?.toISOString() ?? null,
    disabledAt: user.disabledAt?.toISOString() ?? null,
    sessions: open.get(user.id) ?? 0,
    tokens: held.get(user.id) ?? 0,
    groups: memberships
      .filter((one) => one.userId === user.id)
      .map(({ groupId, role }) => ({
        id: groupId,
        name: names.get(groupId) ?? '',
        role: roleSchema.parse(role),
      }))
      .sort((a, b) => a.name.localeCompare(b.name, 'en')),
  }));
}

/** `%` and `_` in an address mean themselves. */
const escaped = (text: string): string => text.replace(/[\\%_]/g, '\\$&');

/** Everybody who has an account, by address, a page at a time. */
export async function listSiteUsers(
  _: Administration,
  { search, after, limit }: UsersQuery,
): Promise<SiteUsers> {
  const found: WhereOptions = search ? { email: { [Op.like]: `%${escaped(search)}%` } } : {};
  const [count, users] = await Promise.all([
    User.count({ where: found }),
    User.findAll({
      where: { [Op.and]: [found, after === undefined ? {} : { email: { [Op.gt]: after } }] },
      order: [['email', 'ASC']],
      limit: limit + 1,
    }),
  ]);
  const shown = users.slice(0, limit);
  return {
    users: await present(shown),
    count,
    next: users.length > limit ? shown[shown.length - 1].email : null,
  };
}

async function findUser(userId: string): Promise<User> {
  database();
  const user = idSchema.safeParse(userId).success ? await User.findByPk(userId) : null;
  if (!user) throw notFound('user');
  return user;
}

/**
 * Lets somebody sign in or not. Whoever may not has no session left, their mailed links are void, and their tokens are
 * refused until they may again; memberships and work stay. Nobody shuts themselves out.
 */
export async function changeUser(
  administration: Administration,
  userId: string,
  { disabled }: { disabled: boolean },
): Promise<SiteUser> {
  const { actor } = administration;
  const user = await findUser(userId);
  if (disabled && user.id === actor.userId)
    throw new AppError(
      'conflict',
      'You can’t shut yourself out. Another site administrator can do it, if it has to be done.',
    );
  if (disabled !== (user.disabledAt !== null)) {
    await database().transaction(async (transaction) => {
      await user.update({ disabledAt: disabled ? new Date() : null }, { transaction });
      if (!disabled) return;
      await Session.destroy({ where: { userId }, transaction });
      await VerificationToken.destroy({ where: { identifier: user.email }, transaction });
    });
    log.info({ user: userId, by: actor.userId, disabled }, 'sign-in of a user was changed');
  }
  return (await present([user]))[0];
}

/** Ends every session of somebody: their browsers have to sign in anew. Tokens go on working. */
export async function endSessions(administration: Administration, userId: string): Promise<SiteUser> {
  const user = await findUser(userId);
  const ended = await Session.destroy({ where: { userId } });
  log.info({ user: userId, by: administration.actor.userId, ended }, 'sessions of a user were ended');
  return (await present([user]))[0];
}
