import { id, instant, reference, table, text } from './table';

export const { up, down } = table(
  'memberships',
  {
    id,
    group_id: reference('groups', true),
    user_id: reference('users', true),
    role: text(16),
    created_at: instant,
  },
  { memberships_group_user: ['group_id', 'user_id'] },
);
