import { Worker } from 'node:worker_threads';
import type { FitModel } from '@/lib/services/fit-model';
import type { Standing } from '@/lib/services/fit-commit';
import type { ReplicaFacts } from '@/lib/services/fit-moves';
import type { StoredReport } from '@/lib/schemas/stored-report';
import { ThreadError } from './failure';
import type { Failure, ReplicaAnswer, ReportAnswer, ReportSetup, ReplicaSetup, Turn } from './messages';

type Settle<T> = { resolve: (value: T) => void; reject: (error: Error) => void };

const unexpected = (error: Error): Failure => ({
  kind: 'failure',
  told: null,
  stack: error.stack ?? error.message,
});

/** Starts one of the worker's threads; `onEnd` hears of every end that isn't its being closed. */
export function startThread<Message>(
  file: string,
  workerData: unknown,
  onMessage: (message: Message) => void,
  onEnd: (why: Failure) => void,
): Worker {
  const thread = new Worker(new URL(file, import.meta.url), { workerData });
  thread.on('message', onMessage);
  thread.on('error', (error) => onEnd(unexpected(error)));
  thread.on('messageerror', (error) => onEnd(unexpected(error)));
  thread.on('exit', (code) => onEnd(unexpected(new Error(`A thread ended by itself with code ${code}.`))));
  return thread;
}

/** The threads that sample one fit; replica i belongs to thread i modulo their number, from the first turn to the last. */
export class ReplicaThreads {
  private readonly threads: Worker[];
  private readonly waiting = new Map<number, Settle<Turn>>();

  constructor(model: FitModel, states: ReadonlyMap<number, Uint8Array>, count: number) {
    const { replicas } = model.snapshot;
    this.threads = Array.from({ length: Math.min(count, replicas) }, (_, index) => {
      const own = new Map([...states].filter(([replica]) => replica % Math.min(count, replicas) === index));
      const setup: ReplicaSetup = { model, states: own };
      return startThread('./replica-thread.mjs', setup, this.receive, this.fail);
    });
  }

  /** The next `draws` recorded draws of a replica; one turn at a time of each. */
  advance(replica: number, draws: number): Promise<Turn> {
    return new Promise((resolve, reject) => {
      this.waiting.set(replica, { resolve, reject });
      this.threads[replica % this.threads.length].postMessage({ kind: 'advance', replica, draws });
    });
  }

  async close(): Promise<void> {
    await Promise.all(this.threads.map((thread) => thread.terminate()));
  }

  private readonly receive = (message: ReplicaAnswer): void => {
    if (message.kind === 'failure') return this.fail(message);
    const settle = this.waiting.get(message.replica);
    this.waiting.delete(message.replica);
    settle?.resolve(message);
  };

  /** One replica that can't go on ends the fit: the others' turns are of no use then. */
  private readonly fail = (failure: Failure): void => {
    const all = [...this.waiting.values()];
    this.waiting.clear();
    for (const { reject } of all) reject(new ThreadError(failure));
  };
}

/** The thread that remembers the committed draws of one fit and computes its diagnostics. */
export class ReportThread {
  private readonly thread: Worker;
  private waiting: Settle<StoredReport> | null = null;
  private broken: Failure | null = null;

  constructor(setup: ReportSetup) {
    this.thread = startThread('./report-thread.mjs', setup, this.receive, this.fail);
  }

  append(replica: number, first: number, stride: number, values: Float64Array): void {
    this.thread.postMessage({ kind: 'append', replica, first, stride, values });
  }

  look(standing: Standing, before: StoredReport, facts: ReplicaFacts[]): Promise<StoredReport> {
    return new Promise((resolve, reject) => {
      if (this.broken) return reject(new ThreadError(this.broken));
      this.waiting = { resolve, reject };
      this.thread.postMessage({ kind: 'look', draws: standing.draws, before, facts, standing });
    });
  }

  async close(): Promise<void> {
    await this.thread.terminate();
  }

  private readonly receive = (message: ReportAnswer): void => {
    if (message.kind === 'failure') return this.fail(message);
    this.waiting?.resolve(message.report);
    this.waiting = null;
  };

  private readonly fail = (failure: Failure): void => {
    this.broken ??= failure;
    this.waiting?.reject(new ThreadError(failure));
    this.waiting = null;
  };
}
