import type { MigrationContext } from './table';

/** A group's log is read newest first, a page at a time. */
export const up = ({ context }: MigrationContext) =>
  context.addIndex('audit_events', ['group_id', 'created_at', 'id'], { name: 'audit_events_by_time' });

export const down = async ({ context }: MigrationContext) => {
  // The key of the reference to groups was dropped as superfluous; it has to be there again before this one goes.
  await context.addIndex('audit_events', ['group_id'], { name: 'group_id' });
  await context.removeIndex('audit_events', 'audit_events_by_time');
};
