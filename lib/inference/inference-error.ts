import type { InferenceSpec } from './types';

/** What can be wrong with priors, data, likelihood or template when a posterior is built. */
export type InferenceErrorCode =
  | 'prior_missing'
  | 'prior_invalid'
  | 'prior_outside_range'
  | 'prior_not_allowed'
  | 'prior_order_impossible'
  | 'data_length'
  | 'data_not_finite'
  | 'covariance_size'
  | 'covariance_not_symmetric'
  | 'covariance_not_positive_definite'
  | 'mock_count_missing'
  | 'too_few_mocks'
  | 'likelihood_not_joint'
  | 'theory_covariance_not_exact'
  | 'window_size'
  | 'column_size'
  | 'column_name'
  | 'nothing_to_sample'
  | 'no_frequency';

/**
 * A fault in what an inference was given. `path` names the place in the caller's terms (`priors.mu1.lo`,
 * `data.covariance`), `message` says what is wrong there, `remedy` what to do about it.
 */
export class InferenceError extends Error {
  readonly code: InferenceErrorCode;
  readonly path: string;
  readonly remedy: string;

  constructor(code: InferenceErrorCode, path: string, message: string, remedy: string) {
    super(message);
    this.name = 'InferenceError';
    this.code = code;
    this.path = path;
    this.remedy = remedy;
  }
}

/** Throws InferenceError `data_length` where a template was compiled at other places than the data are at. */
export function requireLength({ data, template }: Pick<InferenceSpec, 'data' | 'template'>): void {
  if (template.length === data.S.length) return;
  throw new InferenceError(
    'data_length',
    'data.S',
    `${data.S.length} data values for a template compiled at ${template.length} places`,
    'compile the template on the axis that is left after the cuts',
  );
}
