import { Group, Membership, User } from '@/models';
import { database } from '@/lib/db';
import { roleSchema, type ChangeSettings, type Me, type Settings } from '@/lib/schemas';
import type { Actor } from './access';

/** Who is asking, and the groups they belong to, by name. */
export async function readMe(actor: Actor): Promise<Me> {
  database();
  const memberships = await Membership.findAll({ where: { userId: actor.userId } });
  const groups = await Group.findAll({
    where: { id: memberships.map(({ groupId }) => groupId) },
    order: ['name', 'id'],
  });
  const roles = new Map(memberships.map(({ groupId, role }) => [groupId, roleSchema.parse(role)]));
  return {
    id: actor.userId,
    email: actor.email,
    groups: groups.flatMap(({ id, name }) => {
      const role = roles.get(id);
      return role === undefined ? [] : [{ id, name, role }];
    }),
  };
}

/** Whether the owner of an address may come in: whoever is new may, and whom no administrator has shut out. */
export async function maySignIn(email: string): Promise<boolean> {
  database();
  const user = await User.findOne({ where: { email: email.toLowerCase() }, attributes: ['disabledAt'] });
  return user === null || user.disabledAt === null;
}

/** Notes that somebody has just signed in. */
export async function noteSignIn(userId: string): Promise<void> {
  await User.update({ lastSignInAt: new Date() }, { where: { id: userId } });
}

/** What a person has chosen for themselves. */
export async function readSettings(actor: Actor): Promise<Settings> {
  database();
  const { mailAboutFits } = await User.findByPk(actor.userId, { rejectOnEmpty: true });
  return { mailAboutFits };
}

/** Changes what is given and leaves the rest. */
export async function changeSettings(actor: Actor, settings: ChangeSettings): Promise<Settings> {
  database();
  await User.update(settings, { where: { id: actor.userId } });
  return readSettings(actor);
}
