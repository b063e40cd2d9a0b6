import { createHash, randomUUID } from 'node:crypto';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { AuditEvent, Measurement, MeasurementVersion } from '@/models';
import { GET as read } from '@/app/api/v1/measurements/[id]/route';
import { POST as uploadNewer } from '@/app/api/v1/measurements/[id]/versions/route';
import { database } from '@/lib/db';
import { measurementCreatedSchema, measurementSchema } from '@/lib/schemas';
import { readPoints } from '@/lib/services/inference-spec';
import { measurementSummaries } from '@/lib/services/measurements';
import { storage } from '@/storage';
import { call, closeConnections, createGroup, createMember, errorOf } from './harness';
import {
  dataFile,
  dataLines as lines,
  filePart,
  formOf,
  kept,
  uploadData,
  uploadTo,
  type FormPart,
} from './uploads';

beforeAll(() => void database());
afterAll(closeConnections);

let group: string;
let analyst: Awaited<ReturnType<typeof createMember>>;
beforeEach(async () => {
  group = await createGroup();
  analyst = await createMember(group, 'analyst');
});

const upload = (parts: Record<string, FormPart>, token = analyst.token, id = group) =>
  uploadTo(id, token, parts);
const get = async (id: string, token = analyst.token) =>
  measurementSchema.parse(await (await call(read, { params: { id }, token })).json());
const sha256 = (bytes: Uint8Array) => createHash('sha256').update(bytes).digest('hex');

