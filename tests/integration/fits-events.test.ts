import { afterAll, afterEach, beforeAll, describe, expect, it, vi } from 'vitest';
import { Check, Fit, MeasurementVersion, Membership, User } from '@/models';
import { GET as events } from '@/app/api/v1/fits/[id]/events/route';
import { database } from '@/lib/db';
import { closeQueue, fitChannel } from '@/lib/jobs';
import { subscribe } from '@/lib/redis';
import { fitEventSchema, type FitEvent } from '@/lib/schemas';
import { authorise, authoriseWatcher } from '@/lib/services/access';
import { readPoints, writeDoubles } from '@/lib/services/inference-spec';
import { call, closeConnections, createMember } from './harness';
import {
  background,
  buildWorker,
  endWorkers,
  fitEnded,
  fitOf,
  oneField,
  openDesk,
  openNotebook,
  resumeFit,
  startFit,
  startWorker,
  stopFit,
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
  await closeQueue();
  await closeConnections();
});

interface Arrival {
  at: number;
  event: FitEvent;
}

/** Reads a stream to its end; every frame of ours is one event named `fit` with one line of data. */
async function readEvents(id: string, token = desk.token): Promise<Arrival[]> {
  const answer = await call(events, { params: { id }, token });
  expect(answer.headers.get('content-type')).toContain('text/event-stream');
  const arrivals: Arrival[] = [];
  const decoder = new TextDecoder();
  let text = '';
  for await (const chunk of answer.body as unknown as AsyncIterable<Uint8Array>) {
    text += decoder.decode(chunk, { stream: true });
    const frames = text.split('\n\n');
    text = frames.pop() ?? '';
    for (const frame of frames) {
      const match = /^event: fit\ndata: (.*)$/.exec(frame);
      if (match) arrivals.push({ at: Date.now(), event: fitEventSchema.parse(JSON.parse(match[1])) });
    }
  }
  return arrivals;
}

const drawsOf = ({ progress }: FitEvent) => progress.warmup + progress.draws;

describe('the events of a fit', () => {
  it('begin with its state, follow every commit within a second, and end with the fit', async () => {
    // Whatever other tests left in the queue is taken out of it.
    const gone = { status: 'stopped', endedAt: new Date() } as const;
    await Fit.update(gone, { where: { status: 'queued' } });
    await Check.update(gone, { where: { status: 'queued' } });
    const notebook = await openNotebook(desk, { template: oneField });
    const id = await startFit(desk, notebook, { seed: 1, maxDraws: 1200, target: { ess: 1e9 } });
    const commits: { at: number; draws: number }[] = [];
    const unsubscribe = await subscribe(fitChannel(id), (draws) => {
      commits.push({ at: Date.now(), draws: Number(draws) });
    });
    const reading = readEvents(id);
    startWorker();
    const arrivals = await reading;
    unsubscribe();

    expect(arrivals[0].event).toMatchObject({ status: 'queued', queue: { place: 1 } });
    expect(new Set(arrivals.map(({ event }) => event.status))).toContain('warming-up');
    const last = arrivals[arrivals.length - 1].event;
    expect(last).toMatchObject({ status: 'budget-spent', progress: { draws: 1200, secondsLeft: 0 } });
    expect(last.diagnostics.length).toBeGreaterThan(0);
    expect(await fitOf(desk, id)).toMatchObject(last);

    expect(commits.length).toBeGreaterThan(3);
    for (const commit of commits) {
      // A reader who looked by itself in between may have it before it is told.
      const seen = arrivals.find(({ event }) => event.status !== 'queued' && drawsOf(event) >= commit.draws);
      expect(seen && seen.at - commit.at).toBeLessThan(1000);
    }
    for (let i = 1; i < arrivals.length; i++) {
      expect(drawsOf(arrivals[i].event)).toBeGreaterThanOrEqual(drawsOf(arrivals[i - 1].event));
    }
  });

  it('of a fit that has ended are its last state alone', async () => {
    const notebook = await openNotebook(desk, { template: background });
    const id = await startFit(desk, notebook, { seed: 1, maxDraws: 200, replicas: 2 });
    await fitEnded(desk, id);
    const arrivals = await readEvents(id);
    expect(arrivals.map(({ event }) => event.status)).toEqual(['budget-spent']);
  });
});

