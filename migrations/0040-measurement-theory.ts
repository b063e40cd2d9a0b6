import { bytes, maybe, type MigrationContext } from './table';

/** Window, columns and theory covariance of a measurement's version; null where none came with it. */
export const up = ({ context }: MigrationContext): Promise<void> =>
  context.addColumn('measurement_versions', 'theory', maybe(bytes));

export const down = ({ context }: MigrationContext): Promise<void> =>
  context.removeColumn('measurement_versions', 'theory');
