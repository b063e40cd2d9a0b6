import { setTimeout as sleep } from 'node:timers/promises';
import { endedStatuses, snapshotSchema } from '@/lib/schemas';
import { fitBlocks, servedRows } from '@/lib/services/fit-draws';
import { strideOf } from '@/lib/services/fit-schedule';
import { Fit } from '@/models';
import { newMeasures, type Summary } from './measures';
import { setStage } from './stage';
import { view } from './viewer';

export interface LoadSettings {
  origin: string;
  viewers: number;
  queued: number;
  /** Seconds for which the viewers look. */
  seconds: number;
  /** Seconds that the queued fits may take to their end afterwards; then they are stopped. */
  patience: number;
  say(line: string): void;
}

export interface LoadReport {
  viewers: number;
  queued: number;
  seconds: number;
  answers: Record<'page' | 'fit' | 'draws' | 'notebook' | 'lag', Summary>;
  events: { heard: number; backwards: number };
  fits: { ended: number; stopped: number };
  draws: { committed: number; found: number; lost: number };
}

/** Draws that a fit's row says were committed and that are stored, against those that are found in its blocks one by one. */
async function countDraws(fitId: string): Promise<{ committed: number; found: number }> {
  const fit = await Fit.findByPk(fitId, { rejectOnEmpty: true });
  const { warmup, replicas } = snapshotSchema.parse(fit.snapshot);
  const kept = Math.max(0, fit.draws - warmup);
  const stored = Math.min(fit.draws, warmup) + Math.ceil(kept / strideOf(kept));
  let found = 0;
  for (let replica = 0; replica < replicas; replica++) {
    const seen = new Set<number>();
    for await (const block of fitBlocks(fitId, replica, fit.draws)) {
      for (const { draw } of servedRows(block, { warmup, draws: fit.draws })) seen.add(draw);
    }
    found += seen.size;
  }
  return { committed: replicas * stored, found };
}

async function untilEnded(ids: readonly string[], seconds: number): Promise<boolean> {
  const until = Date.now() + seconds * 1000;
  for (;;) {
    const going = await Fit.count({ where: { id: [...ids], status: ['queued', 'warming-up', 'sampling'] } });
    if (going === 0) return true;
    if (Date.now() > until) return false;
    await sleep(500);
  }
}

/** Puts an instance under load and says how it bore it. Works on groups of its own, which are removed in the end. */
export async function runLoad(settings: LoadSettings): Promise<LoadReport> {
  const { origin, viewers, queued, seconds, patience, say } = settings;
  say(`Setting up ${viewers} viewers of one fit and ${queued} queued fits`);
  const stage = await setStage({ viewers, queued });
  try {
    const measures = newMeasures();
    const over = AbortSignal.timeout(seconds * 1000);
    say(`Looking for ${seconds} s`);
    const sights = await Promise.all(
      stage.viewers.map(({ cookie, token }, i) =>
        view(
          {
            origin,
            notebookId: stage.notebookId,
            fitId: stage.watchedId,
            cookie,
            token,
            pace: { page: 15_000, draws: 5_000 },
          },
          i / viewers,
          measures,
          over,
        ),
      ),
    );
    say('Waiting for the queued fits');
    await untilEnded(stage.queuedIds, patience);
    await stage.stopAll();
    const all = [stage.watchedId, ...stage.queuedIds];
    if (!(await untilEnded(all, 60))) throw new Error('A fit that was asked to stop runs on.');
    const draws = { committed: 0, found: 0 };
    for (const id of all) {
      const { committed, found } = await countDraws(id);
      draws.committed += committed;
      draws.found += found;
    }
    const statuses = await Fit.findAll({ where: { id: stage.queuedIds }, attributes: ['status'] });
    const stopped = statuses.filter(({ status }) => status === 'stopped').length;
    const ended = statuses.filter(({ status }) => endedStatuses.some((each) => each === status)).length;
    return {
      viewers,
      queued,
      seconds,
      answers: {
        page: measures.page.summary,
        fit: measures.fit.summary,
        draws: measures.draws.summary,
        notebook: measures.notebook.summary,
        lag: measures.lag.summary,
      },
      events: {
        heard: sights.reduce((sum, { events }) => sum + events, 0),
        backwards: sights.reduce((sum, { backwards }) => sum + backwards, 0),
      },
      fits: { ended: ended - stopped, stopped },
      draws: { ...draws, lost: draws.committed - draws.found },
    };
  } finally {
    await stage.stopAll();
    await stage.remove();
  }
}
