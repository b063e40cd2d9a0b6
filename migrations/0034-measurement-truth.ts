import { json, maybe, type MigrationContext } from './table';

/** What simulated data were made with. */
export const up = ({ context }: MigrationContext): Promise<void> =>
  context.addColumn('measurement_versions', 'truth', maybe(json));

export const down = ({ context }: MigrationContext): Promise<void> =>
  context.removeColumn('measurement_versions', 'truth');
