import { Op } from 'sequelize';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { Fit, FitLimit, User } from '@/models';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { readFitLimits, setFitLimit } from '@/lib/services/fit-limits';
import { takeNext } from '@/lib/services/fit-queue';
import { closeConnections, createUser } from './harness';
import { background, fitOf, openDesk, openNotebook, startFit, type Desk } from './sampling';

interface Bench {
  desk: Desk;
  notebook: string;
  /** Queues a fit that would take so many seconds, at a moment. */
  queue(seconds: number, at: number): Promise<string>;
}

const start = Date.parse('2031-05-01T00:00:00Z');
const moment = (second: number) => new Date(start + second * 1000);
const lease = 100 * 3_600_000;
let number = 100;

async function openBench(): Promise<Bench> {
  const desk = await openDesk();
  const notebook = await openNotebook(desk, { template: background });
  const first = await startFit(desk, notebook, { seed: 1 });
  const row = (await Fit.findByPk(first, { raw: true }))!;
  await Fit.update({ status: 'stopped' }, { where: { id: first } });
  const rest = { ...row, id: undefined };
  return {
    desk,
    notebook,
    queue: async (seconds, at) => {
      number += 1;
      const times = { createdAt: moment(at), queuedAt: moment(at), startedAt: null, endedAt: null };
      const made = await Fit.create({
        ...rest,
        ...times,
        number,
        status: 'queued',
        expectedSeconds: seconds,
      });
      return made.id;
    },
  };
}

let benches: Bench[];
let admin: Awaited<ReturnType<typeof createUser>>;
beforeAll(async () => {
  database();
  admin = await createUser();
  await User.update({ siteAdmin: true }, { where: { id: admin.userId } });
  benches = [await openBench(), await openBench(), await openBench()];
});
beforeEach(async () => {
  // What other tests left waiting isn't this file's.
  const unfinished = { status: { [Op.in]: ['queued', 'warming-up', 'sampling'] } };
  await Fit.update({ status: 'stopped', leaseUntil: null, millisecondsSpent: 0 }, { where: unfinished });
  await Fit.update({ millisecondsSpent: 0 }, { where: { groupId: benches.map(({ desk }) => desk.group) } });
  await FitLimit.destroy({ where: {} });
});
afterAll(async () => {
  await FitLimit.destroy({ where: {} });
  await Fit.destroy({ where: { notebookId: benches.map(({ notebook }) => notebook) } });
  await closeQueue();
  await closeConnections();
});

interface Run {
  id: string;
  group: string;
  from: number;
  to: number;
}

/** Sampling without sampling: so many places, a clock of its own, the real claims against the real database. */
async function simulate(
  places: number,
  until: number,
  arrive: (second: number) => Promise<unknown> = () => Promise.resolve(),
): Promise<Run[]> {
  const running: Run[] = [];
  const done: Run[] = [];
  for (let second = 0; second < until; second += 10) {
    await arrive(second);
    for (const run of running.filter(({ to }) => to <= second)) {
      running.splice(running.indexOf(run), 1);
      done.push(run);
      await Fit.update(
        {
          status: 'converged',
          leaseUntil: null,
          endedAt: moment(run.to),
          millisecondsSpent: (run.to - run.from) * 1000,
        },
        { where: { id: run.id } },
      );
    }
    while (running.length < places) {
      const taken = await takeNext(lease, moment(second));
      if (!taken) break;
      if (taken.kind !== 'fit') throw new Error('Only fits are queued here.');
      const fit = await Fit.findByPk(taken.fitId, { rejectOnEmpty: true });
      running.push({ id: fit.id, group: fit.groupId, from: second, to: second + fit.expectedSeconds });
    }
    // What runs counts as used while it runs, as its commits say.
    for (const run of running) {
      await Fit.update({ millisecondsSpent: (second - run.from) * 1000 }, { where: { id: run.id } });
    }
  }
  return [...done, ...running];
}

const secondsOf = (runs: Run[], { desk }: Bench, until: number) =>
  runs
    .filter(({ group }) => group === desk.group)
    .reduce((sum, { from, to }) => sum + Math.min(to, until) - from, 0);

