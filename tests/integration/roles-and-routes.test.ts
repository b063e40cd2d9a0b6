import { randomUUID } from 'node:crypto';
import { readdirSync } from 'node:fs';
import path from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { config } from '@/lib/config';
import { database } from '@/lib/db';
import { recordKindOf, type Verb } from '@/lib/http/route';
import { rowOf, routes, type RouteKey } from '@/lib/http/routes';
import { actionsFor, may } from '@/lib/policies';
import { groupSchema, roles, type Role } from '@/lib/schemas';
import {
  Check,
  Fit,
  Invitation,
  Measurement,
  MeasurementVersion,
  Notebook,
  NotebookRevision,
  Scan,
  User,
} from '@/models';
import {
  call,
  closeConnections,
  createGroup,
  createMember,
  createMembership,
  createSession,
  createToken,
  createUser,
  errorOf,
  unique,
} from './harness';

const folder = path.join(process.cwd(), 'app/api/v1');
const verbs = ['GET', 'POST', 'PUT', 'PATCH', 'DELETE'] as const;

/** Every verb that a route file exports, by `METHOD /path/:id`. */
async function exportedVerbs(): Promise<Map<string, Verb>> {
  const found = new Map<string, Verb>();
  const files = readdirSync(folder, { recursive: true, encoding: 'utf8' }).filter((file) =>
    /(^|\/)route\.ts$/.test(file),
  );
  for (const file of files) {
    const route = (await import(path.join(folder, file))) as Partial<Record<(typeof verbs)[number], Verb>>;
    const place = `/${path.dirname(file)}`.replace(/\[(\w+)\]/g, ':$1');
    for (const verb of verbs) if (route[verb]) found.set(`${verb} ${place}`, route[verb]);
  }
  return found;
}

const exported = await exportedVerbs();
const keys = Object.keys(routes) as RouteKey[];

/** What a check says of itself, whole enough to be read. */
const checkRequest = {
  kind: 'calibration',
  inputs: [],
  measurementVersion: 1,
  cuts: {},
  likelihood: { kind: 'normal' },
  mockCount: null,
  template: { id: 'background', version: 1, options: {} },
  priors: {},
  datasets: 50,
  draws: 99,
  seed: 1,
  warmup: 200,
  sampler: 3,
  program: '0',
};

/** One of each record, with nothing in it but what it needs to exist. */
async function createRecords(groupId: string, userId: string, { number = 1, fit: fitted = true } = {}) {
  const now = new Date();
  const sha256 = '0'.repeat(64);
  const measurement = await Measurement.create({
    groupId,
    name: 'm',
    description: '',
    blind: false,
    simulated: true,
    createdBy: userId,
    createdAt: now,
  });
  const version = await MeasurementVersion.create({
    measurementId: measurement.id,
    version: 1,
    rows: 0,
    kappaMin: 0.1,
    kappaMax: 0.2,
    hasBinEdges: false,
    covarianceSource: 'file',
    mockCount: null,
    sha256,
    files: [],
    mapping: {},
    checks: [],
    points: Buffer.alloc(0),
    covariance: Buffer.alloc(0),
    createdBy: userId,
    createdAt: now,
  });
  const notebook = await Notebook.create({
    groupId,
    number,
    title: 'n',
    revision: 1,
    measurementVersionId: version.id,
    createdBy: userId,
    createdAt: now,
    updatedBy: userId,
    updatedAt: now,
  });
  await NotebookRevision.create({
    notebookId: notebook.id,
    revision: 1,
    title: 'n',
    settings: {
      cuts: {},
      likelihood: { kind: 'normal' },
      template: { id: 'background', version: 1, options: {} },
      priors: {},
    },
    sections: [],
    createdBy: userId,
    createdAt: now,
  });
  if (!fitted)
    return {
      group: groupId,
      measurement: measurement.id,
      notebook: notebook.id,
      fit: '',
      scan: '',
      check: '',
    };
  const fit = await Fit.create({
    groupId,
    notebookId: notebook.id,
    number: 1,
    revision: 1,
    measurementVersionId: version.id,
    snapshot: {},
    snapshotSha256: sha256,
    maxDraws: 100,
    targetRhat: 1.01,
    targetEss: 400,
    status: 'stopped',
    startedBy: userId,
    createdAt: now,
  });
  const scan = await Scan.create({
    notebookId: notebook.id,
    groupId,
    number: 1,
    measurementVersionId: version.id,
    request: {},
    requestSha256: sha256,
    status: 'failed',
    startedBy: userId,
    createdAt: now,
  });
  const check = await Check.create({
    notebookId: notebook.id,
    groupId,
    number: 1,
    kind: 'calibration',
    revision: 1,
    measurementVersionId: version.id,
    request: checkRequest,
    requestSha256: sha256,
    status: 'failed',
    queuedAt: now,
    expectedSeconds: 0,
    startedBy: userId,
    createdAt: now,
  });
  return {
    group: groupId,
    measurement: measurement.id,
    notebook: notebook.id,
    fit: fit.id,
    scan: scan.id,
    check: check.id,
  };
}

