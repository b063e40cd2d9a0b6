import { buildLikelihood } from './likelihoods';
import type { Metric } from './metric';

/**
 * How the likelihood that evidences are of follows from the one that is sampled: ln L_E = offset + exponent × ln L. The matched-prior t
 * form has an exponent m that depends on the number of parameters, so evidences take the Sellentin–Heavens one, m = N, for every model:
 * both are powers of 1 + χ²/(N − 1), hence exponent N/m. Null where evidences are of the likelihood itself, as they always are of several parts, which
 * the matched form isn't for.
 */
export function evidenceLikelihood(
  { parts: [{ likelihood }], whitening }: Metric,
  mocks: number | null,
): { exponent: number; offset: number } | null {
  if (likelihood.kind !== 'matched-t' || likelihood.exponent === null || mocks === null) return null;
  const { length, logDeterminant } = whitening;
  const own = buildLikelihood('sellentin-heavens', mocks, length, 0, logDeterminant);
  const exponent = mocks / likelihood.exponent;
  return { exponent, offset: own.logDensity(0) - exponent * likelihood.logDensity(0) };
}
