import { loadavg } from 'node:os';
import { Op } from 'sequelize';
import { afterAll, beforeAll, describe, expect } from 'vitest';
import { Fit } from '@/models';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { closeConnections } from '../integration/harness';
import {
  background,
  buildWorker,
  fitEnded,
  openDesk,
  openNotebook,
  samplesOf,
  startFit,
  type Desk,
} from '../integration/sampling';
import { proof } from '../proofs/proof';
import { CommandedWorker } from './commanded-worker';

interface Place {
  desk: Desk;
  notebook: string;
}

/** Two groups: each may run two fits at once, so that neither's limit keeps the second worker idle. */
let places: Place[];
beforeAll(async () => {
  database();
  await buildWorker();
  places = await Promise.all(
    [1, 2].map(async () => {
      const desk = await openDesk();
      return { desk, notebook: await openNotebook(desk, { template: background }) };
    }),
  );
  // What other tests left waiting would be taken as well.
  const unfinished = { status: { [Op.in]: ['queued', 'warming-up', 'sampling'] } };
  await Fit.update({ status: 'stopped', leaseUntil: null }, { where: unfinished });
});
afterAll(async () => {
  CommandedWorker.endAll();
  await closeQueue();
  await closeConnections();
});

/** One fit at a time in one thread: a worker uses one core, and a second one brings a second core. */
const oneCore = { BEATNOTE_FITS: '1', BEATNOTE_THREADS: '1', BEATNOTE_RECONCILE_MS: '300' };

interface Round {
  /** Number of fits that each worker sampled. */
  shares: number[];
  /** From the first fit that was taken to the last end, by the database's clock. */
  seconds: number;
  /** Processes that wanted a core in the last minute: with more than the round's own, its seconds say little. */
  load: number;
  /** Sample files in the order of the seeds. */
  files: string[];
}

/** Queues fits of both groups in turn, with the seeds 0, 1, …, and lets so many workers sample them. */
async function sample(workers: number, count: number): Promise<Round> {
  const started = await Promise.all(Array.from({ length: workers }, () => CommandedWorker.start(oneCore)));
  const fits: { desk: Desk; id: string }[] = [];
  for (let seed = 0; seed < count; seed++) {
    const { desk, notebook } = places[seed % places.length];
    const settings = { seed, maxDraws: 4000, target: { ess: 1e9 } };
    fits.push({ desk, id: await startFit(desk, notebook, settings) });
  }
  for (const { desk, id } of fits) expect((await fitEnded(desk, id)).status).toBe('budget-spent');
  const [load] = loadavg();
  for (const worker of started) await worker.stop();
  const files: string[] = [];
  for (const { desk, id } of fits) files.push(await samplesOf(desk, id));
  const ids = fits.map(({ id }) => id);
  const rows = await Fit.findAll({ where: { id: ids }, attributes: ['epoch', 'startedAt', 'endedAt'] });
  // Each was taken once: by one worker, which held it to its end.
  expect(rows.map(({ epoch }) => epoch)).toEqual(ids.map(() => 1));
  const begun = Math.min(...rows.map(({ startedAt }) => startedAt!.getTime()));
  const over = Math.max(...rows.map(({ endedAt }) => endedAt!.getTime()));
  const shares = started.map(({ fits: held }) => ids.filter((id) => held.has(id)).length);
  expect(shares.reduce((sum, share) => sum + share)).toBe(count);
  return { shares, seconds: (over - begun) / 1000, load, files };
}

describe('a second worker', () => {
  proof(
    {
      name: 'two-workers',
      claim:
        'fits of two groups are shared with a second `npm run worker`, which changes no byte of any of them',
      unit: 'queued fits',
      gate: 8,
      full: 24,
      seed: 0,
      timeout: 900_000,
    },
    async ({ size, record }) => {
      const one = await sample(1, size);
      const two = await sample(2, size);
      record({
        shares: two.shares,
        secondsWithOne: one.seconds,
        secondsWithTwo: two.seconds,
        loadWithOne: one.load,
        loadWithTwo: two.load,
        ratio: two.seconds / one.seconds,
      });
      // Of eight fits of one length three at least: each is free for another whenever its own has ended.
      for (const share of two.shares) expect(share).toBeGreaterThanOrEqual((3 / 8) * size);
      expect(two.files).toEqual(one.files);
      expect(new Set(one.files).size).toBe(size);
    },
  );
});
