import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { Fit } from '@/models';
import { liveWorkers } from '@/lib/jobs';
import { redis } from '@/lib/redis';
import { drawsOf, endWorkers, fitOf, fitWhen, oneField, startWorker } from '../integration/sampling';
import { Disturbed } from './disturbed';

let run: Disturbed;
beforeAll(async () => {
  run = await Disturbed.run(oneField, { seed: 'killed', maxDraws: 2600, target: { ess: 1e9 } });
});
afterEach(endWorkers);
afterAll(() => Disturbed.close());

describe('a fit whose worker is killed', () => {
  it('three times, goes on by itself each time and ends with the bytes and diagnostics of an undisturbed one', async () => {
    const id = await run.start();
    let reached = 0;
    for (let kill = 0; kill < 3; kill++) {
      const worker = startWorker();
      await fitWhen(run.desk, id, (each) => drawsOf(each) > reached);
      await worker.kill();
      const fit = await fitOf(run.desk, id);
      expect(fit.endedAt).toBeNull();
      reached = drawsOf(fit);
    }
    startWorker();
    await run.expectUndisturbed(id);
    expect((await Fit.findByPk(id))?.epoch).toBe(4);
  });

  it('is taken up by a second worker that was there all along, with another number of threads', async () => {
    const id = await run.start();
    const first = startWorker({ BEATNOTE_THREADS: '3' });
    await fitWhen(run.desk, id, (fit) => drawsOf(fit) > 0);
    startWorker({ BEATNOTE_THREADS: '1' });
    await first.kill();
    await run.expectUndisturbed(id);
  });
});

describe('a fit whose worker is asked to stop', () => {
  it('is given back at the end of a block, and goes on from there', async () => {
    const id = await run.start();
    const worker = startWorker();
    await fitWhen(run.desk, id, (fit) => drawsOf(fit) > 0);
    expect(await liveWorkers()).toBeGreaterThanOrEqual(1);
    expect(await worker.stop()).toBe(0);
    const row = await Fit.findByPk(id, { rejectOnEmpty: true });
    expect(row.leaseUntil).toBeNull();
    expect(['warming-up', 'sampling']).toContain(row.status);
    startWorker({ BEATNOTE_THREADS: '1' });
    await run.expectUndisturbed(id);
  });
});

describe('a queue that forgets everything', () => {
  it('in mid-fit, doesn’t keep it from its end', async () => {
    const id = await run.start();
    startWorker();
    await fitWhen(run.desk, id, (fit) => drawsOf(fit) > 0);
    await redis().flushall();
    await run.expectUndisturbed(id);
  });

  it('before a worker has seen the fit, doesn’t keep it from being found', async () => {
    const id = await run.start();
    await redis().flushall();
    startWorker();
    await run.expectUndisturbed(id);
  });
});
