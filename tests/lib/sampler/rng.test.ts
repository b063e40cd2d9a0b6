import { describe, expect, it } from 'vitest';
import { createRng, replicaSeed, restoreRng, SamplerError } from '@/lib/sampler';

describe('random numbers', () => {
  it('are fixed by the seed and differ between seeds', () => {
    const draw = (seed: string) => {
      const rng = createRng(seed);
      return Array.from({ length: 20 }, () => [rng.uniform(), rng.normal()]);
    };
    expect(draw('a')).toEqual(draw('a'));
    expect(draw('a')).not.toEqual(draw('b'));
    expect(draw(replicaSeed('a', 0))).not.toEqual(draw(replicaSeed('a', 1)));
  });

  it('go on identically from a state that was cloned in the middle of a pair of normals', () => {
    const rng = createRng('state');
    for (let i = 0; i < 1001; i++) rng.normal();
    const state = structuredClone(rng.state());
    expect(state.spare).not.toBeNull();
    const restored = restoreRng(state);
    for (let i = 0; i < 100; i++) {
      expect(restored.normal()).toBe(rng.normal());
      expect(restored.uniform()).toBe(rng.uniform());
    }
  });

  it('give a state that later draws leave alone', () => {
    const rng = createRng('copy');
    const state = rng.state();
    const kept = structuredClone(state);
    rng.normal();
    expect(state).toEqual(kept);
  });

  it('refuse a state that they did not write', () => {
    expect(() => restoreRng({ generator: { s0: 0.1 }, spare: null })).toThrow(SamplerError);
    expect(() => restoreRng({ generator: null, spare: null })).toThrow(/same seed/);
  });

  it('use 53 bits inside the open interval', () => {
    const rng = createRng('bits');
    let beyond32 = 0;
    for (let i = 0; i < 20_000; i++) {
      const u = rng.uniform();
      expect(u > 0 && u < 1).toBe(true);
      expect(Number.isInteger(u * 2 ** 53)).toBe(true);
      if (!Number.isInteger(u * 2 ** 32)) beyond32++;
    }
    expect(beyond32).toBeGreaterThan(19_900);
  });

  it('are uniform, and normal in their first four moments', () => {
    const n = 400_000;
    const rng = createRng('moments');
    const sums = [0, 0, 0, 0];
    const counts = new Array<number>(20).fill(0);
    for (let i = 0; i < n; i++) {
      const z = rng.normal();
      for (let k = 0; k < 4; k++) sums[k] += z ** (k + 1);
      counts[Math.floor(20 * rng.uniform())]++;
    }
    const expected = [0, 1, 0, 3];
    const variance = [1, 2, 15, 96];
    for (let k = 0; k < 4; k++) {
      expect(Math.abs(sums[k] / n - expected[k])).toBeLessThan(4 * Math.sqrt(variance[k] / n));
    }
    const chiSquare = counts.reduce((sum, count) => sum + (count - n / 20) ** 2 / (n / 20), 0);
    // 0.999 quantile of chi-square with 19 degrees of freedom.
    expect(chiSquare).toBeLessThan(43.82);
  });

  it('start uniformly over the replicas of one master seed', () => {
    const firsts = Float64Array.from({ length: 10_000 }, (_, i) =>
      createRng(replicaSeed('master', i)).uniform(),
    ).sort();
    let distance = 0;
    firsts.forEach((u, i) => {
      distance = Math.max(distance, Math.abs(u - i / firsts.length), Math.abs((i + 1) / firsts.length - u));
    });
    // Kolmogorov's 0.999 bound.
    expect(distance * Math.sqrt(firsts.length)).toBeLessThan(1.95);
  });
});
