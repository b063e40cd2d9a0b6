import { describe, expect, it } from 'vitest';
import {
  createRng,
  diagnose,
  essBulk,
  essMean,
  essQuantile,
  essSd,
  essTail,
  mcseMean,
  mcseQuantile,
  mcseSd,
  rhat,
} from '@/lib/sampler';

const MEASURES = {
  rhat,
  essBulk,
  essTail,
  essMean,
  essSd,
  mcseMean,
  mcseSd,
  essMedian: (chains: Float64Array[]) => essQuantile(chains, 0.5),
  mcseMedian: (chains: Float64Array[]) => mcseQuantile(chains, 0.5),
};

/** Stationary AR(1) chains of unit variance. */
function autoregressive(rho: number, draws: number, chains: number, seed: string): Float64Array[] {
  const rng = createRng(seed);
  const noise = Math.sqrt(1 - rho * rho);
  return Array.from({ length: chains }, () => {
    let x = rng.normal();
    return Float64Array.from({ length: draws }, () => (x = rho * x + noise * rng.normal()));
  });
}

describe('convergence diagnostics', () => {
  it.each([
    [0, 1],
    [0.5, 3],
    [0.9, 19],
    [0.98, 99],
  ])('see the autocorrelation time of an AR(1) chain with coefficient %d', (rho, tau) => {
    const draws = 50_000;
    const chains = autoregressive(rho, draws, 4, `ar ${rho}`);
    const exact = (4 * draws) / tau;
    expect(essMean(chains) / exact).toBeGreaterThan(0.87);
    expect(essMean(chains) / exact).toBeLessThan(1.15);
    expect(Math.abs(diagnose(chains).mean)).toBeLessThan(4 * mcseMean(chains));
    expect(rhat(chains)).toBeLessThan(1.01);
  });

  it('find antithetic chains more informative than independent draws', () => {
    const chains = autoregressive(-0.6, 10_000, 4, 'antithetic');
    expect(essMean(chains) / (40_000 * 4)).toBeGreaterThan(0.85);
    expect(essMean(chains) / (40_000 * 4)).toBeLessThan(1.15);
  });

  it('do not depend on how far out the autocovariances were asked for', () => {
    // One long chain whose sum stops far beyond the first reach of the transform, against plain sums.
    const chain = autoregressive(0.995, 9_000, 1, 'long memory')[0];
    const half = chain.length / 2;
    const halves = [chain.slice(0, half), chain.slice(half)];
    expect(essMean([chain]) / plainEss(halves)).toBeCloseTo(1, 9);
  });

  it('have no value for constant chains, and never call them converged', () => {
    const same = [new Float64Array(500).fill(2.5), new Float64Array(500).fill(2.5)];
    const apart = [new Float64Array(500).fill(0.1), new Float64Array(500).fill(0.7)];
    for (const measure of Object.values(MEASURES)) expect(measure(same)).toBeNaN();
    for (const name of ['rhat', 'essBulk', 'essMean', 'mcseMean'] as const) {
      expect(MEASURES[name](apart)).toBeNaN();
    }
    expect(diagnose(same).constant).toBe(true);
    expect(diagnose(same).mean).toBe(2.5);
  });

  it('have no value where a draw is not finite, and say where it is', () => {
    for (const bad of [NaN, Infinity, -Infinity]) {
      const chains = autoregressive(0, 100, 3, 'bad');
      chains[1][42] = bad;
      chains[2][7] = bad;
      for (const measure of Object.values(MEASURES)) expect(measure(chains)).toBeNaN();
      const found = diagnose(chains);
      expect(found.nonFinite).toEqual({ count: 2, chain: 1, draw: 42 });
      expect([found.mean, found.sd, found.q50, found.rhat]).toEqual([NaN, NaN, NaN, NaN]);
    }
  });

  it('have no value without draws, and no effective size for very short chains', () => {
    expect(rhat([])).toBeNaN();
    expect(rhat([new Float64Array(0)])).toBeNaN();
    const short = autoregressive(0, 10, 4, 'short');
    expect(essBulk(short)).toBeNaN();
    expect(rhat(short)).toBeGreaterThan(0.9);
    expect(diagnose(short).tooShort).toBe(true);
    expect(diagnose(autoregressive(0, 12, 4, 'short')).tooShort).toBe(false);
  });

  it('see a replica in another place, and one with another spread', () => {
    const moved = autoregressive(0, 1000, 4, 'moved');
    moved[3] = moved[3].map((x) => x + 1);
    expect(rhat(moved)).toBeGreaterThan(1.05);
    const wider = autoregressive(0, 1000, 4, 'wider');
    wider[0] = wider[0].map((x) => 3 * x);
    expect(rhat(wider)).toBeGreaterThan(1.05);
  });

  it('give a value for a quantity that is only ever 0 or 1', () => {
    const chains = autoregressive(0, 1000, 4, 'binary').map((chain) => chain.map((x) => (x > 0 ? 1 : 0)));
    expect(rhat(chains)).toBeLessThan(1.01);
  });

  it('refuse chains of different lengths', () => {
    expect(() => rhat([new Float64Array(10), new Float64Array(11)])).toThrow(RangeError);
  });

  it('leave the draws as they were', () => {
    const chains = autoregressive(0.5, 301, 2, 'untouched');
    const before = structuredClone(chains);
    diagnose(chains);
    expect(chains).toEqual(before);
  });

  it('are the same all at once as one by one', () => {
    const chains = autoregressive(0.7, 1001, 3, 'at once').map((chain) => chain.map((x) => Math.exp(x)));
    const all = diagnose(chains);
    for (const name of ['rhat', 'essBulk', 'essTail', 'essMean', 'essSd', 'mcseMean', 'mcseSd'] as const) {
      expect(all[name]).toBe(MEASURES[name](chains));
    }
    expect(all.mcseQ2_5).toBe(mcseQuantile(chains, 0.025));
    expect(all.mcseQ16).toBe(mcseQuantile(chains, 0.16));
    expect(all.mcseQ50).toBe(mcseQuantile(chains, 0.5));
    expect(all.mcseQ84).toBe(mcseQuantile(chains, 0.84));
    expect(all.mcseQ97_5).toBe(mcseQuantile(chains, 0.975));
  });
});

/** The definition once more, by plain sums over all lags. */
function plainEss(chains: Float64Array[]): number {
  const m = chains.length;
  const n = chains[0].length;
  const means = chains.map((chain) => chain.reduce((sum, x) => sum + x, 0) / n);
  const gamma = (lag: number) => {
    let sum = 0;
    chains.forEach((chain, j) => {
      for (let i = lag; i < n; i++) sum += (chain[i] - means[j]) * (chain[i - lag] - means[j]);
    });
    return sum / (n * m);
  };
  const within = (gamma(0) * n) / (n - 1);
  const grand = means.reduce((sum, mean) => sum + mean, 0) / m;
  const between = means.reduce((sum, mean) => sum + (mean - grand) ** 2, 0) / (m - 1);
  const total = (within * (n - 1)) / n + between;
  const rho = (lag: number) => (lag === 0 ? 1 : 1 - (within - gamma(lag)) / total);
  let pair = rho(0) + rho(1);
  let tau = -1;
  let lag = 0;
  for (; pair > 0; lag += 2) {
    tau += 2 * pair;
    pair = Math.min(pair, rho(lag + 2) + rho(lag + 3));
  }
  return (m * n) / (tau + Math.max(0, rho(lag)));
}
