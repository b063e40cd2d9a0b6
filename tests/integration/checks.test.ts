import { setTimeout as sleep } from 'node:timers/promises';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { GET as readCheck } from '@/app/api/v1/checks/[id]/route';
import { POST as stopCheck } from '@/app/api/v1/checks/[id]/stop/route';
import { GET as readState } from '@/app/api/v1/administration/route';
import { POST as archive } from '@/app/api/v1/notebooks/[id]/archive/route';
import { GET as listChecks, POST as startCheck } from '@/app/api/v1/notebooks/[id]/checks/route';
import { DELETE as deleteNotebook, PATCH as patchNotebook } from '@/app/api/v1/notebooks/[id]/route';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import {
  checkListedSchema,
  instanceStateSchema,
  notebookCheckSchema,
  type CalibrationResult,
  type NotebookCheck,
} from '@/lib/schemas';
import { commitBlock, commitResult, renewCheck } from '@/lib/services/check-lease';
import { readQueue, takeNext } from '@/lib/services/fit-queue';
import { Check, CheckBlock, FitLimit, MeasurementVersion, Notebook, User } from '@/models';
import { call, closeConnections, createMember, createToken, createUser, errorOf } from './harness';
import {
  background,
  buildWorker,
  endWorkers,
  oneField,
  openDesk,
  openNotebook,
  startWorker,
  type Desk,
} from './sampling';

let desk: Desk;
beforeAll(async () => {
  database();
  await buildWorker();
  desk = await openDesk();
});
afterAll(async () => {
  await endWorkers();
  await FitLimit.destroy({ where: {} });
  await closeQueue();
  await closeConnections();
});

/** A mass that is narrowly known, so that a data set takes little. */
const quick = { mu1: { kind: 'uniform', lo: 2, hi: 3 } };

const ask = (notebook: string, json: unknown, wait = 60) =>
  call(startCheck, { token: desk.token, params: { id: notebook }, json, path: `/checks?wait=${wait}` });

async function begun(notebook: string, json: unknown): Promise<NotebookCheck> {
  const answer = await ask(notebook, json, 0);
  expect(answer.status).toBe(202);
  return notebookCheckSchema.parse(await answer.json());
}

async function read(id: string): Promise<NotebookCheck> {
  const answer = await call(readCheck, { token: desk.token, params: { id } });
  expect(answer.status).toBe(200);
  return notebookCheckSchema.parse(await answer.json());
}

async function when(id: string, wanted: (check: NotebookCheck) => boolean): Promise<NotebookCheck> {
  const until = Date.now() + 120_000;
  for (;;) {
    const check = await read(id);
    if (wanted(check)) return check;
    if (Date.now() > until)
      throw new Error(`The check is ${check.status} at ${check.done}: ${check.message}`);
    await sleep(40);
  }
}

const ended = (id: string): Promise<NotebookCheck> => when(id, ({ status }) => status === 'done');
const stop = async (id: string) =>
  notebookCheckSchema.parse(
    await (await call(stopCheck, { method: 'POST', token: desk.token, params: { id } })).json(),
  );

