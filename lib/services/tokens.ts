import { ApiToken, User } from '@/models';
import { hashOfToken, newToken } from '@/lib/auth/tokens';
import { database } from '@/lib/db';
import { AppError } from '@/lib/errors';

/** Makes an API token for the owner of an address and returns it: the only time that it can be read. */
export async function createToken(email: string, name: string): Promise<string> {
  database();
  const user = await User.findOne({ where: { email: email.trim().toLowerCase() } });
  if (!user) throw new AppError('not_found', `Nobody with the address ${email} has an account here.`);
  const token = newToken();
  await ApiToken.create({ userId: user.id, name, tokenHash: hashOfToken(token), createdAt: new Date() });
  return token;
}
