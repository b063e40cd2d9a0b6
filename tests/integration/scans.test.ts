import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { POST as startScan } from '@/app/api/v1/notebooks/[id]/scan/route';
import { GET as readTrials } from '@/app/api/v1/notebooks/[id]/trials/route';
import { DELETE as deleteNotebook, PATCH as patchNotebook } from '@/app/api/v1/notebooks/[id]/route';
import { GET as readScan } from '@/app/api/v1/scans/[id]/route';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { scanSchema, trialsSchema, type Scan } from '@/lib/schemas';
import { claimScan, commitScan, renewScan } from '@/lib/services/scan-lease';
import { performScan } from '@/lib/services/scan-model';
import { Measurement, Scan as ScanRow } from '@/models';
import { call, closeConnections, createMember, errorOf } from './harness';
import {
  background,
  buildWorker,
  endWorkers,
  oneField,
  openDesk,
  openNotebook,
  startWorker,
  twoFields,
  type Desk,
} from './sampling';

let desk: Desk;
beforeAll(async () => {
  database();
  await buildWorker();
  desk = await openDesk();
  startWorker();
});
afterAll(async () => {
  await endWorkers();
  await closeQueue();
  await closeConnections();
});

const ask = (notebook: string, body: unknown) =>
  call(startScan, { token: desk.token, params: { id: notebook }, json: body });

async function scanned(notebook: string, body: unknown): Promise<Scan> {
  const response = await ask(notebook, body);
  expect(response.status).toBe(200);
  return scanSchema.parse(await response.json());
}

async function trialsOf(notebook: string) {
  const response = await call(readTrials, { token: desk.token, params: { id: notebook } });
  expect(response.status).toBe(200);
  return trialsSchema.parse(await response.json());
}

