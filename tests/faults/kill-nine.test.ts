import { setTimeout as sleep } from 'node:timers/promises';
import seedrandom from 'seedrandom';
import { afterAll, beforeAll, describe, expect } from 'vitest';
import { Fit } from '@/models';
import { endWorkers, oneField, startWorker } from '../integration/sampling';
import { proof } from '../proofs/proof';
import { Disturbed } from './disturbed';

let run: Disturbed;
beforeAll(async () => {
  run = await Disturbed.run(oneField, { seed: 'killed', maxDraws: 4000, target: { ess: 1e9 } });
});
afterAll(() => Disturbed.close());

/**
 * From when a kill's moment is counted, in turn, and up to how many milliseconds later it comes: from the start of the process,
 * which may not have seen the fit yet; from when this worker holds the fit; from its first commit.
 */
const moments = [
  { from: 'start', within: 3_000 },
  { from: 'hold', within: 1_500 },
  { from: 'commit', within: 1_000 },
] as const;
type From = (typeof moments)[number]['from'];

/** Waits until the worker that was started last has come so far with the fit, or the fit has ended. */
async function comeTo(from: From, id: string, before: { epoch: number; draws: number }): Promise<void> {
  if (from === 'start') return;
  await expect
    .poll(
      async () => {
        const { epoch, draws, endedAt } = await Fit.findByPk(id, { rejectOnEmpty: true });
        if (endedAt !== null) return true;
        return epoch > before.epoch && (from === 'hold' || draws > before.draws);
      },
      { timeout: 60_000, interval: 20 },
    )
    .toBe(true);
}

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
      const kills: { from: From; milliseconds: number; draws: number; held: boolean }[] = [];
      while (kills.length < size) {
        const id = fits[fits.length - 1];
        const before = await Fit.findByPk(id, { rejectOnEmpty: true });
        const { from, within } = moments[kills.length % moments.length];
        const worker = startWorker();
        await comeTo(from, id, { epoch: before.epoch, draws: before.draws });
        const milliseconds = Math.round(random() * within);
        await sleep(milliseconds);
        await worker.kill();
        const fit = await Fit.findByPk(id, { rejectOnEmpty: true });
        const held = fit.epoch > before.epoch;
        if (fit.endedAt === null) kills.push({ from, milliseconds, draws: fit.draws, held });
        else fits.push(await run.start());
      }
      const holds = await Promise.all(fits.map(async (id) => (await Fit.findByPk(id))?.epoch));
      record({ kills, fits: fits.length, holdsBeforeTheLast: holds });
      startWorker();
      for (const id of fits) await run.expectUndisturbed(id);
      await endWorkers();
      expect(kills).toHaveLength(size);
      // Two of three kills by their construction: of a worker that held the fit, and one of three amid its commits.
      for (const { from, held, draws } of kills) {
        if (from !== 'start') expect(held).toBe(true);
        if (from === 'commit') expect(draws).toBeGreaterThan(0);
      }
    },
  );
});