let records: Awaited<ReturnType<typeof createRecords>>;
const tokens = new Map<string, string>();
/** Where the same people hold the same roles, for records that a call changes. */
let spareGroup: string;
let spares = 0;
let outsider: Awaited<ReturnType<typeof createMember>>;

beforeAll(async () => {
  database();
  const groupId = await createGroup();
  spareGroup = await createGroup();
  for (const role of roles) {
    const member = await createMember(groupId, role);
    await createMembership(member.user, spareGroup, role);
    tokens.set(role, member.token);
    if (role === 'lead') records = await createRecords(groupId, member.user.userId);
  }
  outsider = await createMember(await createGroup(), 'lead');
});
afterAll(closeConnections);

const refusal = (status: number) => status === 401 || status === 403 || status === 404;

/** Routes that put a notebook away or erase it, without a body to stop them. */
const ownNotebook: ReadonlySet<RouteKey> = new Set<RouteKey>([
  'DELETE /notebooks/:id',
  'POST /notebooks/:id/archive',
  'POST /notebooks/:id/unarchive',
]);

/**
 * Whom or what within a group a route is about, for a caller of that role. A route that acts without a body would act
 * on it, so each such call gets one of its own: a member who leaves, an invitation that is taken back.
 */
async function subjectOf(
  key: RouteKey,
  role: Role,
): Promise<{ token: string | undefined; params: Record<string, string> }> {
  const token = tokens.get(role);
  if (key === 'DELETE /groups/:id/members/:userId') {
    const member = await createMember(records.group, role);
    return { token: member.token, params: { userId: member.user.userId } };
  }
  // The one version there is has a notebook on it, and stays.
  if (key === 'DELETE /measurements/:id/versions/:version') return { token, params: { version: '1' } };
  if (key.includes('/invitations/:invitationId')) {
    const { id } = await Invitation.create({
      groupId: records.group,
      email: `${unique('guest')}@example.org`,
      role: 'reader',
      invitedBy: outsider.user.userId,
      createdAt: new Date(),
    });
    return { token, params: { invitationId: id } };
  }
  if (key === 'GET /notebooks/:id/revisions/:revision') return { token, params: { revision: '1' } };
  if (ownNotebook.has(key)) {
    spares += 1;
    const { notebook } = await createRecords(spareGroup, outsider.user.userId, {
      number: spares,
      fit: false,
    });
    return { token, params: { id: notebook } };
  }
  return { token, params: {} };
}

/** Calls a route with a body that no schema takes: who may come in hears of the body, who may not hears of that. */
function knock(
  key: RouteKey,
  how: {
    token?: string;
    cookie?: string;
    origin?: string;
    id?: string;
    params?: Record<string, string>;
  },
) {
  const [method] = key.split(' ');
  const { permission } = rowOf(key);
  const kind = ['anyone', 'user', 'administrator'].includes(permission) ? null : recordKindOf(key);
  const id = how.id ?? (kind === null ? 'background' : records[kind]);
  return call(exported.get(key)!, {
    method,
    ...how,
    params: { id, ...how.params },
    ...(method === 'GET' ? {} : { body: '{"nonsense":', headers: { 'content-type': 'application/json' } }),
  });
}

describe('the table of routes', () => {
  it('has a row for every verb that a route file exports, and a file for every row', () => {
    expect([...exported.keys()].sort()).toEqual([...keys].sort());
  });

  it.each(keys)('%s exports the verb and the permission of its row', (key) => {
    const { route, permission } = exported.get(key)!;
    expect([route, permission]).toEqual([key, rowOf(key).permission]);
  });
});

