import { afterAll, beforeAll, beforeEach, describe, expect, it, vi } from 'vitest';
import { DELETE as remove, GET as read, PATCH as patch } from '@/app/api/v1/measurements/[id]/route';
import { GET as readMatrix } from '@/app/api/v1/measurements/[id]/correlation/route';
import { DELETE as removeVersion } from '@/app/api/v1/measurements/[id]/versions/[version]/route';
import { POST as addVersion } from '@/app/api/v1/measurements/[id]/versions/route';
import { GET as list } from '@/app/api/v1/groups/[id]/measurements/route';
import { POST as createNotebook } from '@/app/api/v1/groups/[id]/notebooks/route';
import { database } from '@/lib/db';
import { correlationSchema, measurementListedSchema, measurementSchema } from '@/lib/schemas';
import { deleteStrayFiles } from '@/lib/services/stray-files';
import { AuditEvent, Measurement, MeasurementVersion } from '@/models';
import { storage } from '@/storage';
import { call, closeConnections, createGroup, createMember, errorOf } from './harness';
import { dataLines, filePart, formOf, uploadData, uploadTo, type FormPart } from './uploads';

beforeAll(() => {
  database();
  return storage().ensureBucket();
});
afterAll(closeConnections);

let group: string;
let lead: string;
let analyst: string;
beforeEach(async () => {
  group = await createGroup();
  lead = (await createMember(group, 'lead')).token;
  analyst = (await createMember(group, 'analyst')).token;
});

const reading = async (id: string, version?: number) => {
  const path = `/measurements/${id}${version === undefined ? '' : `?version=${version}`}`;
  const answer = await call(read, { params: { id }, token: analyst, path });
  return measurementSchema.parse(await answer.json());
};

const newer = (id: string, parts: Record<string, FormPart>) =>
  call(addVersion, { params: { id }, token: analyst, body: formOf(parts) });

const firstRows = (count: number) => ({
  name: 'fewer.csv',
  bytes: dataLines('two-field.csv')
    .slice(0, 2 + count)
    .join('\n'),
});

const filesOf = async (id: string) =>
  (await MeasurementVersion.findAll({ where: { measurementId: id } })).flatMap(({ files }) => files);
const present = async (keys: readonly string[]) =>
  Promise.all(keys.map(async (key) => (await storage().get(key)) !== null));
const eventsOf = async (id: string) =>
  (await AuditEvent.findAll({ where: { subjectId: id }, order: [['createdAt', 'ASC']] })).map(
    ({ action }) => action,
  );

async function openOn(measurement: string): Promise<string> {
  const json = { title: 'Resting', measurement, template: { id: 'background', options: {} } };
  const answer = await call(createNotebook, { params: { id: group }, token: analyst, json });
  return ((await answer.json()) as { id: string }).id;
}

describe('versions of a measurement', () => {
  it('are listed with what was made on them, and each is read with its own points', async () => {
    const { id } = await uploadData(group, analyst);
    await openOn(id);
    expect((await newer(id, { file: firstRows(12) })).status).toBe(201);
    const newest = await reading(id);
    const first = await reading(id, 1);
    expect([newest.version, newest.newest, newest.rows]).toEqual([2, 2, 12]);
    expect([first.version, first.newest, first.rows, first.points.S.length]).toEqual([1, 2, 40, 40]);
    expect(newest.versions.map(({ version, rows, fits }) => [version, rows, fits])).toEqual([
      [2, 12, 0],
      [1, 40, 0],
    ]);
    expect(newest.resting).toMatchObject([{ number: 1, title: 'Resting', version: 1 }]);
    expect(newest.points.S).toEqual(first.points.S.slice(0, 12));
  });

  it('answer 404 where there is no such version and 422 where the number is none', async () => {
    const { id } = await uploadData(group, analyst);
    const ask = (path: string) => call(read, { params: { id }, token: analyst, path });
    expect((await errorOf(await ask(`/measurements/${id}?version=7`))).status).toBe(404);
    expect((await ask(`/measurements/${id}?version=x`)).status).toBeGreaterThanOrEqual(400);
    expect((await ask(`/measurements/${id}?version=x`)).status).toBeLessThan(500);
  });
});

describe('the correlation matrix', () => {
  it('is C_ij/√(C_ii C_jj) of the stored covariance, below the diagonal', async () => {
    const { id } = await uploadData(group, analyst);
    const answer = await call(readMatrix, { params: { id }, token: analyst });
    const { rows, values, correlated, mockCount } = correlationSchema.parse(await answer.json());
    const { covariance } = await reading(id);
    expect([rows, values.length, correlated, mockCount]).toEqual([40, (40 * 39) / 2, true, 600]);
    for (const [i, j] of [
      [1, 0],
      [17, 4],
      [39, 38],
    ]) {
      const expected = covariance![i][j] / Math.sqrt(covariance![i][i] * covariance![j][j]);
      expect(Math.abs(values[(i * (i - 1)) / 2 + j] - expected)).toBeLessThanOrEqual(0.5000001e-5);
    }
  });

  it('is nothing but zeros where only errors were given, and says so', async () => {
    const made = await uploadTo(group, analyst, { file: firstRows(12) });
    const { id } = (await made.json()) as { id: string };
    const answer = await call(readMatrix, { params: { id }, token: analyst });
    const matrix = correlationSchema.parse(await answer.json());
    expect(matrix.correlated).toBe(false);
    expect(new Set(matrix.values)).toEqual(new Set([0]));
  });
});

