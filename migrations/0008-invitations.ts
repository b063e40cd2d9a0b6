import { id, instant, maybeInstant, reference, table, text } from './table';

export const { up, down } = table(
  'invitations',
  {
    id,
    group_id: reference('groups', true),
    email: text(255),
    role: text(16),
    invited_by: reference('users'),
    created_at: instant,
    accepted_at: maybeInstant,
  },
  { invitations_group_email: ['group_id', 'email'] },
);
