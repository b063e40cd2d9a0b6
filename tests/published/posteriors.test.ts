import { describe, expect, it } from 'vitest';
import { diagnose } from '@/lib/sampler';
import type { Target } from '@/lib/sampler';
import { run } from '../lib/sampler/known-targets';
import schools from './data/posteriordb/eight-schools.json';
import kidiq from './data/posteriordb/kidiq.json';
import reference from './data/posteriordb/reference.json';

/**
 * Data, models (in words) and published means: stan-dev/posteriordb, commit 28f8d3d6, BSD-3-Clause (data/posteriordb/LICENCE.md).
 * Exact means and sds: derived by us at 40 digits (all parameters but one integrated analytically, that one by quadrature);
 * they agree with the published means within their errors. The targets below are written from the models.
 */
interface Exact {
  parameters: string[];
  mean: number[];
  sd: number[];
}

/** Mean and sd of every quantity within 4 Monte Carlo standard errors of the exact ones, on converged chains. */
function expectExact(exact: Exact, chains: Record<string, Float64Array[]>): void {
  exact.parameters.forEach((name, i) => {
    const found = diagnose(chains[name]);
    expect(found.rhat, name).toBeLessThan(1.01);
    expect(Math.min(found.essBulk, found.essTail), name).toBeGreaterThan(1000);
    expect(Math.abs(found.mean - exact.mean[i]), name).toBeLessThan(4 * found.mcseMean);
    expect(Math.abs(found.sd - exact.sd[i]), name).toBeLessThan(4 * found.mcseSd);
  });
}

function combine(chains: Float64Array[][], value: (...draw: number[]) => number): Float64Array[] {
  return chains[0].map((first, m) =>
    first.map((_, draw) => value(...chains.map((parameter) => parameter[m][draw]))),
  );
}

describe('the sampler without jumps agrees with published posteriors', () => {
  it('eight schools, non-centred: μ ~ N(0, 5), τ ~ half-Cauchy(0, 5), θ_j = μ + τ t_j', () => {
    const { y, sigma } = schools;
    const target: Target = {
      names: ['mu', 'tau', ...y.map((_, j) => `t${j + 1}`)],
      periods: new Array<null>(10).fill(null),
      logPrior(x) {
        if (x[1] < 0) return -Infinity;
        let squares = (x[0] / 5) ** 2;
        for (let j = 0; j < 8; j++) squares += x[2 + j] ** 2;
        return -squares / 2 - Math.log1p((x[1] / 5) ** 2);
      },
      logLikelihood(x) {
        let squares = 0;
        for (let j = 0; j < 8; j++) squares += ((y[j] - x[0] - x[1] * x[2 + j]) / sigma[j]) ** 2;
        return -squares / 2;
      },
      drawPrior(rng, out) {
        out[0] = 5 * rng.normal();
        out[1] = 5 * Math.abs(Math.tan(Math.PI * (rng.uniform() - 0.5)));
        for (let j = 0; j < 8; j++) out[2 + j] = rng.normal();
      },
    };
    const settings = { warmup: 3000, blocks: target.names.map((_, i) => [i]) };
    const { columns } = run(target, [], settings, 'schools', 25_000);
    const [mu, tau] = columns;
    const chains: Record<string, Float64Array[]> = { mu, tau };
    y.forEach((_, j) => {
      chains[`theta[${j + 1}]`] = combine([mu, tau, columns[2 + j]], (m, t, z) => m + t * z);
    });
    expectExact(reference['eight_schools-eight_schools_noncentered'].exact, chains);
  });

  it('children’s test scores on mothers’ IQ: β flat, σ ~ half-Cauchy(0, 2.5)', () => {
    const { kid_score: scores, mom_iq: iq, N } = kidiq;
    const target: Target = {
      names: ['beta[1]', 'beta[2]', 'sigma'],
      periods: [null, null, null],
      logPrior: (x) => (x[2] > 0 ? -Math.log1p((x[2] / 2.5) ** 2) : -Infinity),
      logLikelihood(x) {
        let squares = 0;
        for (let i = 0; i < N; i++) squares += (scores[i] - x[0] - x[1] * iq[i]) ** 2;
        return -squares / (2 * x[2] * x[2]) - N * Math.log(x[2]);
      },
      drawPrior(rng, out) {
        // The flat priors can't be drawn from; the starts are spread far more widely than the posterior.
        out[0] = 100 * rng.normal();
        out[1] = 5 * rng.normal();
        out[2] = 2.5 * Math.abs(Math.tan(Math.PI * (rng.uniform() - 0.5)));
      },
    };
    const { columns } = run(target, [], { warmup: 3000, blocks: [[0, 1], [2]] }, 'kidiq', 12_000);
    const [first, second, sigma] = columns;
    const chains = { 'beta[1]': first, 'beta[2]': second, sigma };
    expectExact(reference['kidiq-kidscore_momiq'].exact, chains);
  });
});
