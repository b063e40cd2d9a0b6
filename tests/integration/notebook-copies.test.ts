import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { AuditEvent, Notebook, NotebookRevision } from '@/models';
import { POST as extendRoute } from '@/app/api/v1/fits/[id]/extend/route';
import { GET as groupRoute } from '@/app/api/v1/groups/[id]/route';
import { DELETE, GET, PATCH } from '@/app/api/v1/notebooks/[id]/route';
import { POST as archive } from '@/app/api/v1/notebooks/[id]/archive/route';
import { POST as copy } from '@/app/api/v1/notebooks/[id]/copy/route';
import { POST as start } from '@/app/api/v1/notebooks/[id]/fits/route';
import { GET as revision } from '@/app/api/v1/notebooks/[id]/revisions/[revision]/route';
import { POST as restore } from '@/app/api/v1/notebooks/[id]/revisions/[revision]/restore/route';
import { POST as unarchive } from '@/app/api/v1/notebooks/[id]/unarchive/route';
import { database } from '@/lib/db';
import { groupSchema, notebookCreatedSchema, notebookSchema, revisionSchema } from '@/lib/schemas';
import { copyTitle } from '@/lib/services/notebook-copy';
import { call, closeConnections, createGroup, createMember, errorOf } from './harness';
import { background, openNotebook, startFit, stopFit } from './sampling';
import { filePart, uploadData, uploadTo } from './uploads';

type Person = Awaited<ReturnType<typeof createMember>>;
let group: string;
let lead: Person;
let analyst: Person;
beforeAll(async () => {
  database();
  group = await createGroup();
  [lead, analyst] = [await createMember(group, 'lead'), await createMember(group, 'analyst')];
});
afterAll(closeConnections);

const desk = () => ({ group, token: analyst.token });
const open = (settings: Record<string, unknown> = {}) =>
  openNotebook(desk(), { template: background, ...settings });
const read = async (id: string) =>
  notebookSchema.parse(await (await call(GET, { params: { id }, token: analyst.token })).json());
const edit = async (id: string, json: Record<string, unknown>) => {
  const answer = await call(PATCH, { method: 'PATCH', params: { id }, token: analyst.token, json });
  if (answer.status !== 200) throw new Error(await answer.text());
};
const post = (verb: typeof copy, id: string, json: unknown = {}, token = analyst.token) =>
  call(verb, { params: { id }, token, json });
const copied = async (id: string, json: unknown = {}) => {
  const answer = await post(copy, id, json);
  if (answer.status !== 201) throw new Error(await answer.text());
  return read(notebookCreatedSchema.parse(await answer.json()).id);
};
const restored = (id: string, number: number, standing: number, token = analyst.token) =>
  call(restore, { params: { id, revision: String(number) }, token, json: { revision: standing } });
const settingsOf = ({ cuts, likelihood, template, priors }: Awaited<ReturnType<typeof read>>) => ({
  cuts,
  likelihood,
  template,
  priors,
});