describe('scans', () => {
  it('answer with everything of the contract, and with the same result when asked again', async () => {
    const notebook = await openNotebook(desk, { template: oneField });
    const first = await scanned(notebook, { muMin: 0.5, muMax: 6, nulls: 400 });
    expect(first.status).toBe('done');
    expect(first.mu).toHaveLength(first.deltaChi2?.length ?? -1);
    expect(first.logEvidence).toHaveLength(first.mu?.length ?? -1);
    expect(first.mu?.[0]).toBe(0.5);
    expect(first.mu?.at(-1)).toBe(6);
    const highest = Math.max(...(first.deltaChi2 ?? []));
    expect(first.best?.deltaChi2).toBeGreaterThanOrEqual(highest);
    expect(first.globalP).toBeGreaterThan(0);
    expect(first.localP).toBeLessThanOrEqual(1);
    expect(first.best?.parameters.mu1).toBe(first.best?.mu);
    const again = await scanned(notebook, { muMin: 0.5, muMax: 6, nulls: 400 });
    expect(again).toEqual(first);
    const read = await call(readScan, { token: desk.token, params: { id: first.id } });
    expect(scanSchema.parse(await read.json())).toEqual(first);
  });

  it('of two fields have the plane; the looks of a notebook are judged together on the same nulls', async () => {
    const notebook = await openNotebook(desk, { template: twoFields });
    expect(await trialsOf(notebook)).toMatchObject({ trials: [], globalP: null, method: 'none' });
    const wide = await scanned(notebook, { muMin: 0.5, muMax: 5, nulls: 300 });
    expect(wide.plane?.best.mu[0]).toBeLessThan(wide.plane?.best.mu[1] ?? 0);
    expect(wide.plane?.best.deltaChi2).toBeGreaterThanOrEqual((wide.best?.deltaChi2 ?? 0) - 1e-6);
    await scanned(notebook, { muMin: 1, muMax: 3, nulls: 300 });
    const trials = await trialsOf(notebook);
    expect(trials.trials.map(({ number, kind }) => [number, kind])).toEqual([
      [1, 'one'],
      [1, 'two'],
      [2, 'one'],
      [2, 'two'],
    ]);
    expect(trials.method).toBe('same-nulls');
    expect(trials.nulls).toBe(300);
    expect(trials.globalP).toBeGreaterThanOrEqual(trials.smallestP ?? 1);
    expect(trials.globalP).toBeLessThanOrEqual(Math.min(1, 4 * (trials.smallestP ?? 0) + 1 / 301));
  });

  it('a notebook that was scanned isn’t erased', async () => {
    const notebook = await openNotebook(desk, { template: oneField });
    await scanned(notebook, { muMin: 1, muMax: 2, nulls: 100 });
    const refused = await call(deleteNotebook, {
      method: 'DELETE',
      token: (await createMember(desk.group, 'lead')).token,
      params: { id: notebook },
    });
    expect((await errorOf(refused)).status).toBe(409);
  });

  it('refuse what can’t be scanned, with the place', async () => {
    const plain = await openNotebook(desk, { template: background });
    const withoutField = await errorOf(await ask(plain, {}));
    expect(withoutField).toMatchObject({ status: 422 });
    const notebook = await openNotebook(desk, { template: oneField });
    for (const body of [{ muMin: 3, muMax: 2 }, { muMin: 200 }, { nulls: 5 }, { range: 1 }]) {
      const { status } = await errorOf(await ask(notebook, body));
      expect([400, 422]).toContain(status);
    }
    expect((await trialsOf(notebook)).trials).toEqual([]);
  });

  it('of a blind measurement are refused, and earlier ones withheld', async () => {
    const notebook = await openNotebook(desk, { template: oneField });
    const { id } = await scanned(notebook, { muMin: 1, muMax: 2, nulls: 100 });
    await Measurement.update({ blind: true }, { where: {} });
    try {
      expect((await errorOf(await ask(notebook, { muMin: 1, muMax: 3 }))).status).toBe(409);
      const read = await call(readScan, { token: desk.token, params: { id } });
      expect(scanSchema.parse(await read.json())).toMatchObject({
        blind: true,
        mu: null,
        best: null,
        globalP: null,
      });
      expect(await trialsOf(notebook)).toMatchObject({
        globalP: null,
        trials: [{ best: null, globalP: null }],
      });
    } finally {
      await Measurement.update({ blind: false }, { where: {} });
    }
  });

  it('a worker that lost its scan to another writes nothing', { timeout: 60_000 }, async () => {
    await endWorkers();
    const notebook = await openNotebook(desk, { template: oneField });
    const answer = ask(notebook, { muMin: 1, muMax: 2, nulls: 100 });
    let row: ScanRow | null = null;
    while (!row) row = await ScanRow.findOne({ where: { notebookId: notebook } });
    const slow = await claimScan(row.id, 1);
    expect(slow).not.toBeNull();
    let quick = null;
    while (!quick) quick = await claimScan(row.id, 60_000);
    const finished = performScan(quick.model, () => undefined);
    expect(await renewScan(slow!, 1000, 0.5)).toBe(false);
    expect(await commitScan(slow!, finished)).toBe(false);
    expect(await commitScan(quick, finished)).toBe(true);
    expect((await answer).status).toBe(200);
    startWorker();
  });
});

it('editing the notebook makes the next scan another look', async () => {
  const notebook = await openNotebook(desk, { template: oneField });
  await scanned(notebook, { muMin: 1, muMax: 2, nulls: 100 });
  const patched = await call(patchNotebook, {
    method: 'PATCH',
    token: desk.token,
    params: { id: notebook },
    json: { revision: 1, cuts: { kappaMax: 0.1 } },
  });
  expect(patched.status).toBe(200);
  await scanned(notebook, { muMin: 1, muMax: 2, nulls: 100 });
  const trials = await trialsOf(notebook);
  expect(trials.trials).toHaveLength(2);
  expect(trials.trials.every(({ shared }) => shared)).toBe(true);
});
