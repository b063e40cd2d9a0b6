import { setTimeout as sleep } from 'node:timers/promises';
import seedrandom from 'seedrandom';
import { afterAll, beforeAll, describe, expect } from 'vitest';
import { Fit } from '@/models';
import { drawsOf, endWorkers, fitOf, oneField, startWorker } from '../integration/sampling';
import { proof } from '../proofs/proof';
import { Disturbed } from './disturbed';

let run: Disturbed;
beforeAll(async () => {
  run = await Disturbed.run(oneField, { seed: 'killed', maxDraws: 4000, target: { ess: 1e9 } });
});
afterAll(() => Disturbed.close());

/** Milliseconds after its start up to which a worker lives: from before it has taken the fit to amid its commits. */
const longestLife = 6_000;

describe('workers that are killed', () => {
  proof(
    {
      name: 'kill-nine',
      claim: 'fits whose workers are killed by SIGKILL at random moments end by themselves, byte-identical',
      unit: 'kills of a worker while its fit is unfinished',
      gate: 3,
      full: 20,
      seed: 1945,
      timeout: 1_800_000,
    },
    async ({ size, seed, record }) => {
      const random = seedrandom(String(seed));
      const fits = [await run.start()];
      const kills: { milliseconds: number; draws: number }[] = [];
      while (kills.length < size) {
        const worker = startWorker();
        const milliseconds = Math.round(random() * longestLife);
        await sleep(milliseconds);
        await worker.kill();
        const fit = await fitOf(run.desk, fits[fits.length - 1]);
        if (fit.endedAt === null) kills.push({ milliseconds, draws: drawsOf(fit) });
        else fits.push(await run.start());
      }
      const holds = await Promise.all(fits.map(async (id) => (await Fit.findByPk(id))?.epoch));
      record({ kills, fits: fits.length, holdsBeforeTheLast: holds });
      startWorker();
      for (const id of fits) await run.expectUndisturbed(id);
      await endWorkers();
      expect(kills).toHaveLength(size);
    },
  );
});
