import type { MigrationContext } from './table';

/** When somebody last signed in, and since when they may not any more. One statement, so that it is done or not. */
export const up = ({ context }: MigrationContext) =>
  context.sequelize.query(
    'ALTER TABLE users ADD COLUMN last_sign_in_at DATETIME(3) NULL, ADD COLUMN disabled_at DATETIME(3) NULL',
  );

export const down = ({ context }: MigrationContext) =>
  context.sequelize.query('ALTER TABLE users DROP COLUMN last_sign_in_at, DROP COLUMN disabled_at');
