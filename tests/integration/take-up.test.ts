import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { POST as takeUpAll } from '@/app/api/v1/measurements/[id]/take-up/route';
import { POST as addVersion } from '@/app/api/v1/measurements/[id]/versions/route';
import { GET as readNotebook, PATCH as patch } from '@/app/api/v1/notebooks/[id]/route';
import { GET as readShifts } from '@/app/api/v1/notebooks/[id]/shifts/route';
import { POST as takeUp } from '@/app/api/v1/notebooks/[id]/take-up/route';
import { allTakenUpSchema, notebookSchema, shiftsSchema, takenUpSchema } from '@/lib/schemas';
import { Fit, NotebookRevision } from '@/models';
import { storage } from '@/storage';
import { call, closeConnections, createMember, errorOf } from './harness';
import {
  background,
  buildWorker,
  endWorkers,
  fitEnded,
  fitOf,
  openDesk,
  openNotebook,
  startFit,
  startWorker,
  type Desk,
} from './sampling';
import { dataLines, filePart, formOf } from './uploads';

beforeAll(async () => {
  await storage().ensureBucket();
  await buildWorker();
});
afterAll(async () => {
  await endWorkers();
  await closeConnections();
});

const notebookOf = async ({ token }: Desk, id: string) =>
  notebookSchema.parse(await (await call(readNotebook, { params: { id }, token })).json());

const shiftsOf = async ({ token }: Desk, id: string) =>
  shiftsSchema.parse(await (await call(readShifts, { params: { id }, token })).json());

const take = ({ token }: Desk, id: string, version: number) =>
  call(takeUp, { params: { id }, token, json: { version } });

/** A newer version whose points are the old ones, each S raised by `by`; without mocks where `bare`. */
async function raiseVersion(desk: Desk, measurement: string, by: number, bare = false): Promise<void> {
  const [head, ...rows] = dataLines('one-field.csv').filter((line) => !line.startsWith('#'));
  const column = head.split(',').findIndex((name) => name.trim() === 'S');
  const moved = rows.map((row) =>
    row
      .split(',')
      .map((cell, j) => (j === column ? String(Number(cell) + by) : cell))
      .join(','),
  );
  const bytes = [head, ...moved].join('\n');
  const parts = {
    file: { name: 'raised.csv', bytes },
    ...(bare ? {} : { mocks: filePart('one-field-mocks.csv') }),
  };
  const answer = await call(addVersion, {
    params: { id: measurement },
    token: desk.token,
    body: formOf(parts),
  });
  if (answer.status !== 201) throw new Error(await answer.text());
}

const end = (id: string, status = 'converged') => Fit.update({ status }, { where: { id } });
const quick = { maxDraws: 400, seed: 'raised', target: { rhat: 1.2, ess: 60 } };

