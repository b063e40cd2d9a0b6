import { describe, expect, it } from 'vitest';
import { diagnose, mcseQuantile } from '@/lib/sampler';
import type { Target } from '@/lib/sampler';
import { run } from '../lib/sampler/known-targets';
import nist from './data/nist-mcmc/mcmc01.json';

/**
 * NIST Statistical Reference Datasets, Markov chain Monte Carlo, mcmc01: quantiles certified by NIST (US public domain);
 * means and sds derived by us from the closed form, which gives the certified quantiles to all their digits.
 * y_i ~ N(μ, σ), prior 1/σ. Hard on purpose: a mean of 10⁸ with a spread of 0.1.
 */
describe('the sampler agrees with NIST’s mcmc01', () => {
  const { y } = nist;
  const target: Target = {
    names: ['mu', 'sigma'],
    periods: [null, null],
    logPrior: (x) => (x[1] > 0 ? -Math.log(x[1]) : -Infinity),
    logLikelihood(x) {
      let squares = 0;
      for (const value of y) squares += (value - x[0]) ** 2;
      return -squares / (2 * x[1] * x[1]) - y.length * Math.log(x[1]);
    },
    drawPrior(rng, out) {
      // The improper prior can't be drawn from; the starts are spread hundreds of times more widely than the posterior.
      out[0] = 1e8 + 30 * rng.normal();
      out[1] = Math.exp(3 * rng.normal());
    },
  };
  const { columns } = run(target, [], { warmup: 3000, blocks: [[0], [1]] }, 'mcmc01', 50_000);

  it.each(['mu', 'sigma'] as const)('in mean, sd and the certified quantiles of %s', (name) => {
    const chains = columns[name === 'mu' ? 0 : 1];
    const found = diagnose(chains);
    expect(found.rhat).toBeLessThan(1.01);
    expect(Math.min(found.essBulk, found.essTail)).toBeGreaterThan(10_000);
    expect(Math.abs(found.mean - nist.derived[name].mean)).toBeLessThan(4 * found.mcseMean);
    expect(Math.abs(found.sd - nist.derived[name].sd)).toBeLessThan(4 * found.mcseSd);
    const quantiles = { '0.025': found.q2_5, '0.5': found.q50, '0.975': found.q97_5 };
    for (const [p, certified] of Object.entries(nist.certified[name])) {
      const miss = quantiles[p as keyof typeof quantiles] - certified;
      expect(Math.abs(miss), p).toBeLessThan(4 * mcseQuantile(chains, Number(p)));
    }
  });
});
