import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { GET as readManifest } from '@/app/api/v1/fits/[id]/manifest/route';
import { POST as createNotebook } from '@/app/api/v1/groups/[id]/notebooks/route';
import { DELETE as deleteMeasurement, GET as readMeasurement } from '@/app/api/v1/measurements/[id]/route';
import { POST as addVersion } from '@/app/api/v1/measurements/[id]/versions/route';
import { POST as copy } from '@/app/api/v1/notebooks/[id]/copy/route';
import { GET as readComparison } from '@/app/api/v1/notebooks/[id]/comparison/route';
import { GET as readNotebook, PATCH as patch } from '@/app/api/v1/notebooks/[id]/route';
import { POST as restore } from '@/app/api/v1/notebooks/[id]/revisions/[revision]/restore/route';
import { GET as readRevision } from '@/app/api/v1/notebooks/[id]/revisions/[revision]/route';
import { POST as scan } from '@/app/api/v1/notebooks/[id]/scan/route';
import { POST as takeUp } from '@/app/api/v1/notebooks/[id]/take-up/route';
import { buildInference, type InferenceSpec } from '@/lib/inference';
import {
  comparisonSchema,
  manifestSchema,
  measurementCreatedSchema,
  measurementSchema,
  notebookCreatedSchema,
  notebookSchema,
  revisionSchema,
  scanSchema,
  takenUpSchema,
  type Notebook,
} from '@/lib/schemas';
import { inferenceSpec } from '@/lib/services/inference-spec';
import { measuredTogether } from '@/lib/services/measured-together';
import { Measurement, MeasurementVersion, Notebook as NotebookRow, NotebookRevision } from '@/models';
import { storage } from '@/storage';
import { call, closeConnections, createMember, errorOf } from './harness';
import {
  background,
  buildWorker,
  endWorkers,
  fitEnded,
  openDesk,
  samplesOf,
  startFit,
  startWorker,
  type Desk,
} from './sampling';
import { dataLines, formOf, uploadTo, type FormPart } from './uploads';

beforeAll(async () => {
  await storage().ensureBucket();
  await buildWorker();
});
afterAll(async () => {
  await endWorkers();
  await closeConnections();
});

const [head, ...rows] = dataLines('one-field.csv').filter((line) => !line.startsWith('#'));
const mocks = dataLines('one-field-mocks.csv').map((line) => line.split(','));

/** Some bins of one-field.csv with their columns of its mocks, in this order of the file's rows. */
const binsOf = (which: readonly number[], count = mocks.length): Record<string, FormPart> => ({
  file: { name: 'bins.csv', bytes: [head, ...which.map((i) => rows[i])].join('\n') },
  mocks: {
    name: 'bins-mocks.csv',
    bytes: mocks
      .slice(0, count)
      .map((row) => which.map((i) => row[i]).join(','))
      .join('\n'),
  },
});
const all = Array.from(rows.keys());
const low = all.slice(0, 14);
/** From the largest κ down, so that file and mocks have to be put in order. */
const high = all.slice(14).reverse();

async function upload(
  { group, token }: Desk,
  name: string,
  parts: Record<string, FormPart>,
): Promise<string> {
  const answer = await uploadTo(group, token, { ...parts, meta: JSON.stringify({ name }) });
  if (answer.status !== 201) throw new Error(await answer.text());
  return measurementCreatedSchema.parse(await answer.json()).id;
}

const create = ({ group, token }: Desk, json: Record<string, unknown>) =>
  call(createNotebook, {
    params: { id: group },
    token,
    json: { title: 'Joint', template: background, ...json },
  });

async function opened(desk: Desk, json: Record<string, unknown>): Promise<Notebook> {
  const answer = await create(desk, json);
  if (answer.status !== 201) throw new Error(await answer.text());
  return notebookOf(desk, notebookCreatedSchema.parse(await answer.json()).id);
}

const notebookOf = async ({ token }: Desk, id: string): Promise<Notebook> =>
  notebookSchema.parse(await (await call(readNotebook, { params: { id }, token })).json());

const change = ({ token }: Desk, id: string, json: Record<string, unknown>) =>
  call(patch, { method: 'PATCH', params: { id }, token, json });

async function changed(
  desk: Desk,
  { id, revision }: Notebook,
  json: Record<string, unknown>,
): Promise<Notebook> {
  const answer = await change(desk, id, { revision, ...json });
  if (answer.status !== 200) throw new Error(await answer.text());
  return notebookSchema.parse(await answer.json());
}

