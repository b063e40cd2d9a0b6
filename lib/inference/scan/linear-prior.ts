import { lnNormalInterval } from '../gaussian-tail';
import { priorSupport, type ScalarPrior } from '../priors';

/**
 * The prior of a linear coefficient as Gaussian algebra takes it:
 * p(x) = exp(logConstant − ½ precision (x − mean)²) · x^power on [lo, hi], 0 elsewhere. Exact for every scalar prior.
 */
export interface LinearPrior {
  readonly mean: number;
  /** 0 for a flat factor. */
  readonly precision: number;
  readonly lo: number;
  readonly hi: number;
  readonly logConstant: number;
  /** −1 for a log-uniform prior, else 0. */
  readonly power: 0 | -1;
}

const LN_SQRT_TWO_PI = 0.5 * Math.log(2 * Math.PI);

export function linearPrior(prior: ScalarPrior): LinearPrior {
  const [lo, hi] = priorSupport(prior);
  const flat = { mean: 0, precision: 0, lo, hi };
  switch (prior.kind) {
    case 'uniform':
      return { ...flat, logConstant: -Math.log(hi - lo), power: 0 };
    case 'log-uniform':
      return { ...flat, logConstant: -Math.log(Math.log(hi / lo)), power: -1 };
    case 'normal':
    case 'half-normal':
    case 'truncated-normal': {
      const mean = prior.kind === 'half-normal' ? 0 : prior.mean;
      const { sd } = prior;
      const inside = lnNormalInterval((lo - mean) / sd, (hi - mean) / sd);
      return {
        mean,
        precision: 1 / (sd * sd),
        lo,
        hi,
        logConstant:
          -LN_SQRT_TWO_PI - Math.log(sd) - (Number.isFinite(lo) || Number.isFinite(hi) ? inside : 0),
        power: 0,
      };
    }
  }
}

/** A normal prior by mean and variance. */
export function normalLinearPrior(mean: number, variance: number): LinearPrior {
  return linearPrior({ kind: 'normal', mean, sd: Math.sqrt(variance) });
}
