import { instant, table, text } from './table';

export const { up, down } = table('verification_tokens', {
  token: { ...text(255), primaryKey: true },
  identifier: text(255),
  expires: instant,
});
