import { maybeInstant, type MigrationContext } from './table';

/** When draws or a report of a fit were last committed: viewers' lag is counted from there. */
export const up = ({ context }: MigrationContext) => context.addColumn('fits', 'committed_at', maybeInstant);

export const down = ({ context }: MigrationContext) => context.removeColumn('fits', 'committed_at');