describe('the events of a fit that many watch', () => {
  it('cost one look at the group for all of them', async () => {
    await endWorkers();
    const notebook = await openNotebook(desk, { template: background });
    const id = await startFit(desk, notebook, { seed: 1 });
    const member = await createMember(desk.group, 'referee');
    const access = await authorise(member.user, 'fit', id, 'fit.read');
    const query = vi.spyOn(database(), 'query');
    const accesses = await Promise.all(
      Array.from({ length: 30 }, () => authoriseWatcher(member.user, 'fit', id, 'fit.read')),
    );
    expect(query.mock.calls.length).toBeLessThanOrEqual(2);
    query.mockRestore();
    expect(new Set(accesses.map(({ role }) => role))).toEqual(new Set([access.role]));
    await stopFit(desk, id);
  });

  it.each(['removed', 'shut out'] as const)('end within seconds for somebody who is %s', async (how) => {
    const notebook = await openNotebook(desk, { template: background });
    const id = await startFit(desk, notebook, { seed: 1 });
    const guest = await createMember(desk.group, 'referee');
    let ended = 0;
    const reading = readEvents(id, guest.token).then((arrivals) => {
      ended = Date.now();
      return arrivals;
    });
    await expect.poll(async () => (await fitOf({ ...desk, token: guest.token }, id)).status).toBe('queued');
    const { userId } = guest.user;
    if (how === 'removed') await Membership.destroy({ where: { userId } });
    else await User.update({ disabledAt: new Date() }, { where: { id: userId } });
    const shut = Date.now();
    expect((await reading).map(({ event }) => event.status)).toEqual(['queued']);
    expect(ended - shut).toBeLessThan(5_000);
    await stopFit(desk, id);
  });
});

describe('a fit that can’t be sampled', () => {
  let notebook: string;
  beforeAll(async () => {
    await endWorkers();
    notebook = await openNotebook(desk, { template: background });
  });

  /** A fit of a measurement whose numbers are no more what was uploaded. */
  async function spoiltFit(value: number): Promise<string> {
    const id = await startFit(desk, notebook, { seed: 1 });
    const { measurementVersionId } = await Fit.findByPk(id, { rejectOnEmpty: true });
    const version = await MeasurementVersion.findByPk(measurementVersionId, { rejectOnEmpty: true });
    const { points } = version;
    mend = () => version.update({ points });
    const { kappa, kappaLo, kappaHi, S } = readPoints(version);
    const edges = [kappaLo ?? kappa, kappaHi ?? kappa];
    await version.update({ points: writeDoubles(kappa, ...edges, S.fill(value)) });
    return id;
  }

  let mend: (() => Promise<unknown>) | undefined;
  /** What isn't a measurement any more is refused at the start of a fit already. */
  afterEach(async () => {
    await mend?.();
    mend = undefined;
  });

  it('fails with the reason and the remedy, and can be resumed', async () => {
    const id = await spoiltFit(NaN);
    startWorker();
    const fit = await fitEnded(desk, id);
    expect(fit.status).toBe('failed');
    expect(fit.message).toMatch(/^Data value 0 is not a finite number: /);
    expect(fit.may).toContain('fit.resume');
    expect(fit.may).not.toContain('fit.extend');
    expect((await resumeFit(desk, id)).queue).not.toBeNull();
    expect((await fitEnded(desk, id)).status).toBe('failed');
    await endWorkers();
  });

  it('fails in the sampler’s words where no draw from the prior can be started from', async () => {
    const id = await spoiltFit(1e200);
    startWorker();
    const fit = await fitEnded(desk, id);
    expect(fit.status).toBe('failed');
    expect(fit.message).toMatch(/^None of 1000 draws from the prior has a finite likelihood: /);
    await endWorkers();
  });

  it('fails once and for all where its states are lost', async () => {
    const id = await startFit(desk, notebook, { seed: 1 });
    await Fit.update({ draws: 500 }, { where: { id } });
    startWorker();
    const fit = await fitEnded(desk, id);
    expect(fit).toMatchObject({ status: 'failed', message: expect.stringContaining('can’t be read') });
  });
});
