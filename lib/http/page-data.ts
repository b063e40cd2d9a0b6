import { notFound, redirect } from 'next/navigation';
import { cache } from 'react';
import packageFile from '@/package.json';
import type { Actor } from '@/lib/auth/actor';
import { auth } from '@/lib/auth/current';
import {
  checkListedSchema,
  fitLimitsSchema,
  fitSchema,
  groupLogSchema,
  groupSchema,
  measurementListedSchema,
  instanceStateSchema,
  measurementSchema,
  meSchema,
  notebookSchema,
  settingsSchema,
  siteUsersSchema,
  storageStateSchema,
  statementSchema,
  tokenSchema,
  trialsSchema,
  usersQuerySchema,
  type CheckListed,
  type Fit,
  type Group,
  type GroupLog,
  type LogQuery,
  type Me,
  type Measurement,
  type MeasurementListed,
  type Notebook,
  type Role,
  type Settings,
  type Statement,
  type Token,
  type Trials,
} from '@/lib/schemas';
import type { Action } from '@/lib/policies';
import { authorise, isShut, type Access, type RecordKind } from '@/lib/services/access';
import { readMe, readSettings } from '@/lib/services/accounts';
import { administer, isAdministrator } from '@/lib/services/administration';
import { readInstanceState, readStorageState } from '@/lib/services/instance-state';
import { listSiteUsers } from '@/lib/services/site-users';
import { listChecks } from '@/lib/services/checks';
import { readFitLimits } from '@/lib/services/fit-limits';
import { readFit } from '@/lib/services/fits';
import { readGroup } from '@/lib/services/groups';
import { readGroupLog } from '@/lib/services/group-log';
import { listMeasurements, readMeasurement } from '@/lib/services/measurements';
import { readNotebook } from '@/lib/services/notebooks';
import { readStatement } from '@/lib/services/statements';
import { within, type Reading } from '@/lib/services/reading';
import { listTokens } from '@/lib/services/tokens';
import { readTrials } from '@/lib/services/trials';

/**
 * What pages are first drawn with: the very services behind the API's GETs, asked on behalf of the session, and
 * parsed by the same schemas. Afterwards pages ask the API.
 */

export const version: string = packageFile.version;

/** Who is signed in; without anybody the page of signing in, which leads back to `path`. */
export async function visitor(path: string): Promise<Actor> {
  const actor = await auth();
  if (!actor) redirect(`/sign-in?callbackUrl=${encodeURIComponent(path)}`);
  return actor;
}

/** Who is signed in, for pages that are drawn for guests too. */
export const guestOrMember = (): Promise<Actor | null> => auth();

/** Foreign, missing and not allowed look alike: the page of what isn't there. */
async function orNotFound<T>(answer: Promise<T>): Promise<T> {
  try {
    return await answer;
  } catch (error) {
    if (isShut(error)) notFound();
    throw error;
  }
}

/** What one page has read so far: its parts are put together of the same rows. */
const pageReading = cache((): Reading => new Map());

const reading = <T>(act: () => Promise<T>): Promise<T> => within(pageReading(), act);

/** Asked for once a page, however many of its parts are about the same record. */
const accessTo = cache((actor: Actor, kind: RecordKind, id: string, action: Action): Promise<Access> =>
  orNotFound(authorise(actor, kind, id, action)),
);

export const me = cache(async (actor: Actor): Promise<Me> => meSchema.parse(await readMe(actor)));

export const administersSite = (actor: Actor): Promise<boolean> => isAdministrator(actor);

/** What the site administrator's page begins with. */
export async function administration(actor: Actor) {
  const allowed = await orNotFound(administer(actor));
  const [state, storage, users, limits] = await Promise.all([
    readInstanceState(allowed),
    readStorageState(allowed),
    listSiteUsers(allowed, usersQuerySchema.parse({})),
    readFitLimits(actor),
  ]);
  return {
    state: instanceStateSchema.parse(state),
    storage: storageStateSchema.parse(storage),
    users: siteUsersSchema.parse(users),
    limits: fitLimitsSchema.parse(limits),
  };
}

/** Who may do what within a group, in words. */
export { permissions } from '@/lib/policies/words';

export const settings = async (actor: Actor): Promise<Settings> =>
  settingsSchema.parse(await readSettings(actor));

export const tokens = async (actor: Actor): Promise<Token[]> =>
  tokenSchema.array().parse(await listTokens(actor));

export const group = cache(async (actor: Actor, id: string): Promise<Group> => {
  const access = await accessTo(actor, 'group', id, 'group.read');
  return groupSchema.parse(await readGroup(access));
});

/** The role of whoever looks at a notebook in its group. */
export const roleAt = async (actor: Actor, notebookId: string): Promise<Role> =>
  (await accessTo(actor, 'notebook', notebookId, 'notebook.read')).role;

export const groupLog = async (actor: Actor, id: string, query: LogQuery): Promise<GroupLog> => {
  const access = await accessTo(actor, 'group', id, 'group.audit');
  return groupLogSchema.parse(await readGroupLog(access, query));
};

/** In its newest version, or the one that is given. */
export const measurement = cache(async (actor: Actor, id: string, version?: number): Promise<Measurement> => {
  const access = await accessTo(actor, 'measurement', id, 'measurement.read');
  return measurementSchema.parse(await orNotFound(reading(() => readMeasurement(access, version))));
});

export const measurements = async (actor: Actor, groupId: string): Promise<MeasurementListed[]> => {
  const access = await accessTo(actor, 'group', groupId, 'measurement.read');
  return measurementListedSchema.array().parse(await listMeasurements(access));
};

export const notebook = cache(async (actor: Actor, id: string): Promise<Notebook> => {
  const access = await accessTo(actor, 'notebook', id, 'notebook.read');
  return notebookSchema.parse(await reading(() => readNotebook(access)));
});

export const statement = async (actor: Actor, id: string): Promise<Statement> => {
  const access = await accessTo(actor, 'notebook', id, 'notebook.read');
  return statementSchema.parse(await reading(() => readStatement(access)));
};

export const trials = async (actor: Actor, id: string): Promise<Trials> => {
  const access = await accessTo(actor, 'notebook', id, 'notebook.read');
  return trialsSchema.parse(await reading(() => readTrials(access)));
};

/** The checks of a notebook, without what they found. */
export const checks = async (actor: Actor, id: string): Promise<CheckListed[]> =>
  checkListedSchema.array().parse(await listChecks(await accessTo(actor, 'notebook', id, 'notebook.read')));

export const fit = cache(async (actor: Actor, id: string): Promise<Fit> => {
  const access = await accessTo(actor, 'fit', id, 'fit.read');
  return fitSchema.parse(await reading(() => readFit(access)));
});
