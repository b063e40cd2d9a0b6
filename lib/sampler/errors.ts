/** What can stop a sampler. The codes are stable; the sentence names the place and the remedy. */
export type SamplerErrorCode =
  'not-a-number' | 'infinite-density' | 'no-start' | 'impossible-proposal' | 'wrong-settings' | 'wrong-state';

/** Stops a run: the target, a proposal, the settings or a restored state can't be sampled with. */
export class SamplerError extends Error {
  constructor(
    readonly code: SamplerErrorCode,
    message: string,
  ) {
    super(message);
    this.name = 'SamplerError';
  }
}
