import { User } from '@/models';

/** E-mail addresses by user's id. */
export async function emailsOf(ids: Iterable<string>): Promise<ReadonlyMap<string, string>> {
  const users = await User.findAll({ where: { id: [...new Set(ids)] }, attributes: ['id', 'email'] });
  return new Map(users.map(({ id, email }) => [id, email]));
}