describe('taking up a newer version', () => {
  it('moves the notebook, repeats its finished fits with their seeds, and tells how far each quantity moved', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    const worker = startWorker();
    const first = await startFit(desk, id, quick);
    await fitEnded(desk, first);
    const { measurement } = await notebookOf(desk, id);
    await raiseVersion(desk, measurement.id, 0.5);
    expect((await notebookOf(desk, id)).measurement).toMatchObject({ version: 1, newest: 2 });

    const answer = takenUpSchema.parse(await (await take(desk, id, 2)).json());
    expect(answer).toMatchObject({ version: 2, revision: 2, skipped: [], fits: [{ number: 2, repeats: 1 }] });
    const moved = await notebookOf(desk, id);
    expect([moved.measurement.version, moved.revision]).toEqual([2, 2]);
    expect(moved.record.at(-1)?.sections).toEqual(['measurement']);

    const before = await shiftsOf(desk, id);
    expect(before.pairs[0].shifts.every(({ old }) => old !== null)).toBe(true);
    const repeated = await fitEnded(desk, answer.fits[0].id);
    await worker.stop();
    expect(repeated.revision).toBe(2);
    const original = await fitOf(desk, first);
    expect(repeated.snapshot).toMatchObject({ seed: 'raised', measurementVersion: 2 });
    expect(repeated.snapshot.priors).toEqual(original.snapshot.priors);

    const { pairs } = await shiftsOf(desk, id);
    expect(pairs.map(({ old, new: now }) => [old.number, old.version, now.number, now.version])).toEqual([
      [1, 1, 2, 2],
    ]);
    for (const { parameter, shift, old, new: now } of pairs[0].shifts) {
      const [a, b] = [original, repeated].map(({ diagnostics }) =>
        diagnostics.find((each) => each.parameter === parameter)!,
      );
      expect([old?.median, now?.median]).toEqual([a.q50, b.q50]);
      expect(shift).toBeCloseTo((b.q50! - a.q50!) / Math.hypot(a.sd!, b.sd!), 12);
    }
    // Half a unit more of S everywhere can't be the same background.
    expect(Math.max(...pairs[0].shifts.map(({ shift }) => Math.abs(shift ?? 0)))).toBeGreaterThan(1);
  });

  it('has no value for a fit that hasn’t ended yet', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    await end(await startFit(desk, id, quick));
    await raiseVersion(desk, (await notebookOf(desk, id)).measurement.id, 0.5);
    await take(desk, id, 2);
    const [pair] = (await shiftsOf(desk, id)).pairs;
    expect([pair.new.status, pair.shifts]).toEqual(['queued', []]);
  });

  it('gives a fit of other settings a revision of its own, so that it stays of an earlier one', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    await end(await startFit(desk, id, { ...quick, seed: 'a' }));
    await end(await startFit(desk, id, { ...quick, seed: 'b' }), 'budget-spent');
    await end(await startFit(desk, id, { ...quick, seed: 'c' }), 'stopped');
    const edit = { revision: 1, cuts: { kappaMax: 0.2 } };
    await call(patch, { method: 'PATCH', params: { id }, token: desk.token, json: edit });
    await end(await startFit(desk, id, { ...quick, seed: 'd' }));
    await raiseVersion(desk, (await notebookOf(desk, id)).measurement.id, 0.1);
    const answer = takenUpSchema.parse(await (await take(desk, id, 2)).json());
    expect(answer.fits.map(({ number, repeats }) => [number, repeats])).toEqual([
      [5, 1],
      [6, 2],
      [7, 4],
    ]);
    const fits = await Promise.all(answer.fits.map(({ id: fit }) => fitOf(desk, fit)));
    expect(fits.map(({ revision }) => revision)).toEqual([3, 3, 4]);
    expect(fits.map(({ snapshot }) => snapshot.seed)).toEqual(['a', 'b', 'd']);
    const revisions = await NotebookRevision.findAll({ where: { notebookId: id }, order: ['revision'] });
    expect(revisions.map(({ settings }) => settings.cuts)).toEqual([
      {},
      { kappaMax: 0.2 },
      {},
      { kappaMax: 0.2 },
    ]);
    expect((await notebookOf(desk, id)).cuts).toEqual({ kappaMax: 0.2 });
  });

  it('is refused, and changes nothing, where the settings can’t be fitted there or nothing would move', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    await end(await startFit(desk, id, quick));
    const { measurement } = await notebookOf(desk, id);
    await raiseVersion(desk, measurement.id, 0.1, true);
    // The first version has mocks and a likelihood that needs them; the second has errors alone.
    const refused = await errorOf(await take(desk, id, 2));
    expect([refused.status, refused.details[0].path]).toEqual([422, 'likelihood.kind']);
    expect((await errorOf(await take(desk, id, 1))).code).toBe('conflict');
    expect((await errorOf(await take(desk, id, 9))).details[0].path).toBe('version');
    expect([(await notebookOf(desk, id)).revision, await Fit.count({ where: { notebookId: id } })]).toEqual([
      1, 1,
    ]);
  });

  it('is for those who edit and fit', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    const { token } = await createMember(desk.group, 'referee');
    expect((await errorOf(await take({ ...desk, token }, id, 2))).status).toBe(403);
  });

  it('is done for every notebook that rests on another version, from the measurement', async () => {
    const desk = await openDesk();
    const id = await openNotebook(desk, { template: background });
    await end(await startFit(desk, id, quick));
    const { measurement } = await notebookOf(desk, id);
    await raiseVersion(desk, measurement.id, 0.1);
    const all = (version: number) =>
      call(takeUpAll, { params: { id: measurement.id }, token: desk.token, json: { version } });
    const answer = allTakenUpSchema.parse(await (await all(2)).json());
    expect(answer.notebooks.map(({ id: one, version, fits }) => [one, version, fits.length])).toEqual([
      [id, 2, 1],
    ]);
    expect(allTakenUpSchema.parse(await (await all(2)).json())).toEqual({ notebooks: [], refused: [] });
    await raiseVersion(desk, measurement.id, 0.2, true);
    const refused = allTakenUpSchema.parse(await (await all(3)).json());
    expect([refused.notebooks, refused.refused.map((one) => one.id)]).toEqual([[], [id]]);
    expect((await errorOf(await all(8))).status).toBe(422);
  });
});