async function halves(desk: Desk) {
  return { low: await upload(desk, 'Low', binsOf(low)), high: await upload(desk, 'High', binsOf(high)) };
}

/** What a stored notebook infers, with its mocks read from the object store. */
async function specOfNotebook(id: string): Promise<InferenceSpec> {
  const notebook = await NotebookRow.findByPk(id, { rejectOnEmpty: true });
  const { settings } = await NotebookRevision.findOne({
    where: { notebookId: id, revision: notebook.revision },
    rejectOnEmpty: true,
  });
  const version = await MeasurementVersion.findByPk(notebook.measurementVersionId, { rejectOnEmpty: true });
  const { numbers } = await measuredTogether(version, settings);
  return inferenceSpec(numbers, settings).spec;
}

/** ln likelihood where every measurement's own background has the values of `at`. */
function logLikelihood(spec: InferenceSpec, at: Readonly<Record<string, number>>): number {
  const { target, sampled } = buildInference(spec);
  return target.logLikelihood(Float64Array.from(sampled, ({ name }) => at[name.replace(/_\d$/, '')]));
}

const points = [
  { mu1: 3.2, a1: 0.4, b1: -0.2, c1: -0.6, c2: 0.3 },
  { mu1: 7.9, a1: -1.1, b1: 0.7, c1: 0.2, c2: -0.9 },
];
const oneField = { id: 'free-phase', options: { fields: 1, background: [1, 2] } };
const kind = 'sellentin-heavens';

