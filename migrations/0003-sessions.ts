import { id, instant, maybe, reference, table, text } from './table';

export const { up, down } = table(
  'sessions',
  { id, expires: instant, session_token: text(255), user_id: maybe(reference('users', true)) },
  { sessions_token: ['session_token'] },
);
