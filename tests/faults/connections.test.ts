import { setTimeout as sleep } from 'node:timers/promises';
import { QueryTypes } from 'sequelize';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { database } from '@/lib/db';
import { redis } from '@/lib/redis';
import { background, drawsOf, endWorkers, fitOf, fitWhen, startWorker } from '../integration/sampling';
import { Disturbed } from './disturbed';

let run: Disturbed;
beforeAll(async () => {
  run = await Disturbed.run(background, { seed: 'cut', maxDraws: 40_000, target: { ess: 1e9 } });
});
afterEach(endWorkers);
afterAll(() => Disturbed.close());

/** Breaks every connection to the database but those of this process's pool, in the middle of whatever they do. */
async function cutDatabase(): Promise<number> {
  const own = await database().query<{ id: number }>('SELECT CONNECTION_ID() AS id', {
    type: QueryTypes.SELECT,
  });
  const all = await database().query<{ id: number }>(
    'SELECT id FROM information_schema.processlist WHERE user = SUBSTRING_INDEX(CURRENT_USER(), "@", 1)',
    { type: QueryTypes.SELECT },
  );
  let cut = 0;
  for (const { id } of all) {
    if (id === own[0].id) continue;
    // It may have gone by itself meanwhile.
    await database()
      .query(`KILL CONNECTION ${Number(id)}`)
      .then(
        () => cut++,
        () => undefined,
      );
  }
  return cut;
}

describe('a fit during which the services break off', () => {
  it('loses and doubles no draw when its connections to the database are cut again and again', async () => {
    const id = await run.start();
    startWorker();
    await fitWhen(run.desk, id, (fit) => drawsOf(fit) > 0);
    let cut = 0;
    for (let i = 0; i < 12; i++) {
      cut += await cutDatabase();
      await sleep(70);
    }
    expect(cut).toBeGreaterThan(3);
    expect((await fitOf(run.desk, id)).endedAt).toBeNull();
    await run.expectUndisturbed(id);
  });

  it('goes on when its connections to Redis are cut', async () => {
    const id = await run.start();
    startWorker();
    await fitWhen(run.desk, id, (fit) => drawsOf(fit) > 0);
    for (let i = 0; i < 5; i++) {
      await redis().call('CLIENT', 'KILL', 'TYPE', 'normal', 'SKIPME', 'yes');
      await sleep(100);
    }
    await run.expectUndisturbed(id);
  });
});
