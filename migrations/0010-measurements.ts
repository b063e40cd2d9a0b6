import { flag, id, instant, reference, table, text } from './table';

export const { up, down } = table('measurements', {
  id,
  group_id: reference('groups', true),
  name: text(120),
  description: text(2000),
  blind: flag,
  simulated: flag,
  created_by: reference('users'),
  created_at: instant,
});
