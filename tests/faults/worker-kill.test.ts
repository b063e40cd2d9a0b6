import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { Fit } from '@/models';
import { database } from '@/lib/db';
import { closeQueue, liveWorkers } from '@/lib/jobs';
import { redis } from '@/lib/redis';
import { closeConnections } from '../integration/harness';
import {
  buildWorker,
  drawsOf,
  endWorkers,
  fitEnded,
  fitOf,
  fitWhen,
  oneField,
  openDesk,
  openNotebook,
  samplesOf,
  startFit,
  startWorker,
  type Desk,
} from '../integration/sampling';

let desk: Desk;
let notebook: string;
let undisturbed: { csv: string; diagnostics: unknown; gate: unknown; history: unknown };
const settings = { seed: 'killed', maxDraws: 2600, target: { ess: 1e9 } };

beforeAll(async () => {
  database();
  await buildWorker();
  desk = await openDesk();
  notebook = await openNotebook(desk, { template: oneField });
  const worker = startWorker();
  const id = await startFit(desk, notebook, settings);
  const { diagnostics, gate, history } = await fitEnded(desk, id);
  undisturbed = { csv: await samplesOf(desk, id), diagnostics, gate, history };
  await worker.stop();
});
afterEach(endWorkers);
afterAll(async () => {
  await closeQueue();
  await closeConnections();
});

async function expectUndisturbed(id: string): Promise<void> {
  const fit = await fitEnded(desk, id);
  expect(fit.status).toBe('budget-spent');
  const { diagnostics, gate, history } = fit;
  expect({ csv: await samplesOf(desk, id), diagnostics, gate, history }).toEqual(undisturbed);
}

describe('a fit whose worker is killed', () => {
  it('three times, goes on by itself each time and ends with the bytes and diagnostics of an undisturbed one', async () => {
    const id = await startFit(desk, notebook, settings);
    let reached = 0;
    for (let kill = 0; kill < 3; kill++) {
      const worker = startWorker();
      await fitWhen(desk, id, (each) => drawsOf(each) > reached);
      await worker.kill();
      const fit = await fitOf(desk, id);
      expect(fit.endedAt).toBeNull();
      reached = drawsOf(fit);
    }
    startWorker();
    await expectUndisturbed(id);
    expect((await Fit.findByPk(id))?.epoch).toBe(4);
  });

  it('is taken up by a second worker that was there all along, with another number of threads', async () => {
    const id = await startFit(desk, notebook, settings);
    const first = startWorker({ BEATNOTE_THREADS: '3' });
    await fitWhen(desk, id, (fit) => drawsOf(fit) > 0);
    startWorker({ BEATNOTE_THREADS: '1' });
    await first.kill();
    await expectUndisturbed(id);
  });
});

describe('a fit whose worker is asked to stop', () => {
  it('is given back at the end of a block, and goes on from there', async () => {
    const id = await startFit(desk, notebook, settings);
    const worker = startWorker();
    await fitWhen(desk, id, (fit) => drawsOf(fit) > 0);
    expect(await liveWorkers()).toBeGreaterThanOrEqual(1);
    expect(await worker.stop()).toBe(0);
    const row = await Fit.findByPk(id, { rejectOnEmpty: true });
    expect(row.leaseUntil).toBeNull();
    expect(['warming-up', 'sampling']).toContain(row.status);
    startWorker({ BEATNOTE_THREADS: '1' });
    await expectUndisturbed(id);
  });
});

describe('a queue that forgets everything', () => {
  it('in mid-fit, doesn’t keep it from its end', async () => {
    const id = await startFit(desk, notebook, settings);
    startWorker();
    await fitWhen(desk, id, (fit) => drawsOf(fit) > 0);
    await redis().flushall();
    await expectUndisturbed(id);
  });

  it('before a worker has seen the fit, doesn’t keep it from being found', async () => {
    const id = await startFit(desk, notebook, settings);
    await redis().flushall();
    startWorker();
    await expectUndisturbed(id);
  });
});
