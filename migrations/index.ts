import { Umzug } from 'umzug';
import type { QueryInterface, Sequelize } from 'sequelize';
import { SequelizeStorage } from 'umzug';
import * as users from './0001-users';
import * as accounts from './0002-accounts';
import * as sessions from './0003-sessions';
import * as verificationTokens from './0004-verification-tokens';
import * as apiTokens from './0005-api-tokens';
import * as groups from './0006-groups';
import * as memberships from './0007-memberships';
import * as invitations from './0008-invitations';
import * as auditEvents from './0009-audit-events';
import * as measurements from './0010-measurements';
import * as measurementVersions from './0011-measurement-versions';
import * as notebooks from './0012-notebooks';
import * as notebookRevisions from './0013-notebook-revisions';
import * as fits from './0014-fits';
import * as fitsByStatus from './0015-fits-by-status';
import * as fitReplicas from './0016-fit-replicas';
import * as fitBlocks from './0017-fit-blocks';
import * as fitsRepeats from './0018-fits-repeats';
import * as notebooksArchived from './0022-notebooks-archived';
import * as revisionsRestoredFrom from './0023-revisions-restored-from';
import * as notebooksOrigin from './0024-notebooks-origin';
import * as fitQueueing from './0025-fit-queueing';
import * as fitLimits from './0026-fit-limits';
import * as fitMails from './0027-fit-mails';
import * as mailAboutFits from './0028-mail-about-fits';
import * as invitationsSent from './0029-invitations-sent';
import * as auditEventsByTime from './0030-audit-events-by-time';
import * as usersSignIn from './0031-users-sign-in';
import * as notebookStatements from './0032-notebook-statements';
import * as fitsCommittedAt from './0033-fits-committed-at';
import * as measurementTruth from './0034-measurement-truth';
import * as scans from './0035-scans';
import * as checks from './0038-checks';
import * as checkBlocks from './0039-check-blocks';
import * as measurementTheory from './0040-measurement-theory';
import * as measurementSpectrum from './0043-measurement-spectrum';
import * as notebookParts from './0045-notebook-parts';
import * as fitParts from './0046-fit-parts';
import type { MigrationContext } from './table';

interface Migration {
  up(context: MigrationContext): Promise<unknown>;
  down(context: MigrationContext): Promise<unknown>;
}

/** Every migration in order; a name is never reused. */
const migrations: readonly (readonly [string, Migration])[] = [
  ['0001-users', users],
  ['0002-accounts', accounts],
  ['0003-sessions', sessions],
  ['0004-verification-tokens', verificationTokens],
  ['0005-api-tokens', apiTokens],
  ['0006-groups', groups],
  ['0007-memberships', memberships],
  ['0008-invitations', invitations],
  ['0009-audit-events', auditEvents],
  ['0010-measurements', measurements],
  ['0011-measurement-versions', measurementVersions],
  ['0012-notebooks', notebooks],
  ['0013-notebook-revisions', notebookRevisions],
  ['0014-fits', fits],
  ['0015-fits-by-status', fitsByStatus],
  ['0016-fit-replicas', fitReplicas],
  ['0017-fit-blocks', fitBlocks],
  ['0018-fits-repeats', fitsRepeats],
  ['0022-notebooks-archived', notebooksArchived],
  ['0023-revisions-restored-from', revisionsRestoredFrom],
  ['0024-notebooks-origin', notebooksOrigin],
  ['0025-fit-queueing', fitQueueing],
  ['0026-fit-limits', fitLimits],
  ['0027-fit-mails', fitMails],
  ['0028-mail-about-fits', mailAboutFits],
  ['0029-invitations-sent', invitationsSent],
  ['0030-audit-events-by-time', auditEventsByTime],
  ['0031-users-sign-in', usersSignIn],
  ['0032-notebook-statements', notebookStatements],
  ['0033-fits-committed-at', fitsCommittedAt],
  ['0034-measurement-truth', measurementTruth],
  ['0035-scans', scans],
  ['0038-checks', checks],
  ['0039-check-blocks', checkBlocks],
  ['0040-measurement-theory', measurementTheory],
  ['0043-measurement-spectrum', measurementSpectrum],
  ['0045-notebook-parts', notebookParts],
  ['0046-fit-parts', fitParts],
];

/** The migrator of an open database; run it with one process at a time. */
export function migrator(sequelize: Sequelize): Umzug<QueryInterface> {
  return new Umzug<QueryInterface>({
    migrations: migrations.map(([name, migration]) => ({
      name,
      up: ({ context }) => migration.up({ context }),
      down: ({ context }) => migration.down({ context }),
    })),
    context: sequelize.getQueryInterface(),
    storage: new SequelizeStorage({ sequelize, tableName: 'schema_migrations' }),
    logger: undefined,
  });
}
