import type { MigrationContext } from './table';

/** When a fit's turn comes, who ended it, and what came out of it. One statement, so that it is one step. */
export const up = async ({ context }: MigrationContext): Promise<void> => {
  await context.sequelize.query(
    `ALTER TABLE fits
       ADD COLUMN outputs JSON NULL,
       ADD COLUMN queued_at DATETIME(3) NULL,
       ADD COLUMN expected_seconds DOUBLE NOT NULL DEFAULT 0,
       ADD COLUMN stopped_by CHAR(36) BINARY NULL,
       ADD CONSTRAINT fits_stopped_by FOREIGN KEY (stopped_by) REFERENCES users (id)`,
  );
};

export const down = async ({ context }: MigrationContext): Promise<void> => {
  await context.sequelize.query(
    `ALTER TABLE fits
       DROP FOREIGN KEY fits_stopped_by,
       DROP COLUMN stopped_by,
       DROP COLUMN expected_seconds,
       DROP COLUMN queued_at,
       DROP COLUMN outputs`,
  );
};