const open = keys.filter((key) => rowOf(key).permission === 'anyone');
const signedIn = keys.filter((key) => rowOf(key).permission !== 'anyone');
const ofGroups = signedIn.filter((key) => !['user', 'administrator'].includes(rowOf(key).permission));
const ofTheSite = keys.filter((key) => rowOf(key).permission === 'administrator');
const unsafe = signedIn.filter((key) => !key.startsWith('GET '));

describe('roles × routes', () => {
  it.each(open)('%s answers without an account', async (key) => {
    expect(refusal((await knock(key, {})).status)).toBe(false);
  });

  it.each(signedIn)('%s answers 401 without a sign-in and with a bad token', async (key) => {
    expect((await errorOf(await knock(key, {}))).status).toBe(401);
    expect((await errorOf(await knock(key, { token: 'bn_bad' }))).status).toBe(401);
  });

  it.each(unsafe)('%s refuses a session from another origin', async (key) => {
    const cookie = await createSession(outsider.user);
    expect((await errorOf(await knock(key, { cookie, origin: 'https://elsewhere.example' }))).status).toBe(
      403,
    );
    expect((await errorOf(await knock(key, { cookie, origin: config().url }))).status).not.toBe(403);
  });

  it.each(ofGroups.flatMap((key) => roles.map((role) => [key, role] as const)))(
    '%s for a %s is as the policies say',
    async (key, role) => {
      const { permission } = rowOf(key);
      if (permission === 'anyone' || permission === 'user' || permission === 'administrator')
        throw new Error('not of a group');
      const answer = await knock(key, await subjectOf(key, role));
      await answer.body?.cancel();
      const kind = recordKindOf(key);
      if (may(role, permission)) expect(refusal(answer.status)).toBe(false);
      else expect(answer.status).toBe(may(role, `${kind}.read`) ? 403 : 404);
    },
  );

  it.each(ofGroups)('%s answers a foreign record and a missing one alike', async (key) => {
    const foreign = await (await knock(key, { token: outsider.token })).text();
    const missing = await (await knock(key, { token: outsider.token, id: randomUUID() })).text();
    expect(JSON.parse(foreign)).toMatchObject({ error: { code: 'not_found' } });
    expect(foreign).toBe(missing);
  });
});

describe('site administrators × routes', () => {
  const missing = async (answer: Response) => [answer.status, await answer.text()];

  it.each(ofTheSite)('%s is for a site administrator, and to anybody else not there', async (key) => {
    const { userId } = await createUser();
    const admin = await createUser();
    await User.update({ siteAdmin: true }, { where: { id: admin.userId } });
    const params = { userId };
    const allowed = await knock(key, { token: await createToken(admin), params });
    expect(refusal(allowed.status)).toBe(false);
    const answers = await Promise.all(
      [...tokens.values(), outsider.token].map(async (token) => missing(await knock(key, { token, params }))),
    );
    expect(new Set(answers.map((answer) => answer.join())).size).toBe(1);
    expect(answers[0][0]).toBe(404);
  });

  it('opens no group’s records to a site administrator', async () => {
    const admin = await createUser();
    await User.update({ siteAdmin: true }, { where: { id: admin.userId } });
    const token = await createToken(admin);
    for (const key of ofGroups) expect((await knock(key, { token })).status, key).toBe(404);
  });
});

describe('a group’s home', () => {
  const home = async (role: Role) =>
    groupSchema.parse(await (await knock('GET /groups/:id', { token: tokens.get(role) })).json());

  it('lists to those who may read them its measurements and notebooks, with what they may do', async () => {
    for (const role of ['lead', 'analyst', 'referee'] as const) {
      const group = await home(role);
      expect(group.measurements.map(({ id }) => id)).toEqual([records.measurement]);
      expect(group.notebooks.map(({ id }) => id)).toEqual([records.notebook]);
      expect([group.role, group.may]).toEqual([role, actionsFor(role)]);
    }
  });

  it('shows a reader the members and nothing that isn’t released', async () => {
    const group = await home('reader');
    expect([group.measurements, group.notebooks]).toEqual([[], []]);
    expect(group.members.map(({ role }) => role).sort()).toEqual([...roles].sort());
  });
});
