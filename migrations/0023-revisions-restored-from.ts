import { count, maybe, type MigrationContext } from './table';

/** The revision whose settings a revision brought back. */
export const up = ({ context }: MigrationContext): Promise<void> =>
  context.addColumn('notebook_revisions', 'restored_from', maybe(count));

export const down = ({ context }: MigrationContext): Promise<void> =>
  context.removeColumn('notebook_revisions', 'restored_from');
