import { setTimeout as sleep } from 'node:timers/promises';

interface Plan<T> {
  /** Fits at the same time. */
  places: number;
  /** Milliseconds for each fit that runs here before another is taken: a worker with less to do gets ahead. */
  stepBack: number;
  take(): Promise<T | null>;
  /** Never rejects. */
  run(taken: T): Promise<void>;
  /** Told when the last place is taken and when one is free again. */
  onFull(full: boolean): void;
}

/** Keeps a worker's places filled with the fits whose turn it is, for as long as there are any. */
export class Taker<T> {
  private readonly running = new Set<Promise<void>>();
  private filling: Promise<void> | null = null;
  private again = false;
  private closed = false;

  constructor(private readonly plan: Plan<T>) {}

  /** Takes what there is; settles when nothing more can be taken. Rejects with what kept it from asking. */
  fill(): Promise<void> {
    this.again = true;
    this.filling ??= this.fillOn().finally(() => (this.filling = null));
    return this.filling;
  }

  /** Takes nothing more and waits for what runs. */
  async close(): Promise<void> {
    this.closed = true;
    await this.filling?.catch(() => undefined);
    await Promise.all(this.running);
  }

  private get free(): boolean {
    return !this.closed && this.running.size < this.plan.places;
  }

  private async fillOn(): Promise<void> {
    while (this.again && this.free) {
      this.again = false;
      while (this.free) {
        if (this.running.size > 0) await sleep(this.plan.stepBack * this.running.size);
        if (this.closed) return;
        const taken = await this.plan.take();
        if (taken === null) break;
        this.start(taken);
      }
    }
  }

  private start(taken: T): void {
    const run = this.plan.run(taken).finally(() => {
      this.running.delete(run);
      this.plan.onFull(false);
      // What kept it from asking is asked about again by whoever calls next.
      this.fill().catch(() => undefined);
    });
    this.running.add(run);
    if (!this.free) this.plan.onFull(true);
  }
}
