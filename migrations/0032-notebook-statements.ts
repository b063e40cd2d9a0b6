import { DataTypes } from 'sequelize';
import type { MigrationContext } from './table';

/** The group's words, with the revision that changed them; null where it left them as they were. */
export const up = ({ context }: MigrationContext) =>
  context.addColumn('notebook_revisions', 'statement', { type: DataTypes.TEXT, allowNull: true });

export const down = ({ context }: MigrationContext) =>
  context.removeColumn('notebook_revisions', 'statement');
