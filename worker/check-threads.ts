import type { Worker } from 'node:worker_threads';
import type { DatasetRanks } from '@/lib/inference/calibration';
import type { CalibrationResult } from '@/lib/schemas';
import type { CheckModel } from '@/lib/services/check-model';
import { ThreadError } from './failure';
import type { CheckAnswer, CheckQuestion, Failure } from './messages';
import { startThread } from './threads';

/** One thread of a check; asked one thing at a time. */
class CheckThread {
  private readonly thread: Worker;
  private settle: { resolve: (answer: CheckAnswer | null) => void; reject: (error: Error) => void } | null =
    null;
  private broken: Failure | null = null;

  constructor(model: CheckModel) {
    const fail = (failure: Failure) => {
      this.broken ??= failure;
      this.settle?.reject(new ThreadError(failure));
    };
    this.thread = startThread<CheckAnswer>(
      './check-thread.mjs',
      model,
      (answer) => (answer.kind === 'failure' ? fail(answer) : this.settle?.resolve(answer)),
      fail,
    );
  }

  /** Ranks of the block that begins at `first`; null where the signal came before them. */
  async rank(first: number, over: AbortSignal): Promise<DatasetRanks[] | null> {
    const answer = await this.ask({ kind: 'block', first }, over);
    return answer?.kind === 'block' ? answer.found : null;
  }

  /** What all ranks come to; null where the signal came before. */
  async sum(found: DatasetRanks[], over: AbortSignal): Promise<CalibrationResult | null> {
    const answer = await this.ask({ kind: 'result', found }, over);
    return answer?.kind === 'result' ? answer.result : null;
  }

  close(): Promise<unknown> {
    return this.thread.terminate();
  }

  private ask(question: CheckQuestion, over: AbortSignal): Promise<CheckAnswer | null> {
    return new Promise<CheckAnswer | null>((resolve, reject) => {
      if (this.broken) return reject(new ThreadError(this.broken));
      if (over.aborted) return resolve(null);
      const letGo = () => resolve(null);
      over.addEventListener('abort', letGo, { once: true });
      const done = () => over.removeEventListener('abort', letGo);
      this.settle = {
        resolve: (answer) => {
          done();
          resolve(answer);
        },
        reject: (error) => {
          done();
          reject(error);
        },
      };
      this.thread.postMessage(question);
    });
  }
}

/** The threads that rank a check's data sets; which of them does which block changes nothing. */
export class CheckThreads {
  readonly all: readonly CheckThread[];

  constructor(model: CheckModel, count: number) {
    this.all = Array.from({ length: count }, () => new CheckThread(model));
  }

  async close(): Promise<void> {
    await Promise.all(this.all.map((thread) => thread.close()));
  }
}
