import { blockEnd, isLook, type Course } from '@/lib/services/fit-schedule';
import type { Turn } from './messages';

/** All replicas' turns from one recorded draw to another. */
export interface Round {
  from: number;
  to: number;
  turns: Turn[];
}

interface Plan {
  replicas: number;
  /** Recorded draws that are committed when sampling begins. */
  draws: number;
  /** Recorded draws that the budget allows. */
  limit: number;
  course: Course;
  advance(replica: number, draws: number): Promise<Turn>;
}

/** Rounds that a replica may be ahead of what was taken: threads go on while a commit or a look is under way. */
const ahead = 8;

/**
 * Keeps every replica at work and hands their turns out in lock step. A replica may run ahead of the others and of what is
 * committed; what runs beyond the end of a fit is thrown away, and made again, the same, if the fit goes on later.
 */
export class Rounds {
  private readonly ends: number[] = [];
  private readonly turns: Turn[][];
  private readonly busy: boolean[];
  private readonly position: number[];
  private taken = 0;
  private limit: number;
  private failure: unknown;
  private wake: (() => void) | null = null;
  private closed = false;

  constructor(private readonly plan: Plan) {
    this.limit = plan.limit;
    this.turns = Array.from({ length: plan.replicas }, () => []);
    this.busy = new Array<boolean>(plan.replicas).fill(false);
    this.position = new Array<number>(plan.replicas).fill(0);
    this.startAll();
  }

  /** A budget that was raised lets the replicas go on. */
  raise(limit: number): void {
    this.limit = Math.max(this.limit, limit);
    this.startAll();
  }

  /**
   * The next complete rounds in order, at least one, and none after the first at whose end the fit is looked at. Rejects with what
   * stopped a replica. Not to be asked for when the budget is spent.
   */
  async take(): Promise<Round[]> {
    while (this.complete === 0) {
      if (this.failure !== undefined) throw this.failure;
      await new Promise<void>((resolve) => {
        this.wake = resolve;
      });
    }
    const { warmup, blockDraws } = this.plan.course;
    const rounds: Round[] = [];
    while (this.complete > 0) {
      const turns = this.turns.map((own) => own.shift() as Turn);
      const to = this.ends[this.taken];
      rounds.push({ from: this.startOf(this.taken), to, turns });
      this.taken++;
      if (isLook(to - warmup, blockDraws)) break;
    }
    this.startAll();
    return rounds;
  }

  /** Starts no further turn. */
  close(): void {
    this.closed = true;
  }

  private get complete(): number {
    return Math.min(...this.turns.map((own) => own.length));
  }

  private startOf(round: number): number {
    return round === 0 ? this.plan.draws : this.ends[round - 1];
  }

  private startAll(): void {
    for (let replica = 0; replica < this.plan.replicas; replica++) this.start(replica);
  }

  private start(replica: number): void {
    const round = this.position[replica];
    if (this.closed || this.busy[replica] || round >= this.taken + ahead) return;
    const from = this.startOf(round);
    if (round === this.ends.length) {
      if (from >= this.limit) return;
      // Settled once for all replicas, whatever happens to the budget before the last of them gets there.
      this.ends.push(blockEnd(from, this.limit, this.plan.course));
    }
    this.busy[replica] = true;
    this.plan.advance(replica, this.ends[round] - from).then(
      (turn) => {
        this.busy[replica] = false;
        this.position[replica]++;
        this.turns[replica].push(turn);
        this.start(replica);
        this.notify();
      },
      (error: unknown) => {
        this.failure ??= error;
        this.notify();
      },
    );
  }

  private notify(): void {
    const wake = this.wake;
    this.wake = null;
    wake?.();
  }
}
