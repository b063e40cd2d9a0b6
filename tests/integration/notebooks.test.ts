import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest';
import { AuditEvent, Measurement, MeasurementVersion, Notebook, NotebookRevision } from '@/models';
import { POST as create } from '@/app/api/v1/groups/[id]/notebooks/route';
import { POST as uploadNewer } from '@/app/api/v1/measurements/[id]/versions/route';
import { GET, PATCH } from '@/app/api/v1/notebooks/[id]/route';
import { database } from '@/lib/db';
import { notebookCreatedSchema, notebookSchema } from '@/lib/schemas';
import { inferenceSpec } from '@/lib/services/inference-spec';
import { notebookSummaries } from '@/lib/services/notebooks';
import { call, closeConnections, createGroup, createMember, errorOf } from './harness';
import { dataFile, filePart, formOf, uploadData, uploadTo } from './uploads';

beforeAll(() => void database());
afterAll(closeConnections);

let group: string;
let analyst: Awaited<ReturnType<typeof createMember>>;
let measurement: string;
beforeEach(async () => {
  group = await createGroup();
  analyst = await createMember(group, 'analyst');
  measurement = (await uploadData(group, analyst.token, 'two-field.csv')).id;
});

const lockedTwo = { id: 'locked-squeezed', options: { fields: 2 } };
const open = (body: Record<string, unknown>, token = analyst.token, id = group) =>
  call(create, {
    params: { id },
    token,
    json: { title: 'Two fields', measurement, template: lockedTwo, ...body },
  });
const opened = async (body: Record<string, unknown> = {}) => {
  const answer = await open(body);
  if (answer.status !== 201) throw new Error(await answer.text());
  return notebookCreatedSchema.parse(await answer.json());
};
const read = async (id: string, token = analyst.token) =>
  notebookSchema.parse(await (await call(GET, { params: { id }, token })).json());
const edit = (id: string, json: Record<string, unknown>, token = analyst.token) =>
  call(PATCH, { method: 'PATCH', params: { id }, token, json });
const edited = async (id: string, json: Record<string, unknown>) => {
  const answer = await edit(id, json);
  if (answer.status !== 200) throw new Error(await answer.text());
  return notebookSchema.parse(await answer.json());
};

