import { setTimeout as sleep } from 'node:timers/promises';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { Fit, FitBlock, FitReplica } from '@/models';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { commitDraws, commitLook, type DrawsCommit } from '@/lib/services/fit-commit';
import {
  failFit,
  releaseLease,
  renewLease,
  readHeld,
  takeLease,
  type HeldFit,
} from '@/lib/services/fit-lease';
import { readQueue } from '@/lib/services/fit-queue';
import { closeConnections } from './harness';
import { background, openDesk, openNotebook, startFit } from './sampling';

let notebook: string;
let desk: Awaited<ReturnType<typeof openDesk>>;
let id: string;
beforeAll(async () => {
  database();
  desk = await openDesk();
  notebook = await openNotebook(desk, { template: background });
});
beforeEach(async () => {
  id = await startFit(desk, notebook, { seed: 1, replicas: 2 });
});
afterAll(async () => {
  // No worker of a later test is to take these up.
  await Fit.update({ status: 'stopped' }, { where: { notebookId: notebook } });
  await closeQueue();
  await closeConnections();
});

/** Takes this file's fit, past the queue. */
const claimFit = async (leaseMs: number): Promise<HeldFit | null> => {
  const epoch = await database().transaction((transaction) => takeLease(id, leaseMs, undefined, transaction));
  return epoch === null ? null : readHeld(id, epoch);
};

const claim = async (leaseMs: number): Promise<HeldFit> => {
  const claimed = await claimFit(leaseMs);
  if (!claimed) throw new Error('The fit could not be taken.');
  return claimed;
};

/** Two draws of each replica, four values each. */
const twoDraws = ({ epoch, report }: HeldFit, from = 0): DrawsCommit => ({
  fitId: id,
  epoch,
  from,
  to: from + 2,
  warmup: 1500,
  blocks: [0, 1].map((replica) => ({
    replica,
    firstDraw: from,
    stride: 1,
    rows: 2,
    width: 4,
    values: Float64Array.from([-0, 1 / 3, 5e-324, 1e308, NaN, -Infinity, 0.1, 2]),
  })),
  states: [0, 1].map((replica) => ({ replica, state: Buffer.from([from, replica]) })),
  milliseconds: 5,
  drawsPerSecond: 800,
  report,
});

describe('a lease', () => {
  it('is given to one worker at a time, and again when it has run out', async () => {
    const [one, two] = await Promise.all([claimFit(60_000), claimFit(60_000)]);
    expect([one, two].filter((each) => each === null)).toHaveLength(1);
    expect(await claimFit(60_000)).toBeNull();
    await releaseLease(id, 1);
    expect((await claim(60_000)).epoch).toBe(2);
  });

  it('keeps a fit from the search for those that nobody holds for as long as it is renewed', async () => {
    const ids = async () => (await readQueue()).waiting.map((fit) => fit.id);
    expect(await ids()).toContain(id);
    const { epoch } = await claim(300);
    expect(await ids()).not.toContain(id);
    expect(await renewLease(id, epoch, 60_000)).toBe(true);
    await sleep(350);
    expect(await ids()).not.toContain(id);
  });
});

describe('a worker whose lease ran out', () => {
  it('can write nothing once another has taken the fit', async () => {
    const stale = await claim(1);
    await sleep(20);
    const present = await claim(60_000);
    expect(present.epoch).toBe(stale.epoch + 1);

    expect(await commitDraws(twoDraws(stale))).toBeNull();
    const { report } = stale;
    expect(
      await commitLook({ fitId: id, epoch: stale.epoch, draws: 0, report, judge: () => 'converged' }),
    ).toBeNull();
    expect(await renewLease(id, stale.epoch, 60_000)).toBe(false);
    expect(await failFit(id, stale.epoch, 'gone')).toBe(false);
    await releaseLease(id, stale.epoch);

    expect(await FitBlock.count({ where: { fitId: id } })).toBe(0);
    expect(await FitReplica.count({ where: { fitId: id } })).toBe(0);
    const fit = await Fit.findByPk(id, { rejectOnEmpty: true });
    expect(fit).toMatchObject({ status: 'warming-up', draws: 0, epoch: present.epoch, message: null });
    expect(fit.leaseUntil?.getTime()).toBeGreaterThan(Date.now());
    expect((await commitDraws(twoDraws(present)))?.draws).toBe(2);
  });

  it('can still write where nobody has taken the fit meanwhile', async () => {
    const claimed = await claim(1);
    await sleep(20);
    expect((await commitDraws(twoDraws(claimed)))?.draws).toBe(2);
  });
});

describe('a commit', () => {
  it('that is repeated because its answer was lost writes nothing twice', async () => {
    const claimed = await claim(60_000);
    const first = await commitDraws(twoDraws(claimed));
    expect(await commitDraws(twoDraws(claimed))).toEqual(first);
    expect(await FitBlock.count({ where: { fitId: id } })).toBe(2);
    expect((await Fit.findByPk(id))?.millisecondsSpent).toBe(5);
  });

  it('that doesn’t follow on what is there is refused as a whole', async () => {
    const claimed = await claim(60_000);
    await expect(commitDraws(twoDraws(claimed, 8))).rejects.toThrow('has 0 draws where 8 were due');
    expect(await FitBlock.count({ where: { fitId: id } })).toBe(0);
  });

  it('gives back every byte of values and states to who takes the fit up', async () => {
    const claimed = await claim(60_000);
    await commitDraws(twoDraws(claimed));
    await commitDraws(twoDraws(claimed, 2));
    await releaseLease(id, claimed.epoch);
    const again = await claim(60_000);
    expect(again.draws).toBe(4);
    expect([...again.states].sort()).toEqual([
      [0, Buffer.from([2, 0])],
      [1, Buffer.from([2, 1])],
    ]);
    const block = await FitBlock.findOne({ where: { fitId: id, replica: 1, firstDraw: 2 } });
    const wanted = twoDraws(claimed).blocks[0].values;
    expect(block?.values.equals(Buffer.from(wanted.buffer))).toBe(true);
  });

  it('that comes after the fit was stopped from outside changes nothing', async () => {
    const claimed = await claim(60_000);
    await Fit.update({ status: 'stopped', epoch: claimed.epoch + 1 }, { where: { id } });
    expect(await commitDraws(twoDraws(claimed))).toBeNull();
    expect((await Fit.findByPk(id))?.status).toBe('stopped');
  });
});
