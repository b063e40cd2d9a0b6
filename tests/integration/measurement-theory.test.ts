import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { POST as createNotebook } from '@/app/api/v1/groups/[id]/notebooks/route';
import { GET as readMeasurement } from '@/app/api/v1/measurements/[id]/route';
import { GET as readManifest } from '@/app/api/v1/fits/[id]/manifest/route';
import { GET as readNotebook, PATCH as patch } from '@/app/api/v1/notebooks/[id]/route';
import {
  manifestSchema,
  measurementCreatedSchema,
  measurementSchema,
  notebookCreatedSchema,
  notebookSchema,
} from '@/lib/schemas';
import { fitModel, specOf } from '@/lib/services/fit-model';
import { Fit, MeasurementVersion } from '@/models';
import { storage } from '@/storage';
import { call, closeConnections, errorOf } from './harness';
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
import { dataLines, filePart, uploadTo, type FormPart } from './uploads';

beforeAll(async () => {
  await storage().ensureBucket();
  await buildWorker();
});
afterAll(async () => {
  await endWorkers();
  await closeConnections();
});

const rows = dataLines('one-field.csv')
  .filter((line) => /^[\d.]/.test(line))
  .map((line) => line.split(',').map(Number));
const p = rows.length;
const text = (name: string, lines: (string | number[])[]): FormPart => ({
  name,
  bytes: lines.map((line) => (typeof line === 'string' ? line : line.join(' '))).join('\n'),
});

/** Each bin sees a tenth of its neighbours; the theory has a bin more at either end. */
const window = text('window.txt', [
  [rows[0][0] / 1.1, ...rows.map(([lo]) => lo), rows[p - 1][1]],
  [rows[0][0], ...rows.map(([, hi]) => hi), rows[p - 1][1] * 1.1],
  ...rows.map((_, i) =>
    Array.from({ length: p + 2 }, (_unused, j) => (j === i + 1 ? 0.8 : Math.abs(j - i - 1) === 1 ? 0.1 : 0)),
  ),
]);
const columns = text('columns.csv', ['gravity', ...rows.map(([, , kappa]) => String(Math.sin(9 * kappa)))]);

async function open(desk: Desk, parts: Record<string, FormPart>, settings: Record<string, unknown>) {
  const uploaded = await uploadTo(desk.group, desk.token, {
    file: filePart('one-field.csv'),
    mocks: filePart('one-field-mocks.csv'),
    ...parts,
  });
  expect(uploaded.status).toBe(201);
  const made = measurementCreatedSchema.parse(await uploaded.json());
  const json = { title: 'Columns', measurement: made.id, ...settings };
  const answer = await call(createNotebook, { params: { id: desk.group }, token: desk.token, json });
  return { made, answer };
}

describe('a measurement with a window and columns', () => {
  it('is kept with them, and its fit samples a coefficient for each column', async () => {
    const desk = await openDesk();
    const { made, answer } = await open(desk, { window, columns }, { template: background });
    expect(made.checks.map(({ code }) => code)).toEqual(
      expect.arrayContaining(['window-ok', 'window-condition-ok', 'columns-ok']),
    );
    const read = await call(readMeasurement, { params: { id: made.id }, token: desk.token });
    const measured = measurementSchema.parse(await read.json());
    expect(measured.files.map(({ part }) => part)).toEqual(['file', 'mocks', 'window', 'columns']);
    expect(measured.theory?.window?.matrix?.length).toBe(p);
    expect(measured.theory?.window?.kappaLo?.length).toBe(p + 2);
    expect(measured.theory?.columns.map(({ name }) => name)).toEqual(['gravity']);

    expect(answer.status).toBe(201);
    const { id } = notebookCreatedSchema.parse(await answer.json());
    const notebook = notebookSchema.parse(
      await (await call(readNotebook, { params: { id }, token: desk.token })).json(),
    );
    expect(notebook.priors.gravity).toEqual({ kind: 'normal', mean: 0, sd: 1 });

    startWorker();
    const fitId = await startFit(desk, id, { seed: '1', replicas: 4, maxDraws: 400 });
    const fit = await fitEnded(desk, fitId);
    expect(fit.diagnostics.map(({ parameter }) => parameter)).toEqual(['c1', 'c2', 'gravity']);
    const [head] = (await samplesOf(desk, fitId)).split('\n');
    expect(head).toBe('replica,draw,warmup,log_likelihood,log_prior,c1,c2,gravity');

    // The snapshot's model is the one whose prediction the window makes.
    const row = await Fit.findByPk(fitId, { rejectOnEmpty: true });
    const version = await MeasurementVersion.findByPk(row.measurementVersionId, { rejectOnEmpty: true });
    const { template } = specOf(fitModel(version, row.snapshot as never));
    const linear = template.fixedColumns[0].values;
    const mean = ([lo, hi]: number[]): number => (hi - lo) / Math.log(hi / lo);
    const due = 0.1 * mean(rows[4]) + 0.8 * mean(rows[5]) + 0.1 * mean(rows[6]);
    expect(Math.abs(linear[5] / due - 1)).toBeLessThan(1e-12);

    const manifest = manifestSchema.parse(
      await (await call(readManifest, { params: { id: fitId }, token: desk.token })).json(),
    );
    expect(manifest.inputs.map(({ part }) => part)).toEqual(['file', 'mocks', 'window', 'columns']);
    expect(manifest.howToRunAgain[1]).toContain('window = window.txt, columns = columns.csv');
  });

  it('can be fitted with a column switched off, and on fewer bins', async () => {
    const desk = await openDesk();
    const { answer } = await open(desk, { window, columns }, { template: background });
    const { id } = notebookCreatedSchema.parse(await answer.json());
    const changed = await call(patch, {
      params: { id },
      token: desk.token,
      json: { revision: 1, priors: { gravity: { kind: 'fixed', value: 0 } }, cuts: { kappaMax: 0.1 } },
    });
    const notebook = notebookSchema.parse(await changed.json());
    expect(notebook.priors.gravity).toEqual({ kind: 'fixed', value: 0 });
    const row = await Fit.findByPk(await startFit(desk, id, { maxDraws: 100 }), { rejectOnEmpty: true });
    const version = await MeasurementVersion.findByPk(row.measurementVersionId, { rejectOnEmpty: true });
    const spec = specOf(fitModel(version, row.snapshot as never));
    expect(spec.template.length).toBe(notebook.bins.kept);
    expect(spec.template.fixedColumns.map(({ name }) => name)).toEqual(['c1', 'c2', 'gravity']);
    expect(notebook.bins.kept).toBeLessThan(p);
  });
});

describe('a theory covariance', () => {
  const theoryCovariance = text(
    'theory-covariance.txt',
    rows.map((_, i) => rows.map((_unused, j) => (i === j ? 1e-4 : 0))),
  );

  it('makes Hartlap’s likelihood the default, and the t forms are refused with the reason', async () => {
    const desk = await openDesk();
    const { answer } = await open(desk, { theoryCovariance }, { template: background });
    const { id } = notebookCreatedSchema.parse(await answer.json());
    const notebook = notebookSchema.parse(
      await (await call(readNotebook, { params: { id }, token: desk.token })).json(),
    );
    expect(notebook.likelihood).toEqual({ kind: 'hartlap' });
    const json = { revision: 1, likelihood: { kind: 'matched-t' } };
    const error = await errorOf(await call(patch, { params: { id }, token: desk.token, json }));
    expect(error).toMatchObject({ status: 422, code: 'invalid' });
    expect(error.message).toMatch(/no closed form/);
  });
});