describe('a check of calibration', () => {
  beforeAll(() => void startWorker());

  it('answers with ranks, bands, coverage and verdict, and with the same when asked again', async () => {
    const notebook = await openNotebook(desk, { template: background });
    const answer = await ask(notebook, { datasets: 50, draws: 19, seed: 7 });
    expect(answer.status).toBe(200);
    const check = notebookCheckSchema.parse(await answer.json());
    expect(check).toMatchObject({ status: 'done', number: 1, done: 50, progress: 1, revision: 1 });
    const result = check.result as CalibrationResult;
    expect(Object.keys(result.ranks)).toEqual(['log likelihood', 'c1', 'c2']);
    for (const { name, bars, counts } of result.quantities) {
      const ranks = result.ranks[name];
      expect(ranks).toHaveLength(50);
      expect(ranks.every((rank) => rank >= 0 && rank <= 19)).toBe(true);
      // With 20 ranks and 20 bars, each bar is one rank.
      expect(bars).toEqual(Array.from({ length: 20 }, (_, r) => ranks.filter((rank) => rank === r).length));
      expect(counts.at(-1)).toBe(50 - bars[19]);
    }
    expect(result.coverage.map(({ name, level }) => `${name} ${level}`)).toHaveLength(8);
    expect(result.unmixed).toEqual([]);
    expect(check.calibrated).toBe(result.calibrated);
    expect(check.verdict).toMatch(/^Calibrated within the band/);
    const again = await ask(notebook, { datasets: 50, draws: 19, seed: 7 });
    expect(notebookCheckSchema.parse(await again.json())).toEqual(check);
    const list = await call(listChecks, { token: desk.token, params: { id: notebook } });
    expect(checkListedSchema.array().parse(await list.json())).toMatchObject([{ id: check.id, done: 50 }]);
    const other = notebookCheckSchema.parse(
      await (await ask(notebook, { datasets: 50, draws: 19, seed: 8 })).json(),
    );
    expect(other.number).toBe(2);
    expect(other.result?.ranks).not.toEqual(result.ranks);
  });

  it('is refused with the place where its settings are bad, and in an archived notebook', async () => {
    const notebook = await openNotebook(desk, { template: background });
    for (const [body, path] of [
      [{ datasets: 49 }, 'datasets'],
      [{ datasets: 1001 }, 'datasets'],
      [{ draws: 100 }, 'draws'],
      [{ draws: 419 }, 'draws'],
      [{ seed: -1 }, 'seed'],
      [{ kind: 'injection' }, 'kind'],
    ] as const) {
      const { status, details } = await errorOf(await ask(notebook, body));
      expect([status, details?.[0]]).toMatchObject([422, { path }]);
    }
    const { token } = await createMember(desk.group, 'lead');
    await call(archive, { method: 'POST', token, params: { id: notebook } });
    expect((await errorOf(await ask(notebook, {}))).status).toBe(409);
    expect(await Check.count({ where: { notebookId: notebook } })).toBe(0);
  });

  it('says why it failed', async () => {
    const notebook = await openNotebook(desk, { template: background });
    const { measurementVersionId } = await Notebook.findByPk(notebook, { rejectOnEmpty: true });
    const { rows } = await MeasurementVersion.findByPk(measurementVersionId, { rejectOnEmpty: true });
    const covariance = Buffer.alloc(8 * rows * rows);
    await endWorkers();
    const { id } = await begun(notebook, { datasets: 50, draws: 19 });
    await MeasurementVersion.update({ covariance }, { where: { id: measurementVersionId } });
    startWorker();
    const failed = await when(id, ({ endedAt }) => endedAt !== null);
    expect([failed.status, failed.done, failed.result]).toEqual(['failed', 0, null]);
    expect(failed.message).toMatch(/covariance .*not positive definite/i);
    expect(failed.endedAt).not.toBeNull();
  });

  it('goes with its notebook, and is of the settings that stood when it was asked for', async () => {
    const notebook = await openNotebook(desk, { template: background });
    const body = { datasets: 50, draws: 19 };
    const first = notebookCheckSchema.parse(await (await ask(notebook, body)).json());
    const json = { revision: 1, priors: { c1: { kind: 'normal', mean: 0, sd: 0.5 } } };
    const patched = await call(patchNotebook, {
      method: 'PATCH',
      token: desk.token,
      params: { id: notebook },
      json,
    });
    expect(patched.status).toBe(200);
    const second = notebookCheckSchema.parse(await (await ask(notebook, body)).json());
    expect([first.revision, second.revision]).toEqual([1, 2]);
    expect(second.request.priors.c1).toEqual(json.priors.c1);
    const { token } = await createMember(desk.group, 'lead');
    const deleted = await call(deleteNotebook, { method: 'DELETE', token, params: { id: notebook } });
    expect(deleted.status).toBe(200);
    expect(await Check.count({ where: { notebookId: notebook } })).toBe(0);
    expect(await CheckBlock.count({ where: { checkId: first.id } })).toBe(0);
  });
});