describe('the queue of fits', () => {
  it('gives groups that all have something waiting equal time, whatever the length of their fits', async () => {
    const [a, b, c] = benches;
    for (let i = 0; i < 30; i++) await a.queue(60, i);
    for (let i = 0; i < 60; i++) await b.queue(20, i);
    for (let i = 0; i < 6; i++) await c.queue(200, i);
    const until = 1_500;
    const runs = await simulate(2, until);
    const seconds = [a, b, c].map((bench) => secondsOf(runs, bench, until));
    expect(seconds.reduce((x, y) => x + y)).toBeGreaterThan(2 * until - 100);
    // Equal up to one of the longest fits on either side; first come, first served would give the first group three fifths.
    for (const each of seconds) expect(Math.abs(each - (2 * until) / 3)).toBeLessThanOrEqual(200);
  });

  it('keeps every group to its limit, its own or everybody’s, and leaves no place empty for it', async () => {
    const [a, b] = benches;
    await setFitLimit(admin, { groupId: null, fits: 3 });
    await setFitLimit(admin, { groupId: a.desk.group, fits: 1 });
    for (let i = 0; i < 6; i++) await a.queue(50, 0);
    for (let i = 0; i < 12; i++) await b.queue(50, 0);
    const runs = await simulate(8, 300);
    const atOnce = (bench: Bench) => {
      const own = runs.filter(({ group }) => group === bench.desk.group);
      return Math.max(
        ...own.map((run) => own.filter(({ from, to }) => from <= run.from && run.from < to).length),
      );
    };
    expect([atOnce(a), atOnce(b)]).toEqual([1, 3]);
    expect(runs).toHaveLength(6 + 12);
  });

  it('brings a long fit to its turn though short ones of its group never cease to come', async () => {
    const [a] = benches;
    const long = await a.queue(600, 0);
    await setFitLimit(admin, { groupId: null, fits: 1 });
    const runs = await simulate(1, 1_000, (second) => a.queue(10, second));
    const run = runs.find(({ id }) => id === long);
    expect(runs[0].id).not.toBe(long);
    expect(run?.from).toBeLessThanOrEqual(610);
  });

  it('never gives one fit to two workers, nor one more to a group than its limit, when all ask at once', async () => {
    const [a, b] = benches;
    await setFitLimit(admin, { groupId: null, fits: 7 });
    for (let i = 0; i < 20; i++) await Promise.all([a.queue(60, i), b.queue(60, i)]);
    const worker = async () => {
      const taken: string[] = [];
      for (let empty = 0; empty < 5;) {
        const next = await takeNext(lease, moment(100));
        if (next?.kind === 'fit') taken.push(next.fitId);
        else empty += 1;
      }
      return taken;
    };
    const taken = (await Promise.all(Array.from({ length: 6 }, worker))).flat();
    expect(new Set(taken).size).toBe(taken.length);
    expect(taken).toHaveLength(14);
    const epochs = await Fit.findAll({ where: { id: taken }, attributes: ['epoch', 'groupId'] });
    expect(new Set(epochs.map(({ epoch }) => epoch))).toEqual(new Set([1]));
    for (const bench of [a, b]) {
      expect(epochs.filter(({ groupId }) => groupId === bench.desk.group)).toHaveLength(7);
    }
  });

  it('says the place of a fit and why it waits, and nothing of them once it is taken', async () => {
    const [a] = benches;
    const queued = [];
    for (let i = 0; i < 5; i++) queued.push(await startFit(a.desk, a.notebook, { seed: i }));
    const before = await fitOf(a.desk, queued[4]);
    expect(before.queue).toEqual({ place: 5, groupRunning: 0, groupLimit: 2 });
    await takeNext(60_000);
    await takeNext(60_000);
    const fit = await fitOf(a.desk, queued[4]);
    expect(fit.queue).toEqual({ place: 3, groupRunning: 2, groupLimit: 2 });
    expect(fit.message).toMatch(/^Third in the queue; /);
    const runs = await fitOf(a.desk, queued[0]);
    expect([runs.status, runs.queue]).toEqual(['warming-up', null]);
    const limits = await readFitLimits(admin);
    expect(limits.groups.find(({ id }) => id === a.desk.group)).toMatchObject({ running: 2, waiting: 3 });
  });
});

describe('the limit of fits', () => {
  it('is for site administrators, who are told what they may ask for', async () => {
    const someone = await createUser();
    await expect(readFitLimits(someone)).rejects.toMatchObject({ code: 'forbidden' });
    await expect(setFitLimit(someone, { groupId: null, fits: 9 })).rejects.toMatchObject({
      code: 'forbidden',
    });
    await expect(setFitLimit(admin, { groupId: null, fits: 0 })).rejects.toMatchObject({ code: 'invalid' });
    const stranger = { groupId: '00000000-0000-4000-8000-000000000000', fits: 1 };
    await expect(setFitLimit(admin, stranger)).rejects.toMatchObject({ code: 'not_found' });
    await setFitLimit(admin, { groupId: null, fits: 5 });
    expect((await readFitLimits(admin)).everyGroup).toBe(5);
    await setFitLimit(admin, { groupId: null, fits: null });
    expect(await readFitLimits(admin)).toMatchObject({ everyGroup: null, configured: 2 });
  });
});
