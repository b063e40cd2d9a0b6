import { DataTypes } from 'sequelize';
import type { MigrationContext } from './table';

/** When the invitation's mail last went out; null where it never did, so that a lead can send it again. */
export const up = ({ context }: MigrationContext) =>
  context.addColumn('invitations', 'sent_at', { type: DataTypes.DATE(3), allowNull: true });

export const down = ({ context }: MigrationContext) => context.removeColumn('invitations', 'sent_at');
