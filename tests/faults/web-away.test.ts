import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { setTimeout as sleep } from 'node:timers/promises';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect } from 'vitest';
import { Fit } from '@/models';
import { config } from '@/lib/config';
import { createdSchema, fitSchema } from '@/lib/schemas';
import { background, drawsOf, endWorkers, samplesOf, startWorker } from '../integration/sampling';
import { proof } from '../proofs/proof';
import { Disturbed } from './disturbed';

const root = fileURLToPath(new URL('../../', import.meta.url));
const running = new Set<ChildProcess>();

let run: Disturbed;
beforeAll(async () => {
  run = await Disturbed.run(background, { seed: 'unseen', maxDraws: 16_000, target: { ess: 1e9 } });
});
afterAll(async () => {
  for (const child of running) child.kill('SIGKILL');
  await endWorkers();
  await Disturbed.close();
});

/** A process that serves the API; returns how to kill -9 it. */
async function startApi(): Promise<() => Promise<void>> {
  const child = spawn(process.execPath, ['--import', 'tsx', 'tests/faults/api-process.ts'], {
    cwd: root,
    env: process.env,
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  running.add(child);
  const ended = once(child, 'exit');
  const failed = ended.then(([code]) => Promise.reject(new Error(`The API ended with ${code}.`)));
  // Its end after that is what the tests want.
  failed.catch(() => undefined);
  await Promise.race([once(child.stdout, 'data'), failed]);
  return async () => {
    child.kill('SIGKILL');
    await ended;
    running.delete(child);
  };
}

function ask(path: string, json?: unknown): Promise<Response> {
  const headers = { authorization: `Bearer ${run.desk.token}`, 'content-type': 'application/json' };
  const sent = json === undefined ? {} : { method: 'POST', body: JSON.stringify(json) };
  return fetch(`${config().url}/api/v1${path}`, { headers, ...sent });
}

const readFit = async (id: string) => fitSchema.parse(await (await ask(`/fits/${id}`)).json());

/** Reads a stream of events until one says that there are draws; what is left of it. */
async function untilDraws(stream: AsyncIterator<Uint8Array>): Promise<AsyncIterator<Uint8Array>> {
  let text = '';
  while (!/"(warmup|draws)":[1-9]/.test(text)) {
    const { done, value } = await stream.next();
    if (done) throw new Error(`The stream ended without a draw: ${text}`);
    text += Buffer.from(value).toString();
  }
  return stream;
}

/**
 * The API runs in a process of its own here, by the product's own handlers, and is killed: shown is that a worker needs nothing
 * of it, that nothing it held (a stream, transactions, subscriptions) hinders the fit, and that one which comes later knows
 * all. Not shown is what belongs to a built instance: that the supervisor starts Next's server again, that an open page says in
 * a plain line that it is cut off, and that it follows the fit again without a reload.
 */
describe('a fit during which the API is away', () => {
  proof(
    {
      name: 'web-away',
      claim:
        'a fit whose API process is killed while it is watched goes on meanwhile and ends by itself, byte-identical; the next process answers with its state and samples',
      unit: 'seconds away',
      gate: 3,
      full: 60,
      seed: 1,
      timeout: 900_000,
    },
    async ({ size, record }) => {
      const kill = await startApi();
      startWorker();
      const { id } = createdSchema.parse(
        await (await ask(`/notebooks/${run.notebook}/fits`, run.settings)).json(),
      );
      const events = await ask(`/fits/${id}/events`);
      const body = events.body as unknown as AsyncIterable<Uint8Array>;
      const stream = await untilDraws(body[Symbol.asyncIterator]());
      await kill();
      await expect(ask(`/fits/${id}`)).rejects.toThrow('fetch failed');
      await expect(
        (async () => {
          while (!(await stream.next()).done);
        })(),
      ).rejects.toThrow();
      const before = await Fit.findByPk(id, { rejectOnEmpty: true });
      expect(before.endedAt).toBeNull();
      await sleep(size * 1000);
      const meanwhile = await Fit.findByPk(id, { rejectOnEmpty: true });
      record({
        drawsBefore: before.draws,
        drawsMeanwhile: meanwhile.draws - before.draws,
        statusMeanwhile: meanwhile.status,
      });
      expect(meanwhile.draws).toBeGreaterThan(before.draws);

      await startApi();
      expect(drawsOf(await readFit(id))).toBeGreaterThanOrEqual(meanwhile.draws);
      await run.expectUndisturbed(id);
      expect((await readFit(id)).status).toBe('budget-spent');
      const samples = await ask(`/fits/${id}/samples?format=csv`);
      expect(await samples.text()).toBe(await samplesOf(run.desk, id));
    },
  );
});