describe('a new notebook', () => {
  it('has a default for all that was left out', async () => {
    const created = await opened();
    expect(created).toMatchObject({ revision: 1, blind: false });
    const notebook = await read(created.id);
    expect(notebook).toMatchObject({
      number: 1,
      groupId: group,
      title: 'Two fields',
      measurement: { id: measurement, name: 'two-field', version: 1 },
      cuts: {},
      bins: { kept: 40, all: 40 },
      likelihood: { kind: 'matched-t' },
      template: {
        id: 'locked-squeezed',
        options: { fields: 2, background: [1, 2], binAverage: true, binWeight: 0 },
      },
      priors: {
        mu1: { kind: 'uniform', lo: 0.2, hi: 8 },
        theta: { kind: 'isotropic' },
        g: { kind: 'normal', mean: 0, sd: 30 },
        // max |S| is 1.79 at κ ≤ 0.29: c1 reaches it within 9, c2 doesn't.
        c1: { kind: 'normal', mean: 0, sd: 3 },
        c2: { kind: 'normal', mean: 0, sd: 70 },
      },
      fits: [],
      createdBy: analyst.user.email,
    });
    expect(Object.keys(notebook.priors)).toEqual(['mu1', 'mu2', 'theta', 'g', 'c1', 'c2']);
    expect(notebook.record).toMatchObject([
      { revision: 1, by: analyst.user.email, sections: ['title', 'measurement', 'template', 'priors'] },
    ]);
    expect(notebook.may).toEqual(expect.arrayContaining(['notebook.edit', 'fit.start']));
  });

  it('takes the normal likelihood where nobody counted mocks, and matched-t where the number is known', async () => {
    const parts = { file: filePart('files/clean.csv'), covariance: filePart('files/cov_ok.txt') };
    for (const [meta, kind] of [
      ['{}', 'normal'],
      ['{"mockCount":300}', 'matched-t'],
    ]) {
      const answer = await uploadTo(group, analyst.token, { ...parts, meta });
      const { id } = (await answer.json()) as { id: string };
      const notebook = await opened({ measurement: id, template: { id: 'background' } });
      expect((await read(notebook.id)).likelihood).toEqual({ kind });
    }
  });

  it('keeps bins that lie inside the cuts, and is inferred from just those', async () => {
    const { id } = await opened({ cuts: { kappaMin: 0.0037, kappaMax: 0.2 } });
    const { bins, cuts } = await read(id);
    const edges = dataFile('two-field.csv')
      .toString()
      .trimEnd()
      .split('\n')
      .slice(2)
      .map((line) => line.split(',').map(Number));
    const inside = edges.filter(([lo, hi]) => lo >= 0.0037 && hi <= 0.2 * (1 + 1e-9));
    expect(bins).toEqual({ kept: inside.length, all: 40 });
    expect(cuts).toEqual({ kappaMin: 0.0037, kappaMax: 0.2 });

    const version = await MeasurementVersion.findOne({ where: { measurementId: measurement } });
    const revision = await NotebookRevision.findOne({ where: { notebookId: id } });
    const { spec, kept, axis } = inferenceSpec(version!, revision!.settings);
    expect([...spec.data.S]).toEqual(inside.map((row) => row[3]));
    expect(kept).toEqual(edges.flatMap((row, i) => (inside.includes(row) ? [i] : [])));
    expect(axis).toMatchObject({ kind: 'bins', weightPower: 0 });
    expect(spec.data.covariance).toHaveLength(inside.length ** 2);
    expect(spec).toMatchObject({ likelihood: 'matched-t', data: { mockCount: version!.mockCount } });
  });

  it('is evaluated at the κ column where bin averages are off, and weights bins as asked', async () => {
    const version = await MeasurementVersion.findOne({ where: { measurementId: measurement } });
    const settingsOf = async (options: Record<string, unknown>) => {
      const { id } = await opened({ template: { id: 'free-phase', options } });
      return (await NotebookRevision.findOne({ where: { notebookId: id } }))!.settings;
    };
    const points = inferenceSpec(version!, await settingsOf({ binAverage: false }));
    expect(points.axis.kind).toBe('points');
    expect(points.axis.kind === 'points' && points.axis.kappa[0]).toBe(0.003177761176);
    const weighted = inferenceSpec(version!, await settingsOf({ binWeight: 2 }));
    expect(weighted.axis).toMatchObject({ kind: 'bins', weightPower: 2 });
    expect(weighted.spec.template.options).toMatchObject({ binAverage: true, binWeight: 2 });
  });

  it('keeps the priors that were given and fills in the rest', async () => {
    const priors = { mu1: { kind: 'uniform', lo: 1, hi: 3 }, c2: { kind: 'fixed', value: 0.5 } };
    const { id } = await opened({ priors });
    expect((await read(id)).priors).toMatchObject({ ...priors, mu2: { kind: 'uniform', lo: 0.2, hi: 8 } });
  });

  it('widens a default prior that the data lie far beyond, and no other', async () => {
    const text = dataFile('two-field.csv').toString();
    // S and its errors a thousand times larger.
    const larger = text.replace(
      /^([\d.,-]+),([^,\n]+),([^,\n]+)$/gm,
      (_, head: string, S: string, e: string) => [head, Number(S) * 1000, Number(e) * 1000].join(','),
    );
    const answer = await uploadTo(group, analyst.token, { file: { name: 'larger.csv', bytes: larger } });
    const { id } = (await answer.json()) as { id: string };
    const template = { id: 'free-phase', options: { fields: 1, background: [1] } };
    const { priors } = await read((await opened({ measurement: id, template })).id);
    const rows = larger
      .trimEnd()
      .split('\n')
      .slice(2)
      .map((line) => line.split(',').map(Number));
    const sizes = rows.map((row) => Math.abs(row[3]) / Math.sqrt(row[2])).sort((x, y) => x - y);
    const amplitude = sizes[sizes.length / 2];
    const a = priors.a1.kind === 'normal' ? priors.a1.sd : NaN;
    expect(a).toBeGreaterThanOrEqual(3 * amplitude);
    expect(a).toBeLessThan(3 * amplitude * 2);
    expect(String(a)).toMatch(/^[1-9]0*$/);
    expect(priors.mu1).toEqual({ kind: 'uniform', lo: 0.2, hi: 8 });
    expect((await read((await opened({ template })).id)).priors.a1).toMatchObject({ sd: 1 });
    await Measurement.update({ blind: true }, { where: { id } });
    const blind = await read((await opened({ measurement: id, template })).id);
    expect(blind.priors.a1).toMatchObject({ sd: 1 });
  });

  it('is numbered within its group, also beside others at the same moment', async () => {
    const made = await Promise.all([1, 2, 3, 4].map(() => opened()));
    const numbers = await Promise.all(made.map(async ({ id }) => (await read(id)).number));
    expect(numbers.sort()).toEqual([1, 2, 3, 4]);
    expect((await notebookSummaries(group)).map(({ number }) => number).sort()).toEqual([1, 2, 3, 4]);
  });

  const refused: [string, Record<string, unknown>, string, RegExp][] = [
    [
      'a template that is not there',
      { template: { id: 'sawtooth' } },
      'template.id',
      /there are|There is no/,
    ],
    [
      'too many fields',
      { template: { id: 'locked-squeezed', options: { fields: 9 } } },
      'template.options.fields',
      /whole number from/,
    ],
    [
      'an unknown option',
      { template: { id: 'free-phase', options: { colour: 1 } } },
      'template.options.colour',
      /this template has/,
    ],
    ['cuts that keep nothing', { cuts: { kappaMin: 0.29, kappaMax: 0.291 } }, 'cuts', /Widen the cut/],
    [
      'hi below lo',
      { priors: { mu1: { kind: 'uniform', lo: 3, hi: 1 } } },
      'priors.mu1.lo',
      /swap or change/,
    ],
    ['an sd of 0', { priors: { g: { kind: 'normal', mean: 0, sd: 0 } } }, 'priors.g.sd', /positive sd/],
    [
      'a prior outside of where the template is defined',
      { priors: { mu2: { kind: 'uniform', lo: -1, hi: 8 } } },
      'priors.mu2.lo',
      /keep it within/,
    ],
    [
      'masses that can’t come in order',
      { priors: { mu1: { kind: 'uniform', lo: 5, hi: 8 }, mu2: { kind: 'uniform', lo: 1, hi: 2 } } },
      'priors.mu2',
      /let the ranges overlap/,
    ],
    [
      'a prior for a parameter that is not there',
      { priors: { mu7: { kind: 'uniform', lo: 1, hi: 2 } } },
      'priors.mu7',
      /the template has mu1, mu2/,
    ],
    ['a prior of an unknown kind', { priors: { mu1: { kind: 'flat' } } }, 'priors.mu1.kind', /./],
    ['no title', { title: '  ' }, 'title', /./],
    [
      'everything fixed',
      {
        template: { id: 'background', options: { background: [1] } },
        priors: { c1: { kind: 'fixed', value: 1 } },
      },
      'priors',
      /free at least one/,
    ],
  ];

  it.each(refused)('with %s is refused with place and remedy', async (_, body, path, says) => {
    const error = await errorOf(await open(body));
    expect(error).toMatchObject({ status: 422, code: 'invalid' });
    expect(error.details[0].path).toBe(path);
    expect(error.details[0].message).toMatch(says);
    expect(await Notebook.count({ where: { groupId: group } })).toBe(0);
  });

  it('with a likelihood of mocks on a covariance without any is refused', async () => {
    const answer = await uploadTo(group, analyst.token, { file: filePart('two-field.csv') });
    const { id } = (await answer.json()) as { id: string };
    const error = await errorOf(await open({ measurement: id, likelihood: { kind: 'hartlap' } }));
    expect(error).toMatchObject({ status: 422, details: [{ path: 'likelihood.kind' }] });
    expect(error.details[0].message).toMatch(/use the normal likelihood/);
  });

  it('on a foreign measurement and on a missing one is refused alike', async () => {
    const elsewhere = await createGroup();
    const { token } = await createMember(elsewhere, 'analyst');
    const foreign = await errorOf(await open({}, token, elsewhere));
    const missing = await errorOf(await open({ measurement: randomUUID() }, token, elsewhere));
    expect(foreign).toEqual(missing);
    expect(foreign).toMatchObject({ status: 404, details: [{ path: 'measurement' }] });
  });
});

