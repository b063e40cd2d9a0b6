import { AppError } from '@/lib/errors';

/** A bounded number of things at a time, a bounded number that wait for them, and a sentence for those beyond. */
export class Places {
  private taken = 0;
  private readonly queue: (() => void)[] = [];

  constructor(
    private readonly most: number,
    private readonly mostWaiting: number,
    private readonly refusal: string,
  ) {}

  /** Waits for a place; resolves with how to give it back, once. `unavailable` where too many wait. */
  async take(): Promise<() => void> {
    if (this.taken < this.most) this.taken += 1;
    else if (this.queue.length < this.mostWaiting) {
      await new Promise<void>((resolve) => this.queue.push(resolve));
    } else throw new AppError('unavailable', this.refusal);
    let held = true;
    return () => {
      if (!held) return;
      held = false;
      const next = this.queue.shift();
      if (next) next();
      else this.taken -= 1;
    };
  }
}
