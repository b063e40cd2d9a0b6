import { deserialize } from 'node:v8';
import { log } from '@/lib/log';
import { redis } from '@/lib/redis';
import { fitChannel } from '@/lib/jobs';
import {
  commitDraws,
  commitLook,
  storedBlock,
  type Standing,
  type StoredBlock,
} from '@/lib/services/fit-commit';
import { fitBlocks } from '@/lib/services/fit-draws';
import {
  failFit,
  noteMachine,
  readHeld,
  releaseLease,
  renewLease,
  type HeldFit,
} from '@/lib/services/fit-lease';
import type { Taken } from '@/lib/services/fit-queue';
import { keepOutputs } from '@/lib/services/samples';
import { factsOf, movesInReport, type ReplicaFacts } from '@/lib/services/fit-moves';
import type { ReplicaState } from '@/lib/sampler';
import type { StoredReport } from '@/lib/schemas/stored-report';
import { toldEnd, unseenEnd } from '@/lib/services/fit-expectation';
import { isLook } from '@/lib/services/fit-schedule';
import { verdict } from '@/lib/services/fit-verdict';
import { ThreadError } from './failure';
import type { Turn } from './messages';
import { Pace } from './pace';
import { reasonOf, untilDone } from './retry';
import { Rounds, type Round } from './rounds';
import type { WorkerSettings } from './settings';
import { ReplicaThreads, ReportThread } from './threads';

/** The process is asked to stop: `gently` at the end of the present block, `now` at once. */
export interface Stopping {
  gently: AbortSignal;
  now: AbortSignal;
}

/** Samples a fit that was taken for as long as this process holds it; returns when it has ended, or isn't this worker's any more. */
export async function runFit(
  taken: Extract<Taken, { kind: 'fit' }>,
  settings: WorkerSettings,
  stopping: Stopping,
): Promise<void> {
  const held = await takeUp(taken, stopping.now);
  if (!held) return;
  const run = new FitRun(held, settings, stopping);
  try {
    await run.sample();
  } catch (error) {
    await run.fail(error);
  } finally {
    await run.close();
  }
  // Not waited for: the next fit needn't, and what isn't noted is made when it is asked for.
  if (run.ended)
    void keepOutputs(held.fitId).catch((error: unknown) =>
      log.warn({ fitId: held.fitId, ...reasonOf(error) }, 'the outputs of a fit were not noted'),
    );
}

/** Reads a fit that was taken; one whose row or states can't be read ends here, since no worker will ever do better. */
async function takeUp(
  { fitId, epoch }: Pick<HeldFit, 'fitId' | 'epoch'>,
  now: AbortSignal,
): Promise<HeldFit | null> {
  try {
    return await untilDone('reading a fit', () => readHeld(fitId, epoch), now);
  } catch (error) {
    if (now.aborted) return null;
    log.error({ fitId, ...reasonOf(error) }, 'a fit could not be taken up');
    const message =
      'The stored fit can’t be read by this version; the cause is logged. Start a new fit with the same seed.';
    await untilDone('failing a fit', () => failFit(fitId, epoch, message), now);
    return null;
  }
}

/** Settles when the signal does, and not before. */
const aborted = (signal: AbortSignal): Promise<null> =>
  new Promise((resolve) => {
    if (signal.aborted) resolve(null);
    else signal.addEventListener('abort', () => resolve(null), { once: true });
  });

/** What the stored states of a fit say, in the order of its replicas. */
const storedFacts = (states: ReadonlyMap<number, Uint8Array>): ReplicaFacts[] =>
  [...states]
    .sort(([one], [other]) => one - other)
    .map(([, state]) => factsOf(deserialize(state) as ReplicaState));

/** Adds the times of one more round to those so far, move by move. */
function addTimes(sum: Float64Array | null, turns: readonly Turn[]): Float64Array | null {
  let total = sum;
  for (const { milliseconds } of turns) {
    if (!milliseconds) continue;
    total = milliseconds.map((each, move) => each + (total?.[move] ?? 0));
  }
  return total;
}

