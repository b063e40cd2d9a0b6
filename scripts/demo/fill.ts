import { AuditEvent, Fit, Group, Measurement, Membership, Notebook, NotebookRevision, User } from '@/models';
import { authorise, type Access, type Actor } from '@/lib/services/access';
import { recordEvent } from '@/lib/services/audit';
import { startFit } from '@/lib/services/fits';
import { createGroup } from '@/lib/services/groups';
import { createNotebook, patchNotebook } from '@/lib/services/notebooks';
import { uploadMeasurement } from '@/lib/services/measurement-upload';
import {
  accounts,
  demoEmail,
  groupName,
  measurements,
  notebooks,
  siteAdministrator,
  type DemoMeasurement,
  type DemoNotebook,
} from './scenario';

/**
 * Fills an empty instance with the demo. Every step looks first whether it was done, so that a start that was killed in the
 * middle is taken up by the next; once all are done the group's log says so, and what people then do with the demo is theirs.
 */

const filled = 'group.demo';
const bytes = (text: string): Buffer => Buffer.from(text, 'utf8');
const part = (fileName: string, text: string | null) =>
  text === null ? undefined : { fileName, bytes: bytes(text) };

async function person(email: string, siteAdmin = false): Promise<Actor> {
  const [{ id }] = await User.findOrCreate({ where: { email }, defaults: { email, siteAdmin } });
  return { userId: id, email };
}

async function ensureGroup(lead: Actor): Promise<string> {
  const known = await Group.findOne({ where: { name: groupName } });
  return known?.id ?? (await createGroup(lead, { name: groupName })).id;
}

async function ensureMeasurement(access: Access, wanted: DemoMeasurement): Promise<string> {
  const { groupId } = access;
  const { name, description, fileName, truth } = wanted;
  const known = await Measurement.findOne({ where: { groupId, name } });
  if (known) return known.id;
  const { points, mocks, covariance } = wanted.files();
  const { id } = await uploadMeasurement(access, {
    file: part(`${fileName}.csv`, points),
    mocks: part(`${fileName}-mocks.csv`, mocks),
    covariance: part(`${fileName}-covariance.csv`, covariance),
    meta: part('', JSON.stringify({ name, description, simulated: true, truth })),
  });
  return id;
}

async function ensureNotebook(access: Access, wanted: DemoNotebook, measurement: string): Promise<string> {
  const { title, template, priors, seed } = wanted;
  const known = await Notebook.findOne({ where: { groupId: access.groupId, title } });
  const { id } = known ?? (await createNotebook(access, { title, measurement, template, priors }));
  if (seed !== null && (await Fit.count({ where: { notebookId: id } })) === 0) {
    await startFit(await authorise(access.actor, 'notebook', id, 'fit.start'), { seed });
  }
  return id;
}

async function ensureStatement(access: Access, notebookId: string, statement: string): Promise<void> {
  const revisions = await NotebookRevision.findAll({
    where: { notebookId },
    attributes: ['revision', 'statement'],
  });
  if (revisions.some((each) => each.statement !== null)) return;
  const revision = Math.max(...revisions.map((each) => each.revision));
  const notebook = await authorise(access.actor, 'notebook', notebookId, 'notebook.edit');
  await patchNotebook(notebook, { revision, statement });
}

async function fill(): Promise<void> {
  const people = new Map<string, Actor>();
  for (const name of accounts) people.set(name, await person(demoEmail(name)));
  await person(siteAdministrator, true);
  const groupId = await ensureGroup(people.get('lead')!);
  for (const [role, { userId }] of people) {
    const where = { groupId, userId };
    await Membership.findOrCreate({ where, defaults: { ...where, role, createdAt: new Date() } });
  }
  const analyst = await authorise(people.get('analyst')!, 'group', groupId, 'measurement.upload');
  const uploaded = new Map<string, string>();
  for (const each of measurements) uploaded.set(each.name, await ensureMeasurement(analyst, each));
  const opened: { id: string; statement: string | null }[] = [];
  for (const each of notebooks) {
    const id = await ensureNotebook(analyst, each, uploaded.get(each.measurement)!);
    opened.push({ id, statement: each.statement });
  }
  // The first notebook is written last: it then stands first in the group's list.
  for (const { id, statement } of opened.reverse()) {
    if (statement !== null) await ensureStatement(analyst, id, statement);
  }
  await recordEvent({ groupId, actorId: null, action: filled, subjectType: 'group', subjectId: groupId });
}

/** True for an instance in which nobody but the demo's people has ever been, and whose demo isn't complete. */
async function isWanted(): Promise<boolean> {
  const ours = [...accounts.map(demoEmail), siteAdministrator];
  const users = await User.findAll({ attributes: ['email'] });
  if (users.some(({ email }) => !ours.includes(email))) return false;
  const groups = await Group.findAll();
  if (groups.some(({ name }) => name !== groupName)) return false;
  return (await AuditEvent.count({ where: { action: filled } })) === 0;
}

/** Fills the demo in where it belongs; says whether there was anything to do. */
export async function fillDemo(): Promise<boolean> {
  if (!(await isWanted())) return false;
  await fill();
  return true;
}
