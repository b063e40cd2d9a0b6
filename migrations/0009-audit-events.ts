import { id, instant, json, maybe, reference, table, text, uuid } from './table';

export const { up, down } = table('audit_events', {
  id,
  group_id: reference('groups', true),
  actor_id: maybe(reference('users')),
  action: text(64),
  subject_type: text(32),
  subject_id: { type: uuid, allowNull: true },
  details: maybe(json),
  created_at: instant,
});
