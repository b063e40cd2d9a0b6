import type { Prior } from '@/lib/templates';
import type { Rng } from '@/lib/sampler';
import { drawTruncatedNormal, lnNormalInterval, lnTruncatedNormal } from './gaussian-tail';
import { priorMoments, priorSupport, type ScalarPrior } from './priors';

/**
 * How the prior of a linear coefficient enters Gaussian algebra. While *other* parameters are drawn the coefficient is
 * integrated out under a normal of the prior's own mean and sd (`mean`, `precision`). When the coefficient itself is
 * drawn, that normal is taken out again and the prior's own shape put in: a normal factor (`ownMean`, `ownPrecision`, 0
 * for a flat one) on [lo, hi]. For a normal prior the two are the same and nothing is approximated.
 */
export interface LinearReference {
  readonly mean: number;
  readonly precision: number;
  readonly ownMean: number;
  readonly ownPrecision: number;
  readonly lo: number;
  readonly hi: number;
}

/** The reference of a prior. `fixed` and `isotropic` parameters are no coefficients to be integrated: a TypeError. */
export function linearReference(prior: Prior): LinearReference {
  if (prior.kind === 'fixed' || prior.kind === 'isotropic')
    throw new TypeError(`no reference for a ${prior.kind} prior`);
  const { mean, sd } = priorMoments(prior);
  const [lo, hi] = priorSupport(prior);
  const own = ownFactor(prior);
  return { mean, precision: 1 / (sd * sd), ownMean: own.mean, ownPrecision: own.precision, lo, hi };
}

function ownFactor(prior: ScalarPrior): { mean: number; precision: number } {
  switch (prior.kind) {
    case 'normal':
    case 'truncated-normal':
      return { mean: prior.mean, precision: 1 / (prior.sd * prior.sd) };
    case 'half-normal':
      return { mean: 0, precision: 1 / (prior.sd * prior.sd) };
    case 'uniform':
    case 'log-uniform':
      return { mean: 0, precision: 0 };
  }
}

/** True if the normal reference is the prior itself. */
export function isExactReference(prior: Prior): boolean {
  return prior.kind === 'normal' || prior.kind === 'fixed';
}

/** Mean and sd of the normal that the coefficient is drawn from before truncation, written into `out[0]`, `out[1]`. */
function drawnNormal(reference: LinearReference, precision: number, linear: number, out: Float64Array): void {
  // Far wider than the bounds is as good as flat; a floor keeps the ratio finite where the data say nothing.
  const width = reference.hi - reference.lo;
  const floor = Number.isFinite(width) ? 1e-6 / (width * width) : 1e-9 * reference.precision;
  const own = Math.max(floor, precision - reference.precision + reference.ownPrecision);
  const shift = linear - reference.precision * reference.mean + reference.ownPrecision * reference.ownMean;
  out[0] = shift / own;
  out[1] = 1 / Math.sqrt(own);
}

const scratch = new Float64Array(2);

/**
 * Draws a coefficient whose conditional under the reference is exp(−½ precision c² + linear c), with its own prior put
 * in the reference's place.
 */
export function drawCoefficient(
  rng: Rng,
  reference: LinearReference,
  precision: number,
  linear: number,
): number {
  drawnNormal(reference, precision, linear, scratch);
  return drawTruncatedNormal(rng, scratch[0], scratch[1], reference.lo, reference.hi);
}

/** ln density of `drawCoefficient` giving c. */
export function lnCoefficientDensity(
  c: number,
  reference: LinearReference,
  precision: number,
  linear: number,
): number {
  drawnNormal(reference, precision, linear, scratch);
  return lnTruncatedNormal(c, scratch[0], scratch[1], reference.lo, reference.hi);
}

/**
 * ln of ∫ prior / ∫ reference of a coefficient whose conditional under the reference is exp(−½ precision c² + linear c), up to a
 * constant of the prior.
 */
export function lnPriorOverReference(reference: LinearReference, precision: number, linear: number): number {
  drawnNormal(reference, precision, linear, scratch);
  const [mean, sd] = scratch;
  const { lo, hi } = reference;
  const inside =
    lo === -Infinity && hi === Infinity ? 0 : lnNormalInterval((lo - mean) / sd, (hi - mean) / sd);
  return (
    0.5 * (mean / sd) ** 2 +
    Math.log(sd) +
    inside -
    (0.5 * linear * linear) / precision +
    0.5 * Math.log(precision)
  );
}
