import { maybe, maybeInstant, reference, type MigrationContext } from './table';

/** Who put a notebook away, and when; null while it is in use. */
export async function up({ context }: MigrationContext): Promise<void> {
  await context.addColumn('notebooks', 'archived_at', maybeInstant);
  await context.addColumn('notebooks', 'archived_by', maybe(reference('users')));
}

export async function down({ context }: MigrationContext): Promise<void> {
  // The key has to go before its column, and it was named by the database.
  const keys = (await context.getForeignKeyReferencesForTable('notebooks')) as {
    columnName: string;
    constraintName: string;
  }[];
  for (const { columnName, constraintName } of keys) {
    if (columnName === 'archived_by') await context.removeConstraint('notebooks', constraintName);
  }
  await context.removeColumn('notebooks', 'archived_by');
  await context.removeColumn('notebooks', 'archived_at');
}