describe('an upload', () => {
  it('keeps points, mocks and every check of two-field.csv, and gives them back', async () => {
    const created = await uploadData(group, analyst.token, 'two-field.csv');
    expect(created).toMatchObject({
      version: 1,
      blind: false,
      rows: 40,
      kappaMin: 0.003,
      kappaMax: 0.3,
      hasBinEdges: true,
      sha256: sha256(dataFile('two-field.csv')),
    });
    expect(created.checks.map(({ code }) => code)).toContain('mocks-ok');
    expect(created.checks.filter(({ level }) => level === 'error')).toEqual([]);

    const measurement = await get(created.id);
    expect(measurement).toMatchObject({
      name: 'two-field',
      groupId: group,
      covarianceSource: 'mocks',
      mockCount: lines('two-field-mocks.csv').length,
      uploadedBy: analyst.user.email,
      simulated: false,
    });
    expect(measurement.points.S[0]).toBe(0.02806176292);
    expect(measurement.points.kappa[0]).toBe(0.003177761176);
    expect(measurement.points.kappaLo?.[0]).toBe(0.003);
    expect(measurement.covariance).toHaveLength(40);
    expect(measurement.points.sigma[3]).toBe(Math.sqrt(measurement.covariance![3][3]));
    expect(measurement.may).toEqual([
      'measurement.read',
      'measurement.upload',
      'measurement.edit',
      'notebook.create',
      'notebook.edit',
    ]);
  });

  it('has the covariance of the mocks with divisor N − 1', async () => {
    const { id } = await uploadData(group, analyst.token);
    const { covariance } = await get(id);
    const rows = lines('two-field-mocks.csv').map((line) => line.split(',').map(Number));
    const mean = (j: number) => rows.reduce((sum, row) => sum + row[j], 0) / rows.length;
    const [a, b] = [mean(0), mean(5)];
    const expected = rows.reduce((sum, row) => sum + (row[0] - a) * (row[5] - b), 0) / (rows.length - 1);
    expect(covariance![0][5]).toBeCloseTo(expected, 14);
  });

  it('stores the very bytes that came, under keys of ids alone', async () => {
    const before = await kept();
    const { id } = await uploadData(group, analyst.token);
    const after = await kept();
    expect(after.versions).toBe(before.versions + 1);
    expect(after.objects.length).toBeGreaterThanOrEqual(before.objects.length + 2);
    const version = await MeasurementVersion.findOne({ where: { measurementId: id } });
    expect(version!.files.map(({ part, fileName }) => [part, fileName])).toEqual([
      ['file', 'two-field.csv'],
      ['mocks', 'two-field-mocks.csv'],
    ]);
    for (const file of version!.files) {
      expect(file.key).toBe(`measurements/${id}/${version!.id}/${file.part}`);
      const bytes = await storage().get(file.key);
      expect(sha256(bytes!)).toBe(file.sha256);
      expect(bytes!.equals(dataFile(file.fileName))).toBe(true);
    }
  });

  it('reads null.dat, whose column names with units stand in a comment line', async () => {
    const created = await uploadData(group, analyst.token, 'null.dat');
    expect(created.hasBinEdges).toBe(false);
    const { points } = await get(created.id);
    expect(points.kappaLo).toBeNull();
    expect(points.kappa[0]).toBeCloseTo(1.1527627177e-3 / 0.18, 15);
    expect(points.S[0]).toBe(6.7909255367e-3);
    const version = await MeasurementVersion.findOne({ where: { measurementId: created.id } });
    expect(readPoints(version!).kappaLo).toBeNull();
  });

  it('takes a covariance in place of mocks, with or without the number of mocks behind it', async () => {
    const parts = { file: filePart('files/clean.csv'), covariance: filePart('files/cov_ok.txt') };
    const plain = measurementCreatedSchema.parse(await (await upload(parts)).json());
    expect(await get(plain.id)).toMatchObject({ covarianceSource: 'file', mockCount: null });
    const counted = await upload({ ...parts, meta: JSON.stringify({ mockCount: 500 }) });
    const { id } = measurementCreatedSchema.parse(await counted.json());
    expect(await get(id)).toMatchObject({ covarianceSource: 'file', mockCount: 500 });
  });

  it('does without a covariance where there are standard errors, and warns', async () => {
    const answer = await upload({ file: filePart('two-field.csv'), mocks: { name: '', bytes: '' } });
    const created = measurementCreatedSchema.parse(await answer.json());
    expect(created.checks).toContainEqual(expect.objectContaining({ code: 'errors-only', level: 'warning' }));
    const { covariance, covarianceSource } = await get(created.id);
    expect(covarianceSource).toBe('errors');
    expect(covariance![0][0]).toBeCloseTo(0.00163133 ** 2, 18);
    expect(covariance![0][1]).toBe(0);
  });

  it('follows meta: name, description, columns by name or number, simulated', async () => {
    const meta = {
      name: 'Squeezed bins',
      description: 'From the tests.',
      simulated: true,
      columns: { kappaLo: 0, kappaHi: 'kappa_hi', S: 3, sigma: 'sigma_S' },
    };
    const answer = await upload({ file: filePart('two-field.csv'), meta: JSON.stringify(meta) });
    const { id } = measurementCreatedSchema.parse(await answer.json());
    const measurement = await get(id);
    expect(measurement).toMatchObject({
      name: 'Squeezed bins',
      description: 'From the tests.',
      simulated: true,
    });
    expect(measurement.points.kappa[0]).toBeCloseTo(Math.sqrt(0.003 * 0.003366055363), 15);
  });

  it('keeps what simulated data were made with, and refuses it of measured ones', async () => {
    const truth = { mu1: 1.3, g: -12 };
    const send = (meta: object) => upload({ file: filePart('two-field.csv'), meta: JSON.stringify(meta) });
    const { id } = measurementCreatedSchema.parse(await (await send({ simulated: true, truth })).json());
    expect((await get(id)).truth).toEqual(truth);
    for (const [meta, path] of [
      [{ truth }, 'meta.truth'],
      [{ simulated: true, truth: { 'mu 1': 1 } }, 'meta.truth.mu 1'],
      [{ simulated: true, truth: { mu1: 'x' } }, 'meta.truth.mu1'],
    ] as const) {
      const error = await errorOf(await send(meta));
      expect(error).toMatchObject({ status: 422, details: [{ path }] });
    }
  });

  it('may have the bytes and the name of an earlier one', async () => {
    const first = await uploadData(group, analyst.token);
    const second = await uploadData(group, analyst.token);
    expect(second.id).not.toBe(first.id);
    expect(second.sha256).toBe(first.sha256);
    const summaries = await measurementSummaries(group);
    expect(summaries.map(({ name }) => name)).toEqual(['two-field', 'two-field']);
  });

  it('shows a name without folders and control characters', async () => {
    const bytes = dataFile('two-field.csv');
    const answer = await upload({ file: { name: '../../etc/we\u202eird.csv', bytes } });
    const { id } = measurementCreatedSchema.parse(await answer.json());
    const { files, name } = await get(id);
    expect(files[0].fileName).toBe('weird.csv');
    expect(name).toBe('weird');
  });

  it('is written down in the log of the group, without any value', async () => {
    const { id, sha256: hash } = await uploadData(group, analyst.token);
    const events = await AuditEvent.findAll({ where: { groupId: group, action: 'measurement.upload' } });
    expect(events).toHaveLength(1);
    expect(events[0]).toMatchObject({
      actorId: analyst.user.userId,
      subjectId: id,
      details: { version: 1, rows: 40, sha256: hash },
    });
  });
});

