import type { Adapter } from '@auth/core/adapters';
import SequelizeAdapter, { type SequelizeAdapterOptions } from '@auth/sequelize-adapter';
import { Op } from 'sequelize';
import { Account, Session, User, VerificationToken } from '@/models';
import { database } from '@/lib/db';

/**
 * The stock adapter over our own models and migrations, with two of its steps replaced. Using a link there is find, then
 * delete everything of that address: two clicks at once would both get in, and a wrong token would burn a good one. Here
 * the deletion of that one token decides.
 */
export function createAdapter(): Adapter {
  // The adapter's types ask for the instances of its own models; ours have the same columns.
  const models = {
    User,
    Account,
    Session,
    VerificationToken,
  } as unknown as SequelizeAdapterOptions['models'];
  const stock = SequelizeAdapter(database(), { synchronize: false, models });
  return {
    ...stock,
    async createUser(user) {
      const created = await User.create({
        name: user.name,
        email: user.email,
        emailVerified: user.emailVerified,
      });
      return {
        id: created.id,
        email: created.email,
        name: created.name,
        emailVerified: created.emailVerified,
      };
    },
    async createVerificationToken(token) {
      await VerificationToken.destroy({ where: { expires: { [Op.lt]: new Date() } } });
      await VerificationToken.create(token);
      return token;
    },
    async useVerificationToken({ identifier, token }) {
      const found = await VerificationToken.findOne({ where: { identifier, token } });
      if (!found) return null;
      const used = await VerificationToken.destroy({ where: { identifier, token } });
      return used === 1 ? found.get({ plain: true }) : null;
    },
    async createSession(session) {
      await Session.destroy({ where: { expires: { [Op.lt]: new Date() } } });
      await Session.create(session);
      return session;
    },
  };
}
