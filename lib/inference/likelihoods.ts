import { complexLogGamma } from '@/lib/templates';
import { InferenceError } from './inference-error';
import type { LikelihoodKind } from './types';

/**
 * Likelihoods as functions of χ² = (d − m)ᵀ C⁻¹ (d − m) with the covariance as given; natural logs of fully
 * normalised densities of the data. p data values, N mocks, n_p sampled parameters. For a covariance from mocks C is the
 * sample covariance with divisor N − 1.
 *
 * - normal: −½ (χ² + ln |2πC|).
 * - hartlap: the normal one with C → C/h, h = (N − p − 2)/(N − 1) (Hartlap, Simon, Schneider 2007).
 * - sellentin-heavens (2016): ln Γ(m/2) − ln Γ((m − p)/2) − (p/2) ln(π(N − 1)) − ½ ln |C| − (m/2) ln(1 + χ²/(N − 1)), m = N.
 * - matched-t (Percival, Friedrich, Sellentin, Heavens 2022): the same with m = `matchedExponent`.
 */
export interface Likelihood {
  readonly kind: LikelihoodKind;
  /** ln likelihood at this χ² ≥ 0. */
  logDensity(chiSquare: number): number;
  /** Factor on χ² in the exponent of the normal forms: 1, or Hartlap's h. NaN for the t forms. */
  readonly scale: number;
  /** Exponent m of the t forms; null for the normal ones. */
  readonly exponent: number | null;
  /** N − 1 for the t forms; null for the normal ones. */
  readonly spread: number | null;
}

/**
 * m = n_p + 2 + [N − 1 + B (p − n_p)] / [1 + B (p − n_p)], B = (N − p − 2)/[(N − p − 1)(N − p − 4)]: the exponent that
 * makes credible intervals match the scatter of best fits (Percival, Friedrich, Sellentin, Heavens 2022; from memory).
 */
export function matchedExponent(mocks: number, length: number, parameters: number): number {
  const b = (mocks - length - 2) / ((mocks - length - 1) * (mocks - length - 4));
  const inflation = b * (length - parameters);
  return parameters + 2 + (mocks - 1 + inflation) / (1 + inflation);
}

/**
 * The likelihood of a kind. `mocks` is N (null for a known covariance), `length` p after cuts, `parameters` n_p,
 * `logDeterminant` ln |C|. Throws InferenceError `mock_count_missing` where a form needs N, and `too_few_mocks`, which
 * says how many are needed, unless N > p + 4 (for any covariance that comes from mocks) and, for the matched form, m > p.
 */
export function buildLikelihood(
  kind: LikelihoodKind,
  mocks: number | null,
  length: number,
  parameters: number,
  logDeterminant: number,
): Likelihood {
  const enough = kind === 'matched-t' ? enoughForMatched(length, parameters) : length + 5;
  if (mocks !== null && mocks < enough) {
    const more =
      enough > length + 5
        ? `, and ${enough} for the matched-prior t likelihood of ${parameters} parameters`
        : '';
    throw new InferenceError(
      'too_few_mocks',
      'data.mockCount',
      `${mocks} mocks are too few for ${length} data values: at least ${length + 5} are needed${more}`,
      more === ''
        ? `give at least ${enough} mocks, or keep at most ${Math.max(0, mocks - 5)} bins`
        : `give at least ${enough} mocks, keep fewer bins, or use the sellentin-heavens likelihood`,
    );
  }
  if (kind === 'normal') return normalLikelihood(kind, 1, length, logDeterminant);
  if (mocks === null) {
    throw new InferenceError(
      'mock_count_missing',
      'data.mockCount',
      `the ${kind} likelihood is for a covariance from mocks, and their number is not known`,
      'give the number of mocks, or use the normal likelihood',
    );
  }
  if (kind === 'hartlap')
    return normalLikelihood(kind, (mocks - length - 2) / (mocks - 1), length, logDeterminant);

  const m = kind === 'matched-t' ? matchedExponent(mocks, length, parameters) : mocks;
  const spread = mocks - 1;
  const constant =
    logGamma(m / 2) -
    logGamma((m - length) / 2) -
    0.5 * length * Math.log(Math.PI * spread) -
    0.5 * logDeterminant;
  return {
    kind,
    scale: NaN,
    exponent: m,
    spread,
    logDensity: (chiSquare) => constant - 0.5 * m * Math.log1p(chiSquare / spread),
  };
}

/** The least number of mocks from p + 5 on at which the matched form is a density of p values, that is m > p. */
function enoughForMatched(length: number, parameters: number): number {
  let mocks = length + 5;
  while (!(matchedExponent(mocks, length, parameters) > length)) mocks += 1;
  return mocks;
}

function normalLikelihood(
  kind: LikelihoodKind,
  scale: number,
  length: number,
  logDeterminant: number,
): Likelihood {
  const constant = -0.5 * (length * Math.log((2 * Math.PI) / scale) + logDeterminant);
  return {
    kind,
    scale,
    exponent: null,
    spread: null,
    logDensity: (chiSquare) => constant - 0.5 * scale * chiSquare,
  };
}

/** ln Γ(x) for x > 0. */
function logGamma(x: number): number {
  const pair = new Float64Array(2);
  complexLogGamma(x, 0, pair);
  return pair[0];
}
