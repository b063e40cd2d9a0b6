import { maybe, reference, type MigrationContext } from './table';

/** The fit whose settings another one repeats on a newer version of the measurement. */
export const up = ({ context }: MigrationContext) =>
  context.addColumn('fits', 'repeats_id', { ...maybe(reference('fits')), onDelete: 'SET NULL' });

export const down = async ({ context }: MigrationContext) => {
  // The key that MariaDB made for it holds the column.
  const keys = (await context.getForeignKeyReferencesForTable('fits')) as {
    columnName: string;
    constraintName: string;
  }[];
  for (const { columnName, constraintName } of keys) {
    if (columnName === 'repeats_id') await context.removeConstraint('fits', constraintName);
  }
  await context.removeColumn('fits', 'repeats_id');
};
