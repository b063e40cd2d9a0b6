import { json, maybe, type MigrationContext } from './table';

/** What a notebook was copied from: numbers as they were then, since the original may be deleted. */
export const up = ({ context }: MigrationContext): Promise<void> =>
  context.addColumn('notebooks', 'origin', maybe(json));

export const down = ({ context }: MigrationContext): Promise<void> =>
  context.removeColumn('notebooks', 'origin');
