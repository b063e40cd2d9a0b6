import { AppError } from '@/lib/errors';
import { SamplerError } from '@/lib/sampler';
import { faultOf } from '@/lib/services/inference-faults';
import type { Failure } from './messages';

/** What a thread says of an error: the pure core's own sentences are for people, anything else is for the log. */
export function failureOf(error: unknown): Failure {
  const meant = error instanceof SamplerError || error instanceof AppError;
  return {
    kind: 'failure',
    told: meant ? error.message : (faultOf(error)?.message ?? null),
    stack: error instanceof Error ? (error.stack ?? error.message) : String(error),
  };
}

/** A thread's failure as an error of the main thread. */
export class ThreadError extends Error {
  override readonly name = 'ThreadError';

  constructor(readonly failure: Failure) {
    super(failure.told ?? failure.stack);
  }
}