describe('a copy of a notebook', () => {
  const priors = { c1: { kind: 'uniform', lo: -4, hi: 4 } };

  it('has the settings that stand, on the same measurement, under a title that says so', async () => {
    const id = await open({ cuts: { kappaMax: 0.2 }, likelihood: { kind: 'hartlap' }, priors });
    await edit(id, { revision: 1, title: 'Grown', priors: { c2: { kind: 'fixed', value: 0 } } });
    const original = await read(id);
    const made = await copied(id);
    expect(settingsOf(made)).toEqual(settingsOf(original));
    expect(made).toMatchObject({
      title: 'Grown (copy)',
      revision: 1,
      number: original.number + 1,
      measurement: original.measurement,
      origin: { number: original.number, title: 'Grown', revision: 2, fit: null },
      fits: [],
    });
    expect((await read(id)).origin).toBeNull();
    const logged = await AuditEvent.findOne({ where: { subjectId: made.id, action: 'notebook.create' } });
    expect(logged?.details).toMatchObject({ origin: { number: original.number, revision: 2 } });
  });

  it('of a fit has what the fit froze, not what stands', async () => {
    const id = await open({ priors });
    const fit = await startFit(desk(), id, { seed: 1 });
    await stopFit(desk(), fit);
    const frozen = await read(id);
    await edit(id, {
      revision: 1,
      priors: { c1: { kind: 'normal', mean: 0, sd: 9 } },
      cuts: { kappaMin: 0.01 },
    });
    const made = await copied(id, { fit, title: 'From the fit' });
    expect(settingsOf(made)).toEqual(settingsOf(frozen));
    expect(made).toMatchObject({ title: 'From the fit', origin: { revision: 1, fit: 1 } });
    const other = await open();
    const error = await errorOf(await post(copy, other, { fit }));
    expect(error).toMatchObject({ status: 404, details: [{ path: 'fit' }] });
  });

  it('on another measurement of the group takes its newest version, and its likelihood where it must', async () => {
    const id = await open({ priors });
    const mocked = await uploadData(group, analyst.token, 'two-field.csv');
    expect(await copied(id, { measurement: mocked.id })).toMatchObject({
      measurement: { id: mocked.id, version: 1 },
      likelihood: { kind: 'matched-t' },
      priors,
    });
    const parts = { file: filePart('files/clean.csv'), covariance: filePart('files/cov_ok.txt') };
    const uncounted = (await (await uploadTo(group, analyst.token, { ...parts, meta: '{}' })).json()) as {
      id: string;
    };
    expect(await copied(id, { measurement: uncounted.id })).toMatchObject({
      likelihood: { kind: 'normal' },
      template: { options: { binAverage: false } },
    });
    const elsewhere = await createGroup();
    const stranger = await createMember(elsewhere, 'lead');
    const foreign = await uploadData(elsewhere, stranger.token);
    const refused = await errorOf(await post(copy, id, { measurement: foreign.id }));
    const missing = await errorOf(await post(copy, id, { measurement: randomUUID() }));
    expect(missing).toMatchObject({ status: 404, details: [{ path: 'measurement' }] });
    expect(refused).toEqual(missing);
  });

  it('on a measurement where its cut keeps nothing is refused, and nothing is stored', async () => {
    const id = await open({ cuts: { kappaMin: 0.003, kappaMax: 0.2 } });
    const far = filePart('two-field.csv').bytes.toString();
    // The same points a thousand times further in in κ.
    const moved = far
      .split('\n')
      .map((line) =>
        /^\d/.test(line)
          ? line
              .split(',')
              .map((cell, i) => (i < 3 ? String(Number(cell) / 1000) : cell))
              .join(',')
          : line,
      )
      .join('\n');
    const parts = { file: { name: 'far.csv', bytes: moved }, mocks: filePart('two-field-mocks.csv') };
    const answer = await uploadTo(group, analyst.token, parts);
    expect(answer.status).toBe(201);
    const { id: measurement } = (await answer.json()) as { id: string };
    const before = await Notebook.count({ where: { groupId: group } });
    expect((await errorOf(await post(copy, id, { measurement }))).status).toBe(422);
    expect(await Notebook.count({ where: { groupId: group } })).toBe(before);
  });

  it('has a title of at most 160 characters', () => {
    expect(copyTitle('Two fields')).toBe('Two fields (copy)');
    expect(copyTitle('x'.repeat(160))).toHaveLength(160);
    expect(copyTitle('x'.repeat(160)).endsWith(' (copy)')).toBe(true);
  });
});

