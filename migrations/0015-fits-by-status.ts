import type { MigrationContext } from './table';

/** The reconciler looks for unfinished fits without a live lease. */
export const up = ({ context }: MigrationContext) =>
  context.addIndex('fits', ['status', 'lease_until'], { name: 'fits_by_status' });

export const down = ({ context }: MigrationContext) => context.removeIndex('fits', 'fits_by_status');
