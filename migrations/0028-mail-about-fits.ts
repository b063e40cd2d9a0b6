import { DataTypes } from 'sequelize';
import type { MigrationContext } from './table';

/** Whether a person is told by mail that a fit of theirs has ended. */
export const up = ({ context }: MigrationContext) =>
  context.addColumn('users', 'mail_about_fits', {
    type: DataTypes.BOOLEAN,
    allowNull: false,
    defaultValue: true,
  });

export const down = ({ context }: MigrationContext) => context.removeColumn('users', 'mail_about_fits');