/** One worker's hold on one fit: replicas sample in threads, commits and looks follow one another here. */
class FitRun {
  private readonly lost = new AbortController();
  private readonly over: AbortSignal;
  private readonly overSettled: Promise<null>;
  private readonly replicas: ReplicaThreads;
  private readonly reporter: ReportThread;
  private readonly rounds: Rounds;
  private readonly pace: Pace;
  private readonly renewal: NodeJS.Timeout;
  private renewing: Promise<void> = Promise.resolve();
  private standing: Standing;
  private report: StoredReport;
  private facts: ReplicaFacts[];
  /** Whether this worker's last look ended it. */
  ended = false;
  /** Of each move since this worker took the fit. */
  private milliseconds: Float64Array | null = null;

  constructor(
    private readonly fit: HeldFit,
    private readonly settings: WorkerSettings,
    private readonly stopping: Stopping,
  ) {
    const { model, snapshot, states, draws, maxDraws, targetFrom, stopRequested, target } = fit;
    this.over = AbortSignal.any([stopping.now, this.lost.signal]);
    this.overSettled = aborted(this.over);
    this.standing = { draws, maxDraws, targetFrom, stopRequested };
    this.report = fit.report;
    this.facts = storedFacts(states);
    this.replicas = new ReplicaThreads(model, states, settings.threads);
    this.reporter = new ReportThread({ model, target });
    this.pace = new Pace(() => performance.now(), snapshot.replicas, draws);
    this.rounds = new Rounds({
      replicas: snapshot.replicas,
      draws,
      // A fit that is to be stopped has no draw left to make.
      limit: stopRequested ? draws : snapshot.warmup + maxDraws,
      course: snapshot,
      advance: (replica, count) => this.replicas.advance(replica, count),
    });
    this.renewal = setInterval(() => (this.renewing = this.renew()), settings.leaseMs / 4);
  }

  async sample(): Promise<void> {
    const { fitId, epoch, snapshot } = this.fit;
    log.info({ fitId, epoch, draws: this.standing.draws }, 'sampling');
    await this.persist('noting the machine', () => noteMachine(this.fit));
    await this.publish();
    await this.remember();
    while (!this.over.aborted) {
      const { draws, maxDraws, stopRequested } = this.standing;
      const kept = draws - snapshot.warmup;
      const ending = stopRequested || kept >= maxDraws;
      const unseen = isLook(kept, snapshot.blockDraws) && this.report.draws !== draws;
      if (ending || unseen) {
        if (await this.look()) return;
        continue;
      }
      if (this.stopping.gently.aborted) break;
      const batch = await Promise.race([this.rounds.take(), this.overSettled]);
      if (batch) await this.commit(batch);
    }
    await this.giveBack();
  }

  /** Ends the lease; a renewal that is under way must not land behind it. */
  private async giveBack(): Promise<void> {
    clearInterval(this.renewal);
    await this.renewing;
    if (!this.lost.signal.aborted) await releaseLease(this.fit.fitId, this.fit.epoch);
  }

  /** Ends the fit with the reason, where it is still this worker's; a fault of ours is logged and can be resumed from. */
  async fail(error: unknown): Promise<void> {
    const { fitId, epoch } = this.fit;
    if (this.lost.signal.aborted) return;
    try {
      if (this.stopping.now.aborted) return await this.giveBack();
      const told = error instanceof ThreadError ? error.failure.told : null;
      log[told === null ? 'error' : 'warn']({ fitId, ...reasonOf(error) }, 'a fit failed');
      const ours = `An unexpected error ended the sampling after ${this.standing.draws} draws; it is logged. Resume tries again from there.`;
      await this.persist('failing a fit', () => failFit(fitId, epoch, told ?? ours));
      await this.publish();
    } catch (again) {
      // Nobody renews the lease now, so another worker takes it up.
      log.error({ fitId, ...reasonOf(again) }, 'a fit could not be given back');
    }
  }

  async close(): Promise<void> {
    clearInterval(this.renewal);
    this.rounds.close();
    await Promise.all([this.replicas.close(), this.reporter.close()]);
  }

  /** Gives the report thread what was committed before this worker came. */
  private async remember(): Promise<void> {
    const { fitId, draws, snapshot } = this.fit;
    if (draws <= snapshot.warmup) return;
    for (let replica = 0; replica < snapshot.replicas; replica++) {
      for await (const block of fitBlocks(fitId, replica, draws)) this.tell(block);
    }
  }