describe('the list of a group’s measurements', () => {
  it('has points, checks and how many notebooks rest on each, newest first', async () => {
    const a = await uploadData(group, analyst, 'one-field.csv');
    const b = await uploadData(group, analyst);
    await openOn(a.id);
    await newer(a.id, { file: firstRows(12) });
    await openOn(a.id);
    const answer = await call(list, { params: { id: group }, token: analyst });
    const found = measurementListedSchema.array().parse(await answer.json());
    expect(found.map(({ id, version, notebooks }) => [id, version, notebooks])).toEqual([
      [b.id, 1, 0],
      [a.id, 2, 2],
    ]);
    expect(found.map(({ points }) => points.sigma.length)).toEqual([40, 12]);
    expect(found[0]).toMatchObject({ covarianceSource: 'mocks', mockCount: 600 });
  });
});

describe('renaming', () => {
  it('changes name and description, and records it once', async () => {
    const { id } = await uploadData(group, analyst);
    const change = (json: object, token = analyst) =>
      call(patch, { method: 'PATCH', params: { id }, token, json });
    const answer = await change({ name: '  Shells, year 3 ', description: 'Eleven patches.' });
    expect(await answer.json()).toMatchObject({ name: 'Shells, year 3', description: 'Eleven patches.' });
    await change({ name: 'Shells, year 3' });
    expect((await reading(id)).description).toBe('Eleven patches.');
    expect(await eventsOf(id)).toEqual(['measurement.upload', 'measurement.edit']);
    expect((await errorOf(await change({}))).status).toBe(422);
    expect((await errorOf(await change({ name: ' ' }))).status).toBe(422);
    const { token: referee } = await createMember(group, 'referee');
    expect((await errorOf(await change({ name: 'x' }, referee))).status).toBe(403);
  });
});

describe('deleting', () => {
  const away = (id: string, token = lead) => call(remove, { method: 'DELETE', params: { id }, token });
  const awayVersion = (id: string, version: number) =>
    call(removeVersion, { method: 'DELETE', params: { id, version: String(version) }, token: lead });

  it('is for leads, takes rows and files along, and is recorded', async () => {
    const { id } = await uploadData(group, analyst);
    await newer(id, { file: firstRows(12) });
    const keys = (await filesOf(id)).map(({ key }) => key);
    expect((await errorOf(await away(id, analyst))).status).toBe(403);
    expect((await away(id)).status).toBe(200);
    expect([await Measurement.findByPk(id), await filesOf(id)]).toEqual([null, []]);
    expect(await present(keys)).toEqual(keys.map(() => false));
    expect((await eventsOf(id)).at(-1)).toBe('measurement.delete');
    expect((await errorOf(await away(id))).status).toBe(404);
  });

  it('is refused with the list of what rests on it, in whichever version', async () => {
    const { id } = await uploadData(group, analyst);
    await openOn(id);
    await newer(id, { file: firstRows(12) });
    const refused = await errorOf(await away(id));
    expect([refused.status, refused.code]).toEqual([409, 'conflict']);
    expect(refused.details.map(({ message }) => message)).toEqual([
      'Notebook 1, Resting, rests on version 1.',
    ]);
    expect(await present((await filesOf(id)).map(({ key }) => key))).toEqual([true, true, true]);
  });

  it('takes the newest version alone where nothing rests on it, and no other', async () => {
    const { id } = await uploadData(group, analyst);
    await openOn(id);
    await newer(id, { file: firstRows(12) });
    expect((await errorOf(await awayVersion(id, 1))).status).toBe(409);
    expect((await errorOf(await awayVersion(id, 3))).status).toBe(404);
    expect((await awayVersion(id, 2)).status).toBe(200);
    expect((await reading(id)).versions.map(({ version }) => version)).toEqual([1]);
    expect(await filesOf(id)).toHaveLength(2);
    const other = await uploadTo(group, analyst, { file: filePart('two-field.csv') });
    const { id: single } = (await other.json()) as { id: string };
    expect((await errorOf(await awayVersion(single, 1))).message).toContain('only one');
  });

  it('leaves no row and, after the sweep, no file where the process dies after the commit', async () => {
    const { id } = await uploadData(group, analyst);
    await uploadData(group, analyst);
    const keys = (await filesOf(id)).map(({ key }) => key);
    // A process that is killed once the rows are gone deletes nothing from the store.
    const killed = vi.spyOn(storage(), 'delete').mockImplementation(() => new Promise(() => undefined));
    const answer = away(id);
    await expect.poll(() => Measurement.findByPk(id)).toBeNull();
    killed.mockRestore();
    void answer;
    expect(await MeasurementVersion.count({ where: { measurementId: id } })).toBe(0);
    expect(await present(keys)).toEqual(keys.map(() => true));
    await deleteStrayFiles(new Date(Date.now() + 61 * 60_000));
    expect(await present(keys)).toEqual(keys.map(() => false));
  });
});
