import { User } from '@/models';
import { readOnce } from './reading';

/** E-mail addresses by user's id. */
export async function emailsOf(ids: Iterable<string>): Promise<ReadonlyMap<string, string>> {
  const wanted = [...new Set(ids)];
  // Whoever asks first within a reading asks for all that are new to it, at once.
  const asked: string[] = [];
  let found: Promise<ReadonlyMap<string, string>> | undefined;
  const each = wanted.map((id) =>
    readOnce(`e-mail ${id}`, () => {
      asked.push(id);
      return (found ??= Promise.resolve().then(() => readEmails(asked))).then((emails) => emails.get(id));
    }),
  );
  const emails = await Promise.all(each);
  return new Map(wanted.flatMap((id, k) => (emails[k] === undefined ? [] : [[id, emails[k]] as const])));
}

async function readEmails(ids: readonly string[]): Promise<ReadonlyMap<string, string>> {
  const users = await User.findAll({ where: { id: [...ids] }, attributes: ['id', 'email'], raw: true });
  return new Map(users.map(({ id, email }) => [id, email]));
}