describe('an edit', () => {
  it('makes a revision that says which sections it changed and who did it', async () => {
    const { id } = await opened();
    const other = await createMember(group, 'lead');
    const answer = await edit(id, { revision: 1, cuts: { kappaMax: 0.2 } }, other.token);
    expect(answer.status).toBe(200);
    const second = notebookSchema.parse(await answer.json());
    expect(second).toMatchObject({
      revision: 2,
      cuts: { kappaMax: 0.2 },
      template: { id: 'locked-squeezed' },
    });
    const third = await edited(id, {
      revision: 2,
      title: 'Again',
      priors: { g: { kind: 'normal', mean: 0, sd: 5 } },
    });
    expect(third.record.map(({ revision, by, sections }) => [revision, by, sections])).toEqual([
      [1, analyst.user.email, ['title', 'measurement', 'template', 'priors']],
      [2, other.user.email, ['measurement']],
      [3, analyst.user.email, ['title', 'priors']],
    ]);
    expect(third.priors.mu1).toEqual({ kind: 'uniform', lo: 0.2, hi: 8 });
    expect(await notebookSummaries(group)).toMatchObject([
      { title: 'Again', revision: 3, updatedBy: analyst.user.email, fields: 2, lastFit: null },
    ]);
    const events = await AuditEvent.findAll({ where: { subjectId: id }, order: [['createdAt', 'ASC']] });
    expect(events.map(({ action, details }) => [action, details?.revision])).toEqual([
      ['notebook.create', undefined],
      ['notebook.edit', 2],
      ['notebook.edit', 3],
    ]);
  });

  it('of a revision that no longer stands is 409, names both, and changes nothing', async () => {
    const { id } = await opened();
    await edited(id, { revision: 1, title: 'Second' });
    const error = await errorOf(await edit(id, { revision: 1, title: 'Lost' }));
    expect(error).toMatchObject({ status: 409, code: 'stale_revision' });
    expect(error.details.map(({ path }) => path)).toEqual(['revision', 'notebook.revision']);
    expect(error.details[0].message).toContain('1');
    expect(error.details[1].message).toContain('2');
    expect(await read(id)).toMatchObject({ revision: 2, title: 'Second' });
  });

  it('of two at the same moment loses one', async () => {
    const { id } = await opened();
    const answers = await Promise.all(['A', 'B', 'C'].map((title) => edit(id, { revision: 1, title })));
    expect(answers.map(({ status }) => status).sort()).toEqual([200, 409, 409]);
    expect((await read(id)).revision).toBe(2);
  });

  it('that changes nothing makes no revision', async () => {
    const { id } = await opened();
    const same = await edited(id, { revision: 1, title: 'Two fields', template: lockedTwo });
    expect(same.revision).toBe(1);
    expect(same.record).toHaveLength(1);
  });

  it('of the template keeps priors of parameters that stay, drops others and fills in new ones', async () => {
    const mu1 = { kind: 'uniform', lo: 1, hi: 4 };
    const { id } = await opened({ priors: { mu1, g: { kind: 'normal', mean: 0, sd: 7 } } });
    const free = { id: 'free-phase', options: { fields: 1, amplitudes: 'quadrature', background: [1, 3] } };
    const changed = await edited(id, { revision: 1, template: free });
    expect(Object.keys(changed.priors)).toEqual(['mu1', 'a1', 'b1', 'c1', 'c3']);
    expect(changed.priors.mu1).toEqual(mu1);
    expect(changed.record[1].sections).toEqual(['template', 'priors']);
    const back = await edited(id, { revision: 2, template: lockedTwo });
    expect(back.priors.g).toEqual({ kind: 'normal', mean: 0, sd: 30 });
    expect(back.priors.mu1).toEqual(mu1);
  });

  it('that could not be fitted is refused, and the notebook stays', async () => {
    const { id } = await opened();
    const error = await errorOf(
      await edit(id, { revision: 1, priors: { mu1: { kind: 'log-uniform', lo: 0, hi: 2 } } }),
    );
    expect(error).toMatchObject({ status: 422, details: [{ path: 'priors.mu1.lo' }] });
    expect((await read(id)).revision).toBe(1);
  });

  it('without the revision that it edits is refused', async () => {
    const { id } = await opened();
    const error = await errorOf(await edit(id, { title: 'Blindly' }));
    expect(error).toMatchObject({ status: 422, details: [{ path: 'revision' }] });
  });
});

