import { count, id, instant, reference, table, text } from './table';

export const { up, down } = table(
  'notebooks',
  {
    id,
    group_id: reference('groups', true),
    number: count,
    title: text(160),
    revision: count,
    measurement_version_id: reference('measurement_versions'),
    created_by: reference('users'),
    created_at: instant,
    updated_by: reference('users'),
    updated_at: instant,
  },
  { notebooks_number: ['group_id', 'number'] },
);
