import { randomBytes } from 'node:crypto';
import { Fit, FitBlock, FitReplica, Group, Measurement, Membership, Notebook, Session, User } from '@/models';
import type { Actor } from '@/lib/auth/actor';
import { cookieName } from '@/lib/auth/sessions';
import { database } from '@/lib/db';
import { authorise, type Access } from '@/lib/services/access';
import { startFit, stopFit } from '@/lib/services/fits';
import { createNotebook } from '@/lib/services/notebooks';
import { uploadMeasurement } from '@/lib/services/measurement-upload';
import { createToken } from '@/lib/services/tokens';
import { beat, beatMeasurement } from '../demo/scenario';

/** Groups, people and fits that a load is made with; all of it is taken away again afterwards. */
export interface Stage {
  viewers: { cookie: string; token: string }[];
  notebookId: string;
  /** The fit that everybody watches. */
  watchedId: string;
  queuedIds: string[];
  /** Ends every fit that still runs. */
  stopAll(): Promise<void>;
  remove(): Promise<void>;
}

const bytes = (text: string): Buffer => Buffer.from(text, 'utf8');

async function newPerson(stamp: string, name: string): Promise<Actor> {
  const email = `${name}-${stamp}@load.beatnote.example`;
  const { id } = await User.create({ email, emailVerified: new Date() });
  return { userId: id, email };
}

/** A group with an analyst and one notebook on the demo's two-field measurement. */
async function openGroup(stamp: string, name: string) {
  const { id: groupId } = await Group.create({ name: `Load ${name} ${stamp}`, createdAt: new Date() });
  const analyst = await newPerson(stamp, `analyst-${name}`);
  await Membership.create({ groupId, userId: analyst.userId, role: 'analyst', createdAt: new Date() });
  const access = await authorise(analyst, 'group', groupId, 'measurement.upload');
  const { points, mocks } = beatMeasurement.files();
  const { id: measurement } = await uploadMeasurement(access, {
    file: { fileName: 'load.csv', bytes: bytes(points) },
    mocks: { fileName: 'load-mocks.csv', bytes: bytes(mocks ?? '') },
    meta: { fileName: '', bytes: bytes(JSON.stringify({ name: 'Load', simulated: true })) },
  });
  const { id: notebookId } = await createNotebook(access, { title: `Load ${name}`, measurement, ...beat });
  return {
    groupId,
    analyst,
    notebookId,
    notebook: await authorise(analyst, 'notebook', notebookId, 'fit.start'),
  };
}

async function newViewer(stamp: string, index: number, groupId: string) {
  const person = await newPerson(stamp, `viewer-${index}`);
  await Membership.create({ groupId, userId: person.userId, role: 'referee', createdAt: new Date() });
  const sessionToken = randomBytes(32).toString('hex');
  const expires = new Date(Date.now() + 3_600_000);
  await Session.create({ userId: person.userId, sessionToken, expires });
  return {
    cookie: `${cookieName('session')}=${sessionToken}`,
    token: await createToken(person.email, 'load'),
  };
}

async function removeAll(groupIds: string[]): Promise<void> {
  const fits = await Fit.findAll({ where: { groupId: groupIds }, attributes: ['id'] });
  const fitId = fits.map(({ id }) => id);
  await FitBlock.destroy({ where: { fitId } });
  await FitReplica.destroy({ where: { fitId } });
  await Fit.destroy({ where: { id: fitId } });
  await Notebook.destroy({ where: { groupId: groupIds } });
  await Measurement.destroy({ where: { groupId: groupIds } });
  const members = await Membership.findAll({ where: { groupId: groupIds }, attributes: ['userId'] });
  const userId = members.map((member) => member.userId);
  await Group.destroy({ where: { id: groupIds } });
  await Session.destroy({ where: { userId } });
  await User.destroy({ where: { id: userId } });
}

/** Sets the stage: `viewers` members who only read, one fit that doesn't end by itself, `queued` short ones in another group. */
export async function setStage({ viewers, queued }: { viewers: number; queued: number }): Promise<Stage> {
  database();
  const stamp = randomBytes(4).toString('hex');
  const watched = await openGroup(stamp, 'watched');
  const others = await openGroup(stamp, 'others');
  const groupIds = [watched.groupId, others.groupId];
  const people = [];
  for (let i = 0; i < viewers; i++) people.push(await newViewer(stamp, i, watched.groupId));
  const endless = { seed: 'load', maxDraws: 1_000_000, target: { ess: 1e9 } };
  const { id: watchedId } = await startFit(watched.notebook, endless);
  const queuedIds: string[] = [];
  for (let i = 0; i < queued; i++) {
    const short = { seed: `load ${i}`, maxDraws: 2_000, target: { ess: 1e9 } };
    queuedIds.push((await startFit(others.notebook, short)).id);
  }
  const accessTo = (actor: Actor, id: string): Promise<Access> => authorise(actor, 'fit', id, 'fit.stop');
  return {
    viewers: people,
    notebookId: watched.notebookId,
    watchedId,
    queuedIds,
    async stopAll() {
      await stopFit(await accessTo(watched.analyst, watchedId));
      for (const id of queuedIds) await stopFit(await accessTo(others.analyst, id));
    },
    remove: () => removeAll(groupIds),
  };
}
