import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { POST as addVersion } from '@/app/api/v1/measurements/[id]/versions/route';
import { GET as readComparison } from '@/app/api/v1/notebooks/[id]/comparison/route';
import { POST as copy } from '@/app/api/v1/notebooks/[id]/copy/route';
import { GET as readNotebook, PATCH as patch } from '@/app/api/v1/notebooks/[id]/route';
import { POST as restore } from '@/app/api/v1/notebooks/[id]/revisions/[revision]/restore/route';
import { POST as takeUp } from '@/app/api/v1/notebooks/[id]/take-up/route';
import { comparisonSchema, notebookSchema, takenUpSchema, type Notebook } from '@/lib/schemas';
import { fitModel, specOf } from '@/lib/services/fit-model';
import { Fit, MeasurementVersion } from '@/models';
import { storage } from '@/storage';
import { call, closeConnections, errorOf } from './harness';
import { background, openDesk, openNotebook, startFit, type Desk } from './sampling';
import { dataLines, formOf, uploadTo } from './uploads';

beforeAll(async () => {
  await storage().ensureBucket();
});
afterAll(closeConnections);

const why = 'beam not modelled here';

const notebookOf = async ({ token }: Desk, id: string): Promise<Notebook> =>
  notebookSchema.parse(await (await call(readNotebook, { params: { id }, token })).json());

const change = ({ token }: Desk, id: string, revision: number, excluded: unknown[]) =>
  call(patch, { params: { id }, token, json: { revision, cuts: { excluded } } });

/** Rows of one-field.csv below its head, cell by cell. */
const lines = dataLines('one-field.csv').filter((line) => !line.startsWith('#'));
const column = (name: string) => lines[0].split(',').findIndex((cell) => cell.trim() === name);
const at = (row: number, name: string) => Number(lines[row + 1].split(',')[column(name)]);

/** A version whose first bin is gone, and whose last has another upper edge. */
async function otherVersion(desk: Desk, measurement: string): Promise<void> {
  const [head, , ...rows] = lines;
  const last = rows[rows.length - 1].split(',');
  last[column('kappa_hi')] = String(Number(last[column('kappa_hi')]) * 1.01);
  const bytes = [head, ...rows.slice(0, -1), last.join(',')].join('\n');
  const answer = await call(addVersion, {
    params: { id: measurement },
    token: desk.token,
    body: formOf({ file: { name: 'other.csv', bytes } }),
  });
  if (answer.status !== 201) throw new Error(await answer.text());
}

const covariant = (desk: Desk) =>
  openNotebook(desk, { template: background, likelihood: { kind: 'normal' } });

