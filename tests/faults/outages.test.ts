import { setTimeout as sleep } from 'node:timers/promises';
import { afterAll, afterEach, beforeAll, describe, expect } from 'vitest';
import { GET as readFit } from '@/app/api/v1/fits/[id]/route';
import { GET as readHealth } from '@/app/api/v1/health/route';
import { redis } from '@/lib/redis';
import { call, errorOf } from '../integration/harness';
import { background, drawsOf, endWorkers, fitOf, fitWhen, startWorker } from '../integration/sampling';
import { proof } from '../proofs/proof';
import { Disturbed } from './disturbed';
import { Gate } from './gate';

let run: Disturbed;
let gates: { database: Gate; redis: Gate; objects: Gate };

beforeAll(async () => {
  // Before anything is connected: this process and its workers reach the services through doors.
  gates = {
    database: await Gate.before(process.env.DATABASE_URL!),
    redis: await Gate.before(process.env.REDIS_URL!),
    objects: await Gate.before(process.env.S3_ENDPOINT!),
  };
  process.env.DATABASE_URL = gates.database.url;
  process.env.REDIS_URL = gates.redis.url;
  process.env.S3_ENDPOINT = gates.objects.url;
  run = await Disturbed.run(background, { seed: 'cut', maxDraws: 16_000, target: { ess: 1e9 } });
});
afterEach(endWorkers);
afterAll(async () => {
  await Disturbed.close();
  for (const gate of Object.values(gates)) await gate.away();
});

const healthOf = async () => (await (await call(readHealth)).json()) as Record<string, unknown>;

const outage = { unit: 'seconds away', gate: 3, full: 60, seed: 1, timeout: 900_000 } as const;

describe('a fit during which a service is away', () => {
  proof(
    {
      ...outage,
      name: 'database-away',
      claim:
        'a fit whose database goes away in mid-sampling ends by itself, byte-identical, and the API says what is the matter',
    },
    async ({ size, record }) => {
      const id = await run.start();
      startWorker();
      const before = drawsOf(await fitWhen(run.desk, id, (fit) => drawsOf(fit) > 0));
      await gates.database.away();
      await sleep(500);
      const said = await errorOf(await call(readFit, { params: { id }, token: run.desk.token }));
      expect(said).toMatchObject({ status: 503, code: 'unavailable' });
      expect(said.message).toMatch(/^The database is away/);
      expect(said.message).not.toMatch(/Sequelize|ECONN|127\.0\.0\.1|at /);
      expect(await healthOf()).toMatchObject({ status: 'degraded', database: 'away' });
      await sleep(size * 1000);
      await gates.database.back();
      const begun = performance.now();
      await fitWhen(run.desk, id, (fit) => drawsOf(fit) > before || fit.endedAt !== null);
      record({ drawsBefore: before, secondsUntilItWentOn: (performance.now() - begun) / 1000 });
      await run.expectUndisturbed(id);
    },
  );

  proof(
    {
      ...outage,
      name: 'redis-away',
      claim:
        'fits that are started before and while Redis is away and then empty end by themselves, byte-identical',
    },
    async ({ size, record }) => {
      const before = await run.start();
      startWorker();
      await fitWhen(run.desk, before, (fit) => drawsOf(fit) > 0);
      await gates.redis.away();
      const amid = await run.start();
      await fitWhen(run.desk, amid, (fit) => drawsOf(fit) > 0);
      expect(await healthOf()).toMatchObject({ status: 'degraded', queue: 'away', database: 'ok' });
      await sleep(size * 1000);
      const drawsAmid = drawsOf(await fitOf(run.desk, amid));
      await gates.redis.back();
      await fitWhen(run.desk, before, () => true);
      for (let tries = 0; tries < 50; tries++) {
        const flushed = await redis()
          .flushall()
          .then(
            () => true,
            () => false,
          );
        if (flushed) break;
        await sleep(100);
      }
      record({ drawsOfTheFitStartedMeanwhile: drawsAmid });
      await run.expectUndisturbed(before);
      await run.expectUndisturbed(amid);
    },
  );

  proof(
    {
      ...outage,
      name: 'objects-away',
      claim: 'a fit goes on and ends, byte-identical, while the object store is away',
    },
    async ({ size, record }) => {
      await gates.objects.away();
      const id = await run.start();
      startWorker();
      await fitWhen(run.desk, id, (fit) => drawsOf(fit) > 0);
      expect(await healthOf()).toMatchObject({ status: 'degraded', storage: 'away', database: 'ok' });
      await sleep(size * 1000);
      record({ statusMeanwhile: (await fitOf(run.desk, id)).status });
      await gates.objects.back();
      await run.expectUndisturbed(id);
    },
  );
});
