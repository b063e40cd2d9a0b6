import { setTimeout as sleep } from 'node:timers/promises';
import { QueryTypes } from 'sequelize';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { database } from '@/lib/db';
import { closeQueue } from '@/lib/jobs';
import { redis } from '@/lib/redis';
import { closeConnections } from '../integration/harness';
import {
  background,
  buildWorker,
  drawsOf,
  endWorkers,
  fitEnded,
  fitOf,
  fitWhen,
  openDesk,
  openNotebook,
  samplesOf,
  startFit,
  startWorker,
  type Desk,
} from '../integration/sampling';

let desk: Desk;
let notebook: string;
let undisturbed: string;
const settings = { seed: 'cut', maxDraws: 8000, target: { ess: 1e9 } };

beforeAll(async () => {
  database();
  await buildWorker();
  desk = await openDesk();
  notebook = await openNotebook(desk, { template: background });
  startWorker();
  const id = await startFit(desk, notebook, settings);
  await fitEnded(desk, id);
  undisturbed = await samplesOf(desk, id);
  await endWorkers();
});
afterEach(endWorkers);
afterAll(async () => {
  await closeQueue();
  await closeConnections();
});

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
    const id = await startFit(desk, notebook, settings);
    startWorker();
    await fitWhen(desk, id, (fit) => drawsOf(fit) > 0);
    let cut = 0;
    for (let i = 0; i < 12; i++) {
      cut += await cutDatabase();
      await sleep(70);
    }
    expect(cut).toBeGreaterThan(3);
    expect((await fitOf(desk, id)).endedAt).toBeNull();
    expect((await fitEnded(desk, id)).status).toBe('budget-spent');
    expect(await samplesOf(desk, id)).toBe(undisturbed);
  });

  it('goes on when its connections to Redis are cut', async () => {
    const id = await startFit(desk, notebook, settings);
    startWorker();
    await fitWhen(desk, id, (fit) => drawsOf(fit) > 0);
    for (let i = 0; i < 5; i++) {
      await redis().call('CLIENT', 'KILL', 'TYPE', 'normal', 'SKIPME', 'yes');
      await sleep(100);
    }
    expect((await fitEnded(desk, id)).status).toBe('budget-spent');
    expect(await samplesOf(desk, id)).toBe(undisturbed);
  });
});