describe('the result of a check', () => {
  const body = { datasets: 50, draws: 19, seed: 3 };

  it('has the same bytes from one worker of one thread, two workers after a kill -9, and after a stop', async () => {
    await endWorkers();
    const plain = await openNotebook(desk, { template: oneField, priors: quick });
    startWorker({ BEATNOTE_THREADS: '1' });
    const undisturbed = await ended((await begun(plain, body)).id);
    await endWorkers();

    const killed = await openNotebook(desk, { template: oneField, priors: quick });
    const { id } = await begun(killed, body);
    const first = startWorker({ BEATNOTE_THREADS: '2' });
    await when(id, ({ done }) => done >= 10);
    await first.kill();
    const kept = await CheckBlock.findAll({ where: { checkId: id }, order: [['id', 'ASC']] });
    const running = await read(id);
    expect(running.status).toBe('running');
    expect(running.done).toBe(5 * kept.length);
    startWorker({ BEATNOTE_THREADS: '1' });
    startWorker({ BEATNOTE_THREADS: '2' });
    const resumed = await ended(id);
    const blocks = await CheckBlock.findAll({ where: { checkId: id }, order: [['id', 'ASC']] });
    expect(blocks.slice(0, kept.length).map((block) => block.id)).toEqual(kept.map((block) => block.id));
    expect(blocks.map((block) => block.first).sort((a, b) => a - b)).toEqual(
      Array.from({ length: 10 }, (_, block) => 5 * block),
    );

    const halted = await openNotebook(desk, { template: oneField, priors: quick });
    const third = await begun(halted, body);
    await when(third.id, ({ done }) => done > 0);
    await stop(third.id);
    const stopped = await when(third.id, ({ status }) => status !== 'running');
    expect(stopped).toMatchObject({ status: 'stopped', result: null, verdict: null });
    expect(stopped.done).toBeLessThan(50);
    expect((await stop(third.id)).done).toBe(stopped.done);
    const goesOn = await begun(halted, body);
    expect([goesOn.id, goesOn.done]).toEqual([third.id, stopped.done]);
    await ended(third.id);

    const stored = await Check.findAll({
      where: { id: [undisturbed.id, id, third.id] },
      attributes: ['id', 'result', 'epoch'],
    });
    expect(new Set(stored.map(({ result }) => result)).size).toBe(1);
    expect(stored.find((each) => each.id === id)?.epoch).toBe(2);
    expect(resumed.result).toEqual(undisturbed.result);
    await endWorkers();
  });
});

describe('the turn of a check', () => {
  it('is one of its group’s, counted in its limit, and told as a place in the queue', async () => {
    await endWorkers();
    const own = await openDesk();
    const notebook = await openNotebook(own, { template: background });
    const post = async (seed: number) =>
      notebookCheckSchema.parse(
        await (
          await call(startCheck, {
            token: own.token,
            params: { id: notebook },
            json: { seed },
            path: '/checks?wait=0',
          })
        ).json(),
      );
    await FitLimit.upsert({
      scope: own.group,
      fits: 1,
      setBy: (await createUser()).userId,
      setAt: new Date(),
    });
    const [one, two] = [await post(1), await post(2)];
    expect(two.message).toMatch(/^Second in the queue/);
    const taken = await takeNext(60_000);
    expect(taken).toMatchObject({ kind: 'check', checkId: one.id });
    expect((await readQueue()).loads.get(own.group)).toMatchObject({ running: 1, limit: 1 });
    expect(await takeNext(60_000)).toBeNull();
    await expectQueued(one, two);
    const stopped = await call(stopCheck, { method: 'POST', token: own.token, params: { id: two.id } });
    expect(notebookCheckSchema.parse(await stopped.json())).toMatchObject({ status: 'stopped', done: 0 });
    await Check.update({ leaseUntil: new Date(0) }, { where: { id: one.id } });
    const again = await takeNext(60_000);
    expect(again).toEqual({ kind: 'check', checkId: one.id, epoch: 2 });

    // The worker that held it first comes back late, and writes nothing.
    const late = { checkId: one.id, epoch: 1 };
    expect(await renewCheck(late, 1000)).toBeNull();
    expect(await commitBlock(late, 0, [], 1)).toBeNull();
    expect(await commitResult(late, {} as CalibrationResult)).toBe(false);
    expect(await CheckBlock.count({ where: { checkId: one.id } })).toBe(0);
    const found = [{ ranks: {}, covered: {}, made: 1, ess: 1, reached: true }];
    const holds = { checkId: one.id, epoch: 2 };
    expect(await commitBlock(holds, 0, found, 1500)).toBe(false);
    expect(await commitBlock(holds, 0, found, 1500)).toBe(false);
    expect(await read1(own.token, one.id)).toMatchObject({ done: 1, secondsLeft: 1.5 * 199 });
    await Check.update({ status: 'failed' }, { where: { id: one.id } });
  });
});

/** What a site administrator sees of the two: one held by a worker, one that waits. */
async function expectQueued(one: NotebookCheck, two: NotebookCheck): Promise<void> {
  const admin = await createUser();
  await User.update({ siteAdmin: true }, { where: { id: admin.userId } });
  const answer = await call(readState, { token: await createToken(admin) });
  const { queue } = instanceStateSchema.parse(await answer.json());
  const own = queue.checks.filter(({ checkId }) => [one.id, two.id].includes(checkId));
  expect(own).toMatchObject([
    { checkId: one.id, number: 1, held: true, status: 'running' },
    { checkId: two.id, number: 2, held: false, status: 'queued' },
  ]);
  expect(queue.running).toBeGreaterThanOrEqual(1);
}

async function read1(token: string, id: string): Promise<NotebookCheck> {
  return notebookCheckSchema.parse(await (await call(readCheck, { token, params: { id } })).json());
}