describe('bins left out one by one', () => {
  it('are stored with their edges, leave the covariance, and are frozen in the fit', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    const all = (await notebookOf(desk, id)).bins.all;
    const answer = await change(desk, id, 1, [
      { bin: 7, reason: ` ${why} ` },
      { bin: 3, reason: 'one mock field missing' },
    ]);
    const notebook = notebookSchema.parse(await answer.json());
    expect(notebook.cuts.excluded).toEqual([
      { bin: 3, reason: 'one mock field missing', kappa: [at(2, 'kappa_lo'), at(2, 'kappa_hi')] },
      { bin: 7, reason: why, kappa: [at(6, 'kappa_lo'), at(6, 'kappa_hi')] },
    ]);
    expect(notebook.bins).toEqual({ kept: all - 2, all });
    expect(notebook.record.at(-1)?.sections).toEqual(['measurement']);
    const fit = await Fit.findByPk(await startFit(desk, id, {}), { rejectOnEmpty: true });
    expect(fit.snapshot).toMatchObject({ cuts: { excluded: notebook.cuts.excluded } });
    const version = await MeasurementVersion.findByPk(fit.measurementVersionId, { rejectOnEmpty: true });
    const spec = specOf(fitModel(version, fit.snapshot as never));
    expect([...spec.data.S].includes(at(6, 'S'))).toBe(false);
    expect([...spec.data.S].includes(at(5, 'S'))).toBe(true);
    expect(spec.data.covariance).toHaveLength((all - 2) ** 2);
  });

  it('need a reason, a bin that is there, and no second mention', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    const refused = async (excluded: unknown[]) => errorOf(await change(desk, id, 1, excluded));
    for (const reason of ['', '   ', 'x'.repeat(201)]) {
      expect((await refused([{ bin: 3, reason }])).details[0].path).toBe('cuts.excluded.0.reason');
    }
    expect((await refused([{ bin: 0, reason: why }])).details[0].path).toBe('cuts.excluded.0.bin');
    const beyond = await refused([
      { bin: 3, reason: why },
      { bin: 999, reason: why },
    ]);
    expect(beyond).toMatchObject({ status: 422, details: [{ path: 'cuts.excluded.1.bin' }] });
    expect(beyond.message).toContain('no bin 999');
    const twice = await refused([
      { bin: 3, reason: why },
      { bin: 3, reason: why },
    ]);
    expect(twice.details[0].path).toBe('cuts.excluded.1.bin');
    const elsewhere = await refused([{ bin: 3, reason: why, kappa: [0.5, 0.6] }]);
    expect(elsewhere.message).toContain('no bin 3 with κ from 0.5 to 0.6');
    const everything = Array.from({ length: (await notebookOf(desk, id)).bins.all }, (_, i) => ({
      bin: i + 1,
      reason: why,
    }));
    expect((await refused(everything)).details[0].path).toBe('cuts');
    expect((await notebookOf(desk, id)).revision).toBe(1);
  });

  it('leave no trace once all are put back', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    await change(desk, id, 1, [{ bin: 3, reason: why }]);
    const back = notebookSchema.parse(await (await change(desk, id, 2, [])).json());
    expect(back.cuts).toEqual({});
  });

  it('are found by their edges in a version that is taken up, and named where they are gone', async () => {
    const desk = await openDesk();
    const id = await covariant(desk);
    const { measurement, bins } = await notebookOf(desk, id);
    await change(
      desk,
      id,
      1,
      [1, 7, bins.all].map((bin) => ({ bin, reason: why })),
    );
    await otherVersion(desk, measurement.id);
    const taken = takenUpSchema.parse(
      await (await call(takeUp, { params: { id }, token: desk.token, json: { version: 2 } })).json(),
    );
    expect(taken.dropped.map(({ bin }) => bin)).toEqual([1, bins.all]);
    const { cuts, revision } = await notebookOf(desk, id);
    expect(cuts.excluded).toEqual([{ bin: 6, reason: why, kappa: [at(6, 'kappa_lo'), at(6, 'kappa_hi')] }]);
    const restored = await errorOf(
      await call(restore, { params: { id, revision: '2' }, token: desk.token, json: { revision } }),
    );
    expect(restored).toMatchObject({ status: 422, details: [{ path: 'cuts.excluded.0.bin' }] });
  });

  it('go along with a copy, and say where the other measurement hasn’t got them', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    await change(desk, id, 1, [{ bin: 7, reason: why }]);
    const made = (await (
      await call(copy, { params: { id }, token: desk.token, json: {} })
    ).json()) as Notebook;
    expect((await notebookOf(desk, made.id)).cuts.excluded).toMatchObject([{ bin: 7, reason: why }]);
    const { measurement } = await notebookOf(desk, id);
    const other = { name: 'points.csv', bytes: 'kappa,S,sigma\n0.01,1,1\n0.02,2,1\n0.04,1,1\n0.08,2,1\n' };
    const upload = await uploadTo(desk.group, desk.token, { file: other });
    const target = (await upload.json()) as { id: string };
    expect(target.id).not.toBe(measurement.id);
    const json = { measurement: target.id };
    const onOther = (await (
      await call(copy, { params: { id }, token: desk.token, json })
    ).json()) as Notebook;
    expect(await notebookOf(desk, onOther.id)).toMatchObject({ cuts: {}, origin: { droppedBins: 1 } });
  });

  it('make a set of evidences of their own, which the words beside them do not', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    const fits = async () => {
      await startFit(desk, id, {});
      const answer = await call(readComparison, { params: { id }, token: desk.token });
      return comparisonSchema.parse(await answer.json()).sets.length;
    };
    expect(await fits()).toBe(1);
    await change(desk, id, 1, [{ bin: 7, reason: why }]);
    expect(await fits()).toBe(2);
    await change(desk, id, 2, [{ bin: 7, reason: 'said better' }]);
    expect(await fits()).toBe(2);
  });
});
