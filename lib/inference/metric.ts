import { InferenceError } from './inference-error';
import { buildLikelihood, type Likelihood } from './likelihoods';
import type { FitData, FitPart, LikelihoodKind } from './types';
import { buildWhitening, type WhitenedData, type Whitening } from './whitening';

/** The values from `from` to before `to`, with a likelihood of their own. */
export interface LikelihoodPart {
  readonly from: number;
  readonly to: number;
  readonly likelihood: Likelihood;
}

/** Data, covariance and likelihood settled: χ² is a sum of squares of whitened residuals, and each part has its own. */
export interface Metric<W extends WhitenedData = Whitening> {
  readonly kind: LikelihoodKind;
  readonly whitening: W;
  /** What is whitened with, p × p: the covariance as given, with that of the theory where there is one. */
  readonly covariance: Float64Array;
  readonly parts: readonly LikelihoodPart[];
  /** ln likelihood from the χ² of every part: Σ_k ln L_k(χ²_k). */
  logDensity(chiSquares: ArrayLike<number>): number;
}

/**
 * Settles the metric of data under a likelihood. `parameters` is the number of sampled parameters, on which the matched form depends.
 *
 * - One part: as `buildLikelihood`.
 * - Several parts: independent, so the density is the product of theirs. Parts without mocks are normal whatever the kind; normal parts
 *   next to each other are one. The t forms of parts with different mocks don't merge: a product of t densities is no t density.
 * - A theory covariance T: C + T for the normal likelihood, exactly. Hartlap's factor unbiases the inverse of an estimate, so the estimate
 *   is scaled first: C/h + T, with factor 1. Under the t forms T has no place in χ² (C is integrated over, T is known): refused.
 *
 * Throws InferenceError: sizes, covariances that aren't positive definite, `mock_count_missing` where no part has mocks and the kind needs
 * them, `too_few_mocks`, `likelihood_not_joint` for the matched form of several parts, `theory_covariance_not_exact` for T under a t form.
 */
export function buildMetric(data: FitData, kind: LikelihoodKind, parameters: number): Metric {
  const given = data.parts ?? [{ length: data.S.length, mockCount: data.mockCount }];
  requireParts(data, given);
  const asked = given.map((part) => partKind(part, kind, given));
  const covariance = settleCovariance(data, given, asked, kind);
  const whitening = buildWhitening({ ...data, covariance });
  const parts: LikelihoodPart[] = [];
  let from = 0;
  given.forEach(({ length, mockCount }, k) => {
    const to = from + length;
    const own = buildLikelihood(
      asked[k],
      mockCount,
      length,
      parameters,
      given.length === 1 ? whitening.logDeterminant : whitening.logDeterminantOf(from, to),
    );
    const likelihood = data.theoryCovariance && own.scale !== 1 ? { ...unscaled(own, length) } : own;
    parts.push({ from, to, likelihood });
    from = to;
  });
  const merged = mergeNormal(parts);
  return {
    kind,
    whitening,
    covariance,
    parts: merged,
    logDensity(chiSquares) {
      let sum = merged[0].likelihood.logDensity(chiSquares[0]);
      for (let k = 1; k < merged.length; k += 1) sum += merged[k].likelihood.logDensity(chiSquares[k]);
      return sum;
    },
  };
}

function requireParts({ S, parts }: FitData, given: readonly FitPart[]): void {
  const total = given.reduce((sum, { length }) => sum + length, 0);
  if (!parts || (total === S.length && parts.length > 0)) return;
  throw new InferenceError(
    'data_length',
    'data.parts',
    `${parts.length} parts of ${total} values together for ${S.length} data values`,
    'give every part its own number of values after the cuts',
  );
}

/** The likelihood of one part: without mocks the covariance is known, so that only the normal one is left. */
function partKind(part: FitPart, kind: LikelihoodKind, all: readonly FitPart[]): LikelihoodKind {
  if (all.length === 1 || kind === 'normal') return kind;
  if (kind === 'matched-t') {
    throw new InferenceError(
      'likelihood_not_joint',
      'likelihood.kind',
      'the exponent of the matched-prior t likelihood is derived for one covariance from one set of mocks, not for several measurements with their own',
      'use the sellentin-heavens likelihood, or measurements that share their mocks',
    );
  }
  return part.mockCount === null && all.some(({ mockCount }) => mockCount !== null) ? 'normal' : kind;
}

function settleCovariance(
  { covariance, theoryCovariance, S }: FitData,
  given: readonly FitPart[],
  asked: readonly LikelihoodKind[],
  kind: LikelihoodKind,
): Float64Array {
  if (!theoryCovariance) return covariance;
  const p = S.length;
  if (theoryCovariance.length !== p * p) {
    throw new InferenceError(
      'covariance_size',
      'data.theoryCovariance',
      `the theory covariance has ${theoryCovariance.length} numbers; ${p} data values need ${p} × ${p} = ${p * p}`,
      'cut the theory covariance as the data',
    );
  }
  if (asked.some((one) => one === 'sellentin-heavens' || one === 'matched-t')) {
    throw new InferenceError(
      'theory_covariance_not_exact',
      'likelihood.kind',
      `under the ${kind} likelihood the covariance from mocks is integrated over; a known theory covariance added to it has no closed form`,
      'use the hartlap or the normal likelihood, or give what the theory leaves out as columns with normal priors, which is exact here',
    );
  }
  const out = Float64Array.from(theoryCovariance);
  let from = 0;
  given.forEach(({ length, mockCount }, k) => {
    const { scale } = buildLikelihood(asked[k], mockCount, length, 0, 0);
    for (let i = from; i < from + length; i += 1) {
      for (let j = from; j < from + length; j += 1) out[i * p + j] += covariance[i * p + j] / scale;
    }
    from += length;
  });
  return out;
}

/** The same likelihood of a covariance that has the factor in it already. */
function unscaled(own: Likelihood, length: number): Likelihood {
  const constant = own.logDensity(0) - 0.5 * length * Math.log(own.scale);
  return { ...own, scale: 1, logDensity: (chiSquare) => constant - 0.5 * chiSquare };
}

/** Neighbours with the plain normal likelihood are one part. */
function mergeNormal(parts: readonly LikelihoodPart[]): LikelihoodPart[] {
  const merged: LikelihoodPart[] = [];
  for (const part of parts) {
    const last = merged.at(-1);
    if (last && isNormal(last) && isNormal(part)) {
      const constant = last.likelihood.logDensity(0) + part.likelihood.logDensity(0);
      const likelihood: Likelihood = {
        ...part.likelihood,
        logDensity: (chiSquare) => constant - 0.5 * chiSquare,
      };
      merged[merged.length - 1] = { from: last.from, to: part.to, likelihood };
    } else merged.push(part);
  }
  return merged;
}

const isNormal = ({ likelihood }: LikelihoodPart): boolean =>
  likelihood.exponent === null && likelihood.scale === 1;