const two = filePart('two-field.csv');

describe('a newer version', () => {
  const newer = (id: string, parts: Record<string, FormPart>, token = analyst.token) =>
    call(uploadNewer, { params: { id }, token, body: formOf(parts) });

  it('counts up, and is what the measurement shows', async () => {
    const { id } = await uploadData(group, analyst.token, 'two-field.csv');
    const answer = await newer(id, {
      file: filePart('one-field.csv'),
      mocks: filePart('one-field-mocks.csv'),
    });
    expect(measurementCreatedSchema.parse(await answer.json())).toMatchObject({ id, version: 2, rows: 36 });
    expect(await get(id)).toMatchObject({ name: 'two-field', version: 2, rows: 36 });
    expect(await measurementSummaries(group)).toMatchObject([{ id, version: 2, rows: 36 }]);
  });

  it('gets a number of its own also beside another one at the same moment', async () => {
    const { id } = await uploadData(group, analyst.token);
    const answers = await Promise.all([1, 2, 3].map(() => newer(id, { file: two })));
    const versions = await Promise.all(
      answers.map(async (answer) => measurementCreatedSchema.parse(await answer.json()).version),
    );
    expect(versions.sort()).toEqual([2, 3, 4]);
  });

  it('can’t turn a measurement into a simulated one', async () => {
    const { id } = await uploadData(group, analyst.token);
    const before = await kept();
    const error = await errorOf(await newer(id, { file: two, meta: '{"simulated":true}' }));
    expect(error).toMatchObject({ status: 422, details: [{ path: 'meta.simulated' }] });
    expect(await kept()).toEqual(before);
  });
});

describe('a measurement', () => {
  it('that is foreign and one that is missing answer alike', async () => {
    const { id } = await uploadData(group, analyst.token);
    const outsider = await createMember(await createGroup(), 'lead');
    const foreign = await errorOf(await call(read, { params: { id }, token: outsider.token }));
    const missing = await errorOf(await call(read, { params: { id: randomUUID() }, token: outsider.token }));
    expect(foreign).toEqual(missing);
    expect(foreign.status).toBe(404);
    const unknownGroup = await errorOf(await upload({ file: two }, outsider.token));
    expect(unknownGroup).toEqual(await errorOf(await upload({ file: two }, outsider.token, randomUUID())));
  });

  it('is not shown to a reader, and not taken from a referee', async () => {
    const { id } = await uploadData(group, analyst.token);
    const reader = await createMember(group, 'reader');
    expect((await call(read, { params: { id }, token: reader.token })).status).toBe(404);
    const referee = await createMember(group, 'referee');
    expect((await get(id, referee.token)).may).toEqual(['measurement.read']);
    const before = await kept();
    expect(await errorOf(await upload({ file: two }, referee.token))).toMatchObject({ status: 403 });
    expect(await kept()).toEqual(before);
  });

  it('shows no value of S while it is blind', async () => {
    const { id } = await uploadData(group, analyst.token);
    await Measurement.update({ blind: true }, { where: { id } });
    const { points } = await get(id);
    expect(new Set(points.S)).toEqual(new Set([null]));
    expect(points.kappa).toHaveLength(40);
  });
});
