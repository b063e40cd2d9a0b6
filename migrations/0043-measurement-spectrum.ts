import { json, maybe, type MigrationContext } from './table';

/** The power spectrum by which a bispectrum was turned into S. */
export const up = ({ context }: MigrationContext): Promise<void> =>
  context.addColumn('measurement_versions', 'spectrum', maybe(json));

export const down = ({ context }: MigrationContext): Promise<void> =>
  context.removeColumn('measurement_versions', 'spectrum');
