import { flag, id, maybe, maybeInstant, table, text } from './table';

export const { up, down } = table(
  'users',
  {
    id,
    name: maybe(text(255)),
    email: text(255),
    email_verified: maybeInstant,
    image: maybe(text(255)),
    site_admin: flag,
  },
  { users_email: ['email'] },
);