  private tell({ replica, firstDraw, stride, values }: StoredBlock): void {
    if (firstDraw >= this.fit.snapshot.warmup) this.reporter.append(replica, firstDraw, stride, values);
  }

  private async commit(rounds: readonly Round[]): Promise<void> {
    const { fitId, epoch, snapshot } = this.fit;
    const { warmup } = snapshot;
    const { from } = rounds[0];
    const { to, turns } = rounds[rounds.length - 1];
    const made = rounds.flatMap((round) => {
      const astray = round.turns.find(
        ({ first, count }) => first !== round.from || first + count !== round.to,
      );
      if (astray) throw new Error(`Replica ${astray.replica} is at draw ${astray.first}, not ${round.from}.`);
      return round.turns;
    });
    const blocks = made.map((turn) => storedBlock(turn, warmup)).filter((block) => block !== null);
    const states = turns.map(({ replica, state }) => ({ replica, state: Buffer.from(state) }));
    const facts = turns.map((turn) => turn.facts);
    for (const round of rounds) this.milliseconds = addTimes(this.milliseconds, round.turns);
    const report = {
      ...this.report,
      ...movesInReport(facts, this.milliseconds),
      wanted: this.wanted(to - warmup),
    };
    const pace = this.pace.mark(to);
    const standing = await this.persist('committing draws', () =>
      commitDraws({ fitId, epoch, from, to, warmup, blocks, states, ...pace, report }),
    );
    if (!standing) return this.lost.abort();
    this.report = report;
    this.facts = facts;
    this.take(standing);
    blocks.forEach((block) => this.tell(block));
    await this.publish();
  }

  /** Where the fit should end, told at `kept` draws: by the last look, or, before the first, as fits like it do. */
  private wanted(kept: number): number | null {
    const { snapshot, target } = this.fit;
    const { history, estimate, draws, wanted } = this.report;
    if (history.length > 0) {
      return estimate === null ? wanted : toldEnd({ estimate, looked: draws - snapshot.warmup }, kept);
    }
    const sampled = Object.values(snapshot.priors).filter(({ kind }) => kind !== 'fixed').length;
    return toldEnd(unseenEnd(snapshot.replicas, sampled, target), kept);
  }

  /** Looks at all that is committed; true where that ended the fit, or it is lost. */
  private async look(): Promise<boolean> {
    const { fitId, epoch, snapshot } = this.fit;
    const { draws } = this.standing;
    const report = await Promise.race([
      this.reporter.look(this.standing, this.report, this.facts),
      this.overSettled,
    ]);
    if (!report) return false;
    const outcome = await this.persist('writing a report', () =>
      commitLook({
        fitId,
        epoch,
        draws,
        report,
        judge: (standing) => verdict(snapshot, report.gate.met, standing),
      }),
    );
    if (!outcome) {
      this.lost.abort();
      return true;
    }
    this.report = report;
    this.take(outcome);
    await this.publish();
    this.ended = outcome.ended !== null;
    if (this.ended) log.info({ fitId, epoch, draws, status: outcome.ended }, 'a fit ended');
    return this.ended;
  }

  private take({ draws, maxDraws, targetFrom, stopRequested }: Standing): void {
    this.standing = { draws, maxDraws, targetFrom, stopRequested };
    this.rounds.raise(this.fit.snapshot.warmup + maxDraws);
  }

  private persist<T>(what: string, act: () => Promise<T>): Promise<T> {
    return untilDone(what, act, this.over);
  }

  private async renew(): Promise<void> {
    const { fitId, epoch } = this.fit;
    try {
      if (!(await renewLease(fitId, epoch, this.settings.leaseMs))) this.lost.abort();
    } catch (error) {
      log.warn({ fitId, ...reasonOf(error) }, 'a lease could not be renewed');
    }
  }

  /** Tells whoever watches that there is something new; they read it from the database, also without being told. */
  private async publish(): Promise<void> {
    const { fitId } = this.fit;
    await redis()
      .publish(fitChannel(fitId), String(this.standing.draws))
      .catch(() => undefined);
  }
}
