import { loadavg } from 'node:os';
import { setTimeout as sleep } from 'node:timers/promises';
import { endedStatuses, snapshotSchema } from '@/lib/schemas';
import { fitBlocks, servedRows } from '@/lib/services/fit-draws';
import { strideOf } from '@/lib/services/fit-schedule';
import { Fit } from '@/models';
import { Measure, newMeasures, type Summary } from './measures';
import { cpuReader, partNames, type Part } from './server-cpu';
import { setStage } from './stage';
import { ask, view, type Asked, type Sight } from './viewer';

export interface LoadSettings {
  origin: string;
  /** The state folder of the instance, for the processor time of its web server. */
  state: string;
  viewers: number;
  queued: number;
  /** Seconds for which the viewers look. */
  seconds: number;
  /** Mean seconds between two loads of the page by one viewer. */
  think: number;
  /** Seconds that the queued fits may take to their end afterwards; then they are stopped. */
  patience: number;
  say(line: string): void;
}

export interface LoadReport {
  viewers: number;
  queued: number;
  seconds: number;
  think: number;
  /** Milliseconds of the web server's processor time that one answer costs, asked for again and again by one person. */
  cost: Record<Asked, number>;
  /** Processor time while the viewers looked, as shares of one core. */
  busy: Record<Part, number>;
  /** Processes of the whole machine that wanted a core, on the average over a minute, when the viewers began and when they were done. */
  loadAverage: [number, number];
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

/** Answers of one kind that are weighed together: the kernel counts in steps of 10 ms. */
const weighed = 30;

/** What one answer costs the web server, less what it uses anyway; the first answers, which fill what is kept, don't count. */
async function weigh(sight: Sight, cpu: () => number): Promise<Record<Asked, number>> {
  const idle = { begun: performance.now(), cpu: cpu() };
  await sleep(2_000);
  const usedAnyway = (cpu() - idle.cpu) / (performance.now() - idle.begun);
  const one = async (what: Asked): Promise<number> => {
    const none = new Measure();
    for (let i = 0; i < 5; i++) await ask(sight, what, none);
    const begun = performance.now();
    const before = cpu();
    for (let i = 0; i < weighed; i++) await ask(sight, what, none);
    return (cpu() - before - usedAnyway * (performance.now() - begun)) / weighed;
  };
  return {
    page: await one('page'),
    fit: await one('fit'),
    draws: await one('draws'),
    notebook: await one('notebook'),
  };
}

async function untilDraws(id: string, seconds: number): Promise<void> {
  const until = Date.now() + 1000 * seconds;
  while (Date.now() < until) {
    if ((await Fit.findByPk(id, { attributes: ['draws'] }))?.draws) return;
    await sleep(200);
  }
  throw new Error('The fit that is to be watched made no draw: does a worker run?');
}

/** Puts an instance under load and says how it bore it. Works on groups of its own, which are removed in the end. */
export async function runLoad(settings: LoadSettings): Promise<LoadReport> {
  const { origin, viewers, queued, seconds, think, patience, say } = settings;
  const cpu = cpuReader(settings.state);
  say(`Setting up ${viewers} viewers of one fit and ${queued} queued fits`);
  const stage = await setStage({ viewers, queued });
  try {
    const sights = stage.viewers.map(({ cookie, token }): Sight => {
      return { origin, notebookId: stage.notebookId, fitId: stage.watchedId, cookie, token };
    });
    await untilDraws(stage.watchedId, 120);
    const measures = newMeasures();
    const over = AbortSignal.timeout(seconds * 1000);
    say(`Looking for ${seconds} s`);
    const begun = performance.now();
    const before = cpu();
    const loadBefore = loadavg()[0];
    const pace = { think: think * 1000, draws: 5_000 };
    const seen = await Promise.all(sights.map((sight, i) => view(sight, pace, i / viewers, measures, over)));
    const after = cpu();
    const passed = performance.now() - begun;
    const busy = Object.fromEntries(
      partNames.map((part) => [part, (after[part] - before[part]) / passed]),
    ) as Record<Part, number>;
    const loadAverage: [number, number] = [loadBefore, loadavg()[0]];
    say('Weighing single answers');
    const cost = await weigh(sights[0], () => cpu().web);
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
      think,
      cost,
      busy,
      loadAverage,
      answers: {
        page: measures.page.summary,
        fit: measures.fit.summary,
        draws: measures.draws.summary,
        notebook: measures.notebook.summary,
        lag: measures.lag.summary,
      },
      events: {
        heard: seen.reduce((sum, { events }) => sum + events, 0),
        backwards: seen.reduce((sum, { backwards }) => sum + backwards, 0),
      },
      fits: { ended: ended - stopped, stopped },
      draws: { ...draws, lost: draws.committed - draws.found },
    };
  } finally {
    await stage.stopAll();
    await stage.remove();
  }
}