describe('a notebook', () => {
  it('counts its bins without asking the database for the covariance', async () => {
    const { id } = await opened({ cuts: { kappaMax: 0.1 } });
    const query = vi.spyOn(database(), 'query');
    // 40 bins over two decades: the edge below 0.1 is the thirtieth.
    expect((await read(id)).bins).toEqual({ kept: 30, all: 40 });
    const asked = query.mock.calls.map(([sql]) => (typeof sql === 'string' ? sql : sql.query));
    query.mockRestore();
    const versions = asked.filter((sql) => /SELECT [^]*\bpoints\b[^]* FROM `?measurement_versions/.test(sql));
    expect(versions).toHaveLength(1);
    expect(asked.join('\n')).not.toMatch(/\bcovariance\b/);
  });

  it('that is foreign and one that is missing answer alike', async () => {
    const { id } = await opened();
    const { token } = await createMember(await createGroup(), 'lead');
    for (const verb of [
      (which: string) => call(GET, { params: { id: which }, token }),
      (which: string) => edit(which, { revision: 1, title: 'Mine' }, token),
    ]) {
      const foreign = await errorOf(await verb(id));
      expect(foreign).toEqual(await errorOf(await verb(randomUUID())));
      expect(foreign.status).toBe(404);
    }
  });

  it('is hidden from a reader, shown to a referee and edited by neither', async () => {
    const { id } = await opened();
    const reader = await createMember(group, 'reader');
    const referee = await createMember(group, 'referee');
    expect((await call(GET, { params: { id }, token: reader.token })).status).toBe(404);
    expect((await edit(id, { revision: 1, title: 'x' }, reader.token)).status).toBe(404);
    expect((await read(id, referee.token)).may).not.toContain('notebook.edit');
    expect((await edit(id, { revision: 1, title: 'x' }, referee.token)).status).toBe(403);
    expect((await open({}, referee.token)).status).toBe(403);
  });

  it('stays on the version of the measurement that it was opened on', async () => {
    const { id } = await opened();
    const body = formOf({ file: filePart('one-field.csv') });
    const answer = await call(uploadNewer, { params: { id: measurement }, token: analyst.token, body });
    expect(answer.status).toBe(201);
    expect(await read(id)).toMatchObject({ measurement: { version: 1 }, bins: { all: 40 } });
    const next = await opened({ likelihood: { kind: 'normal' } });
    expect(await read(next.id)).toMatchObject({ measurement: { version: 2 }, bins: { all: 36 } });
  });
});