describe('several measurements in one notebook', () => {
  it('are taken with cuts and backgrounds of their own, and changed as any setting', async () => {
    const desk = await openDesk();
    const { low: first, high: second } = await halves(desk);
    const single = await opened(desk, { measurement: first });
    expect([single.also, single.sharedMocks, single.likelihood.kind]).toEqual([[], false, 'matched-t']);
    const chosen = { kind: 'normal', mean: 0.25, sd: 0.5 };
    const own = await changed(desk, single, { priors: { c1: chosen } });

    const joint = await changed(desk, own, {
      alsoMeasurements: [{ measurement: second, cuts: { kappaMax: 0.1 } }],
    });
    expect(joint.also).toMatchObject([
      { id: second, name: 'High', version: 1, newest: 1, cuts: { kappaMax: 0.1 } },
    ]);
    expect(joint.also[0].bins.kept).toBeLessThan(joint.also[0].bins.all);
    expect(Object.keys(joint.priors)).toEqual(['c1_1', 'c2_1', 'c1_2', 'c2_2']);
    expect(joint.priors.c1_1).toEqual(chosen);
    expect(joint.likelihood.kind).toBe(kind);
    expect(joint.record.at(-1)?.sections).toEqual(['measurement', 'priors']);

    const recut = await changed(desk, joint, { alsoMeasurements: [{ measurement: second, cuts: {} }] });
    expect(recut.also[0].bins.kept).toBe(recut.also[0].bins.all);
    expect(recut.record.at(-1)?.sections).toEqual(['measurement']);
    const stale = await change(desk, joint.id, { revision: joint.revision, alsoMeasurements: [] });
    expect(stale.status).toBe(409);

    const earlier = revisionSchema.parse(
      await (
        await call(readRevision, {
          params: { id: joint.id, revision: String(joint.revision) },
          token: desk.token,
        })
      ).json(),
    );
    expect(earlier.also).toEqual([{ name: 'High', version: 1, cuts: { kappaMax: 0.1 } }]);

    const alone = await changed(desk, recut, { alsoMeasurements: [] });
    expect(alone.also).toEqual([]);
    expect(alone.priors.c1).toEqual(chosen);
    const back = await call(restore, {
      params: { id: joint.id, revision: String(joint.revision) },
      token: desk.token,
      json: { revision: alone.revision },
    });
    const restored = notebookSchema.parse(await back.json());
    expect(restored.also).toMatchObject([{ id: second, cuts: { kappaMax: 0.1 } }]);
    expect(restored.priors).toEqual(joint.priors);
  });

  it('are refused twice, from another group, beyond four, and with mocks that aren’t there to share', async () => {
    const desk = await openDesk();
    const { low: first, high: second } = await halves(desk);
    const refusal = async (json: Record<string, unknown>, status = 422) => {
      const answer = await create(desk, { measurement: first, ...json });
      expect(answer.status).toBe(status);
      return errorOf(answer);
    };
    const twice = await refusal({ alsoMeasurements: [{ measurement: first }] });
    expect(twice.details[0].path).toBe('alsoMeasurements.0.measurement');
    expect(twice.message).toContain('twice');
    await refusal({ alsoMeasurements: [{ measurement: second }, { measurement: second }] });
    const other = await upload(await openDesk(), 'Foreign', binsOf(high));
    await refusal({ alsoMeasurements: [{ measurement: other }] }, 404);
    await refusal({ alsoMeasurements: Array.from({ length: 4 }, () => ({ measurement: second })) });
    expect((await refusal({ sharedMocks: true })).details[0].path).toBe('sharedMocks');
    const fewer = await upload(desk, 'Fewer', binsOf(high, 200));
    const counts = await refusal({ alsoMeasurements: [{ measurement: fewer }], sharedMocks: true });
    expect(counts.message).toContain('Low 400, Fewer 200');
    const { mocks: none, ...file } = binsOf(high);
    expect(none).toBeDefined();
    const bare = await upload(desk, 'Bare', file);
    const without = await refusal({ alsoMeasurements: [{ measurement: bare }], sharedMocks: true });
    expect(without.message).toContain('Bare came without its mocks');
    const cuts = await refusal({ alsoMeasurements: [{ measurement: second, cuts: { kappaMin: 5 } }] });
    expect(cuts.details[0].path).toContain('alsoMeasurements.0.cuts');
  });

  it('make the notebook blind where one of them is', async () => {
    const desk = await openDesk();
    const { low: first, high: second } = await halves(desk);
    await Measurement.update({ blind: true }, { where: { id: second } });
    const notebook = await opened(desk, { measurement: first, alsoMeasurements: [{ measurement: second }] });
    expect(notebook.blind).toBe(true);
    await expect(startFit(desk, notebook.id, {})).rejects.toThrow('plan_missing');
    expect((await call(scan, { params: { id: notebook.id }, token: desk.token, json: {} })).status).toBe(409);
  });

  it('with shared mocks have the likelihood of one measurement of all bins, and without them the product', async () => {
    const desk = await openDesk();
    const { low: first, high: second } = await halves(desk);
    const whole = await upload(desk, 'Whole', binsOf(all));
    const settings = { template: oneField, likelihood: { kind } };
    const both = { measurement: first, alsoMeasurements: [{ measurement: second }] };
    const open = async (json: Record<string, unknown>) =>
      specOfNotebook((await opened(desk, { ...settings, ...json })).id);
    const one = await open({ measurement: whole });
    const shared = await open({ ...both, sharedMocks: true });
    const apart = await open(both);
    const singles = [await open({ measurement: first }), await open({ measurement: second })];
    for (const at of points) {
      expect(logLikelihood(shared, at)).toBeCloseTo(logLikelihood(one, at), 8);
      const product = singles.reduce((sum, spec) => sum + logLikelihood(spec, at), 0);
      expect(logLikelihood(apart, at)).toBeCloseTo(product, 8);
      expect(Math.abs(logLikelihood(shared, at) - product)).toBeGreaterThan(1e-3);
    }
    // A cut of either leaves the rows of the joint covariance that the same cut of all leaves.
    const cuts = { kappaMin: 0.006, kappaMax: 0.15 };
    const cutWhole = await open({ measurement: whole, cuts });
    const cutBoth = await open({
      measurement: first,
      cuts: { kappaMin: 0.006 },
      alsoMeasurements: [{ measurement: second, cuts: { kappaMax: 0.15 } }],
      sharedMocks: true,
    });
    expect(cutBoth.data.S.length).toBe(cutWhole.data.S.length);
    expect(logLikelihood(cutBoth, points[0])).toBeCloseTo(logLikelihood(cutWhole, points[0]), 8);
  });

  it(
    'are fitted to the end, with a manifest of all files, and kept from deletion',
    { timeout: 120_000 },
    async () => {
      const desk = await openDesk();
      const { low: first, high: second } = await halves(desk);
      const notebook = await opened(desk, {
        measurement: first,
        alsoMeasurements: [{ measurement: second, cuts: { kappaMax: 0.15 } }],
        sharedMocks: true,
        likelihood: { kind },
      });
      startWorker();
      const run = { seed: '7', replicas: 2, maxDraws: 300, target: { ess: 1e9 } };
      const fitId = await startFit(desk, notebook.id, run);
      const fit = await fitEnded(desk, fitId);
      expect(fit.status).toBe('budget-spent');
      expect(fit.diagnostics.map(({ parameter }) => parameter)).toEqual(['c1_1', 'c2_1', 'c1_2', 'c2_2']);
      expect(fit.snapshot.sharedMocks).toBe(true);
      expect(fit.snapshot.also).toMatchObject([{ measurementVersion: 1, cuts: { kappaMax: 0.15 } }]);
      const csv = await samplesOf(desk, fitId);
      const [header, ...lines] = csv.trim().split('\n');
      const names = header.split(',');
      // What the worker's thread sampled is the joint density: with the mocks that it had read.
      const { target, sampled } = buildInference(await specOfNotebook(notebook.id));
      const values = lines.at(-1)!.split(',').map(Number);
      const x = Float64Array.from(sampled, ({ name }) => values[names.indexOf(name)]);
      expect(target.logLikelihood(x)).toBeCloseTo(values[names.indexOf('log_likelihood')], 9);

      const manifest = manifestSchema.parse(
        await (await call(readManifest, { params: { id: fitId }, token: desk.token })).json(),
      );
      expect(manifest.inputs.map(({ measurement, part }) => [measurement, part])).toEqual([
        [1, 'file'],
        [1, 'mocks'],
        [2, 'file'],
        [2, 'mocks'],
      ]);
      expect(manifest.howToRunAgain.join(' ')).toContain('MEASUREMENT 2');
      // The same seed gives the same bytes again.
      const again = await startFit(desk, notebook.id, run);
      await fitEnded(desk, again);
      expect(await samplesOf(desk, again)).toBe(csv);

      const comparison = await call(readComparison, { params: { id: notebook.id }, token: desk.token });
      expect(comparisonSchema.parse(await comparison.json()).sets).toHaveLength(1);

      const measured = await call(readMeasurement, { params: { id: second }, token: desk.token });
      expect(measurementSchema.parse(await measured.json()).resting).toMatchObject([
        { number: 1, version: 1 },
      ]);
      const { token } = await createMember(desk.group, 'lead');
      const refused = await call(deleteMeasurement, { method: 'DELETE', params: { id: second }, token });
      expect(refused.status).toBe(409);
      // Taken out of the notebook it is still what two fits were made from.
      await changed(desk, notebook, { alsoMeasurements: [] });
      const fits = await call(deleteMeasurement, { method: 'DELETE', params: { id: second }, token });
      expect((await errorOf(fits)).details[0].message).toContain('2 fits');
    },
  );

  it('are copied, scanned, and moved to a newer version of any of them', { timeout: 120_000 }, async () => {
    const desk = await openDesk();
    const { low: first, high: second } = await halves(desk);
    const notebook = await opened(desk, {
      measurement: first,
      alsoMeasurements: [{ measurement: second, cuts: { kappaMax: 0.15 } }],
      template: oneField,
    });
    const copied = await call(copy, { params: { id: notebook.id }, token: desk.token, json: {} });
    const twin = await notebookOf(desk, notebookCreatedSchema.parse(await copied.json()).id);
    expect([twin.also, twin.priors, twin.likelihood]).toEqual([
      notebook.also,
      notebook.priors,
      notebook.likelihood,
    ]);
    const turned = await call(copy, {
      params: { id: notebook.id },
      token: desk.token,
      json: { measurement: second },
    });
    const onSecond = await notebookOf(desk, notebookCreatedSchema.parse(await turned.json()).id);
    expect([onSecond.measurement.id, onSecond.also]).toEqual([second, []]);

    startWorker();
    const answer = await call(scan, {
      params: { id: notebook.id },
      token: desk.token,
      json: { muMin: 1, muMax: 12, nulls: 100 },
    });
    const result = scanSchema.parse(await answer.json());
    expect(result.best?.deltaChi2).toBeGreaterThan(0);
    // Nulls aren’t drawn where each measurement has mocks of its own.
    expect([result.globalP, result.nulls]).toEqual([null, 0]);

    const newer = await call(addVersion, {
      params: { id: second },
      token: desk.token,
      body: formOf(binsOf(high.slice(1))),
    });
    expect(newer.status).toBe(201);
    expect((await notebookOf(desk, notebook.id)).also[0]).toMatchObject({ version: 1, newest: 2 });
    const moved = await call(takeUp, {
      params: { id: notebook.id },
      token: desk.token,
      json: { measurement: second, version: 2 },
    });
    expect(takenUpSchema.parse(await moved.json()).version).toBe(2);
    const after = await notebookOf(desk, notebook.id);
    expect(after.also[0]).toMatchObject({ version: 2, cuts: { kappaMax: 0.15 } });
    expect(after.measurement.version).toBe(1);
    expect(after.priors).toEqual(notebook.priors);
  });
});
