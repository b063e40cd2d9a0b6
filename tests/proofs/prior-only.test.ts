import { describe, expect } from 'vitest';
import { buildInference } from '@/lib/inference';
import { advance, startReplica } from '@/lib/sampler';
import { samplerOfNewFits, samplerSettings } from '@/lib/services/fit-sampler';
import { compileTemplate, type Prior } from '@/lib/templates';
import { proof } from './proof';

/** p of the Kolmogorov–Smirnov distance from a distribution, by the limit with Stephens' (1970) correction for n. */
function ksProbability(draws: readonly number[], cdf: (x: number) => number): number {
  const n = draws.length;
  const sorted = [...draws].sort((a, b) => a - b);
  const distance = Math.max(...sorted.map((x, i) => Math.max((i + 1) / n - cdf(x), cdf(x) - i / n)));
  const scaled = (Math.sqrt(n) + 0.12 + 0.11 / Math.sqrt(n)) * distance;
  if (scaled < 0.3) return 1;
  let sum = 0;
  for (let j = 1; j <= 100; j += 1) sum += 2 * (-1) ** (j - 1) * Math.exp(-2 * j * j * scaled * scaled);
  return sum;
}

/** Draws of the sampler with the likelihood off, far enough apart to be independent: the ladder draws from the prior anew. */
function priorDraws(id: string, options: Record<string, unknown>, priors: Record<string, Prior>, n: number) {
  const kappa = Float64Array.from({ length: 12 }, (_, i) => 0.02 * 1.2 ** i);
  const template = compileTemplate(id, options, { kind: 'points', kappa });
  const covariance = Float64Array.from({ length: 144 }, (_, k) => (k % 13 === 0 ? 0.01 : 0));
  const data = { S: new Float64Array(12), covariance, mockCount: null };
  const { target, blocks } = buildInference({ data, likelihood: 'normal', template, priors });
  const off = { ...target, logLikelihood: () => 0 };
  const settings = { ...samplerSettings({ warmup: 200, sampler: samplerOfNewFits }, blocks), walkEvery: 1 };
  let state = startReplica(off, [], settings, 'prior only', 0);
  state = advance(off, [], settings, state, 200).state;
  const apart = 40;
  const { block } = advance(off, [], settings, state, n * apart);
  return Object.fromEntries(
    target.names.map((name, j) => [
      name,
      Array.from({ length: n }, (_, i) => block.values[i * apart * block.width + 2 + j]),
    ]),
  );
}

const clamp = (p: number): number => Math.min(1, Math.max(0, p));
const mass = (mu: number): number => clamp((mu - 0.5) / 5.5);
const uniformMass: Prior = { kind: 'uniform', lo: 0.5, hi: 6 };

/** Distributions of the order statistics of three equal masses and of isotropic axes, written down from their definitions. */
const marginals: Record<string, (x: number) => number> = {
  mu1: (x) => 1 - (1 - mass(x)) ** 3,
  mu2: (x) => 3 * mass(x) ** 2 - 2 * mass(x) ** 3,
  mu3: (x) => mass(x) ** 3,
  theta12: (x) => clamp(x / (Math.PI / 2)),
  theta13: (x) => Math.sin(x),
  c1: (x) => clamp((x + 2) / 4),
  g: (x) => clamp(Math.log(x) / Math.log(100)),
};

describe('the prior alone', () => {
  proof(
    {
      name: 'prior-only',
      claim:
        'with the likelihood off every marginal that the priors induce is met: masses as order statistics, angles as isotropic',
      unit: 'independent draws',
      gate: 2000,
      full: 2000,
      seed: 0,
    },
    ({ size, record }) => {
      const draws = priorDraws(
        'locked-squeezed',
        { fields: 3, vertex: 1, background: [1] },
        {
          mu1: uniformMass,
          mu2: uniformMass,
          mu3: uniformMass,
          theta12: { kind: 'isotropic' },
          theta13: { kind: 'isotropic' },
          g: { kind: 'log-uniform', lo: 1, hi: 100 },
          c1: { kind: 'uniform', lo: -2, hi: 2 },
        },
        size,
      );
      expect(Object.keys(draws).sort()).toEqual(Object.keys(marginals).sort());
      const found = Object.fromEntries(
        Object.entries(draws).map(([name, values]) => [name, ksProbability(values, marginals[name])]),
      );
      // What the draws are not: masses without their order, an angle that is uniform.
      const wrong = {
        mu1: ksProbability(draws.mu1, mass),
        theta13: ksProbability(draws.theta13, marginals.theta12),
      };
      record({ p: found, wrong });
      for (const [name, p] of Object.entries(found)) expect(p, name).toBeGreaterThan(1e-4);
      for (const p of Object.values(wrong)) expect(p).toBeLessThan(1e-4);
    },
  );
});
