import { log } from '@/lib/log';
import {
  commitBlock,
  commitResult,
  endStopped,
  failCheck,
  readHeldCheck,
  releaseCheck,
  renewCheck,
  type HeldCheck,
} from '@/lib/services/check-lease';
import { checkBlock } from '@/lib/services/check-model';
import type { Taken } from '@/lib/services/fit-queue';
import { CheckThreads } from './check-threads';
import { ThreadError } from './failure';
import type { Stopping } from './fit-run';
import { reasonOf, untilDone } from './retry';
import type { WorkerSettings } from './settings';

/** Makes a check that was taken for as long as this process holds it; returns when it has ended, or isn't this worker's any more. */
export async function runCheck(
  { checkId, epoch }: Extract<Taken, { kind: 'check' }>,
  settings: WorkerSettings,
  stopping: Stopping,
): Promise<void> {
  let held: HeldCheck | null;
  try {
    held = await untilDone('reading a check', () => readHeldCheck(checkId, epoch), stopping.now);
  } catch (error) {
    if (stopping.now.aborted) return;
    log.error({ checkId, ...reasonOf(error) }, 'a check could not be taken up');
    const message = 'The stored check can’t be read by this version; the cause is logged. Ask for it anew.';
    await untilDone('failing a check', () => failCheck({ checkId, epoch }, message), stopping.now);
    return;
  }
  if (!held) return;
  const run = new CheckRun(held, settings, stopping);
  try {
    await run.make();
  } catch (error) {
    await run.fail(error);
  } finally {
    await run.close();
  }
}

/** One worker's hold on one check: blocks are ranked in threads and stored one by one here, in whatever order they come. */
class CheckRun {
  private readonly lost = new AbortController();
  private readonly over: AbortSignal;
  private readonly threads: CheckThreads;
  private readonly renewal: NodeJS.Timeout;
  private renewing: Promise<void> = Promise.resolve();
  private storing: Promise<void> = Promise.resolve();
  private stopRequested: boolean;
  private stored = performance.now();

  constructor(
    private readonly check: HeldCheck,
    private readonly settings: WorkerSettings,
    private readonly stopping: Stopping,
  ) {
    this.over = AbortSignal.any([stopping.now, this.lost.signal]);
    this.stopRequested = check.stopRequested;
    const left = this.missing().length;
    this.threads = new CheckThreads(check.model, Math.max(1, Math.min(settings.threads, left)));
    this.renewal = setInterval(() => (this.renewing = this.renew()), settings.leaseMs / 4);
  }

  async make(): Promise<void> {
    const { checkId, epoch, model, blocks } = this.check;
    log.info({ checkId, epoch, blocks: blocks.size }, 'checking');
    const left = this.missing();
    await Promise.all(
      this.threads.all.map(async (thread) => {
        while (!this.ends) {
          const first = left.shift();
          if (first === undefined) return;
          const found = await thread.rank(first, this.over);
          if (found === null) return;
          await this.store(first, found);
        }
      }),
    );
    if (this.over.aborted || this.lost.signal.aborted) return this.giveBack();
    if (this.missing().length > 0) {
      if (!this.stopRequested) return this.giveBack();
      await this.persist('stopping a check', () => endStopped(this.check));
      log.info({ checkId, epoch }, 'a check was stopped');
      return;
    }
    const found = [...blocks].sort(([a], [b]) => a - b).flatMap(([, each]) => each);
    const result = await this.threads.all[0].sum(found, this.over);
    if (result === null) return this.giveBack();
    await this.persist('storing a check', () => commitResult(this.check, result));
    log.info({ checkId, epoch, datasets: model.request.datasets }, 'a check ended');
  }

  /** Ends the check with the reason, where it is still this worker's; a fault of ours is logged. */
  async fail(error: unknown): Promise<void> {
    const { checkId } = this.check;
    if (this.lost.signal.aborted) return;
    try {
      if (this.stopping.now.aborted) return await this.giveBack();
      const told = error instanceof ThreadError ? error.failure.told : null;
      log[told === null ? 'error' : 'warn']({ checkId, ...reasonOf(error) }, 'a check failed');
      const ours =
        'An unexpected error ended the check; it is logged. Start it again to go on from what is stored.';
      await this.persist('failing a check', () => failCheck(this.check, told ?? ours));
    } catch (again) {
      // Nobody renews the lease now, so another worker takes it up.
      log.error({ checkId, ...reasonOf(again) }, 'a check could not be given back');
    }
  }

  async close(): Promise<void> {
    clearInterval(this.renewal);
    await this.threads.close();
  }

  private get ends(): boolean {
    return this.over.aborted || this.stopping.gently.aborted || this.stopRequested;
  }

  /** First data set of every block that isn't stored. */
  private missing(): number[] {
    const { model, blocks } = this.check;
    const all = Math.ceil(model.request.datasets / checkBlock);
    return Array.from({ length: all }, (_, block) => block * checkBlock).filter(
      (first) => !blocks.has(first),
    );
  }

  /** Blocks are stored one after the other, so that the time between two counts once. */
  private store(first: number, found: Parameters<typeof commitBlock>[2]): Promise<void> {
    const next = this.storing.then(async () => {
      const now = performance.now();
      const spent = now - this.stored;
      this.stored = now;
      this.heed(await this.persist('storing a block', () => commitBlock(this.check, first, found, spent)));
      this.check.blocks.set(first, found);
    });
    this.storing = next.catch(() => undefined);
    return next;
  }

  private heed(stopRequested: boolean | null): void {
    if (stopRequested === null) this.lost.abort();
    else this.stopRequested = stopRequested;
  }

  /** Ends the lease; a renewal that is under way must not land behind it. */
  private async giveBack(): Promise<void> {
    clearInterval(this.renewal);
    await this.renewing;
    if (!this.lost.signal.aborted) await releaseCheck(this.check);
  }

  private persist<T>(what: string, act: () => Promise<T>): Promise<T> {
    return untilDone(what, act, this.over);
  }

  private async renew(): Promise<void> {
    try {
      this.heed(await renewCheck(this.check, this.settings.leaseMs));
    } catch (error) {
      log.warn({ checkId: this.check.checkId, ...reasonOf(error) }, 'a lease could not be renewed');
    }
  }
}