describe('revisions', () => {
  it('are read whole, and an earlier one made to stand again as a new one', async () => {
    const id = await open();
    await edit(id, { revision: 1, title: 'Second', template: { id: 'free-phase', options: { fields: 1 } } });
    await edit(id, { revision: 2, cuts: { kappaMax: 0.2 } });
    const answer = await call(revision, { params: { id, revision: '1' }, token: analyst.token });
    const first = revisionSchema.parse(await answer.json());
    expect(first).toMatchObject({
      revision: 1,
      title: 'Sampling',
      by: analyst.user.email,
      cuts: {},
      restoredFrom: null,
    });
    expect(Object.keys(first.priors)).toEqual(['c1', 'c2']);

    expect((await restored(id, 1, 3)).status).toBe(200);
    const now = await read(id);
    expect(now).toMatchObject({ revision: 4, title: 'Sampling', cuts: {} });
    expect(settingsOf(now)).toEqual({
      cuts: first.cuts,
      likelihood: first.likelihood,
      template: first.template,
      priors: first.priors,
    });
    expect(now.record.at(-1)).toMatchObject({
      restoredFrom: 1,
      sections: ['title', 'measurement', 'template', 'priors'],
    });
    expect(await NotebookRevision.count({ where: { notebookId: id } })).toBe(4);
    expect(await errorOf(await restored(id, 2, 3))).toMatchObject({ status: 409, code: 'stale_revision' });
    // What stands already makes no revision.
    expect((await restored(id, 1, 4)).status).toBe(200);
    expect((await read(id)).revision).toBe(4);
  });

  it('bring the words back with the settings, also that there were none', async () => {
    const id = await open();
    await edit(id, { revision: 1, statement: 'No oscillation is seen.' });
    await edit(id, { revision: 2, title: 'Second' });
    await edit(id, { revision: 3, statement: 'Nothing is claimed yet.' });
    const words = async (number: number) => {
      const answer = await call(revision, {
        params: { id, revision: String(number) },
        token: analyst.token,
      });
      return revisionSchema.parse(await answer.json()).statement;
    };
    expect(await Promise.all([1, 2, 3, 4].map(words))).toEqual([
      '',
      'No oscillation is seen.',
      'No oscillation is seen.',
      'Nothing is claimed yet.',
    ]);
    await restored(id, 3, 4);
    const now = await read(id);
    expect(now).toMatchObject({ revision: 5, title: 'Second', statement: 'No oscillation is seen.' });
    expect(now.record.at(-1)).toMatchObject({ restoredFrom: 3, sections: ['statement'] });
    await restored(id, 1, 5);
    expect(await read(id)).toMatchObject({ revision: 6, title: 'Sampling', statement: '' });
  });

  it.each(['0', '9', '01', '-1', '1.0', 'x', '1; drop'])('%s is none', async (number) => {
    const id = await open();
    const answer = await call(revision, { params: { id, revision: number }, token: analyst.token });
    expect((await errorOf(answer)).status).toBe(404);
  });
});

describe('a notebook that is put away', () => {
  it('with a fit is archived, not erased; is read and copied, not changed; and comes back', async () => {
    const id = await open();
    const fit = await startFit(desk(), id, { seed: 1 });
    expect(await errorOf(await post(archive, id, {}, lead.token))).toMatchObject({
      status: 409,
      message: expect.stringContaining('Fit 1 is still running'),
    });
    await stopFit(desk(), fit);
    const erase = () => call(DELETE, { method: 'DELETE', params: { id }, token: lead.token });
    expect(await errorOf(await erase())).toMatchObject({
      status: 409,
      message: expect.stringContaining('archive it'),
    });
    expect((await post(archive, id, {}, lead.token)).status).toBe(200);
    const away = await read(id);
    expect(away.archived?.by).toBe(lead.user.email);
    expect(away.may).toEqual(['notebook.read', 'notebook.create', 'fit.read', 'scan.read', 'check.read']);
    expect(away.fits).toHaveLength(1);
    const answer = await call(PATCH, {
      method: 'PATCH',
      params: { id },
      token: analyst.token,
      json: { revision: 1, title: 'No' },
    });
    for (const refused of [
      answer,
      await post(start, id),
      await restored(id, 1, 1),
      await call(extendRoute, { params: { id: fit }, token: analyst.token, json: { draws: 10 } }),
    ]) {
      expect(await errorOf(refused)).toMatchObject({
        status: 409,
        message: expect.stringContaining('archived'),
      });
    }
    expect((await copied(id)).archived).toBeNull();

    const home = async () =>
      groupSchema.parse(await (await call(groupRoute, { params: { id: group }, token: lead.token })).json());
    expect((await home()).notebooks.find((each) => each.id === id)?.archivedAt).not.toBeNull();
    expect((await post(unarchive, id, {}, lead.token)).status).toBe(200);
    expect((await read(id)).archived).toBeNull();
    await edit(id, { revision: 1, title: 'Yes' });
    const events = await AuditEvent.findAll({ where: { subjectId: id }, order: [['createdAt', 'ASC']] });
    expect(events.map(({ action }) => action)).toEqual([
      'notebook.create',
      'notebook.archive',
      'notebook.unarchive',
      'notebook.edit',
    ]);
  });

  it('without a fit can be erased, by a lead alone', async () => {
    const id = await open();
    const erase = (token: string) => call(DELETE, { method: 'DELETE', params: { id }, token });
    expect((await errorOf(await erase(analyst.token))).status).toBe(403);
    expect((await erase(lead.token)).status).toBe(200);
    expect((await errorOf(await call(GET, { params: { id }, token: lead.token }))).status).toBe(404);
    const logged = await AuditEvent.findOne({ where: { subjectId: id, action: 'notebook.delete' } });
    expect(logged?.details).toMatchObject({ title: 'Sampling' });
  });
});
