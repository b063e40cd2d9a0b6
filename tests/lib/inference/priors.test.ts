import { describe, expect, it } from 'vitest';
import {
  drawFromPrior,
  InferenceError,
  lnPriorDensity,
  logOrderProbability,
  priorCdf,
  priorMoments,
  priorSupport,
  sketchPrior,
  validatePrior,
  type ScalarPrior,
} from '@/lib/inference';
import { drawOrderedMasses } from '@/lib/inference/ordered-masses';
import { createRng } from '@/lib/sampler/rng';
import { compileTemplate, type Prior } from '@/lib/templates';
import { gaussLegendre } from '../templates/gauss-legendre';
import { binned } from './fixtures';

const rule = gaussLegendre(20);

function integrate(f: (x: number) => number, lo: number, hi: number, parts = 200): number {
  let sum = 0;
  for (let k = 0; k < parts; k += 1) {
    const half = (hi - lo) / (2 * parts);
    const middle = lo + (2 * k + 1) * half;
    for (const [node, weight] of rule) sum += half * weight * f(middle + half * node);
  }
  return sum;
}

const priors: ScalarPrior[] = [
  { kind: 'uniform', lo: -1, hi: 3 },
  { kind: 'log-uniform', lo: 0.2, hi: 8 },
  { kind: 'normal', mean: 1, sd: 2 },
  { kind: 'half-normal', sd: 1.5 },
  { kind: 'truncated-normal', mean: 0.5, sd: 1, lo: 0, hi: 2 },
  { kind: 'truncated-normal', mean: -4, sd: 1, lo: 0, hi: 3 },
];

describe('priors of one parameter', () => {
  it.each(priors)('$kind: density, distribution, moments and draws belong together', (prior) => {
    const [from, to] = priorSupport(prior);
    const lo = Math.max(from, -25);
    const hi = Math.min(to, 27);
    const density = (x: number): number => Math.exp(lnPriorDensity(prior, x));
    expect(integrate(density, lo, hi)).toBeCloseTo(1, 10);
    const mean = integrate((x) => x * density(x), lo, hi);
    const square = integrate((x) => (x - mean) ** 2 * density(x), lo, hi);
    const moments = priorMoments(prior);
    expect(moments.mean).toBeCloseTo(mean, 9);
    expect(moments.sd).toBeCloseTo(Math.sqrt(square), 9);
    const middle = mean + 0.3 * moments.sd;
    expect(priorCdf(prior, middle)).toBeCloseTo(integrate(density, lo, middle), 10);
    expect(lnPriorDensity(prior, from - 1)).toBe(-Infinity);

    const rng = createRng(`draws ${JSON.stringify(prior)}`);
    const count = 20_000;
    const sorted = Float64Array.from({ length: count }, () => drawFromPrior(prior, rng)).sort();
    // Kolmogorov–Smirnov at 1e-4: √n D < 2.23.
    const distance = sorted.reduce((worst, x, i) => {
      const expected = priorCdf(prior, x);
      return Math.max(worst, Math.abs(expected - i / count), Math.abs(expected - (i + 1) / count));
    }, 0);
    expect(distance * Math.sqrt(count)).toBeLessThan(2.23);

    const sketch = sketchPrior(prior, 65);
    expect(sketch.x).toHaveLength(65);
    expect(sketch.density[32]).toBeCloseTo(density(sketch.x[32]), 12);
  });

  const parameters = Object.fromEntries(
    [
      compileTemplate('free-phase', { fields: 1, amplitudes: 'amplitude-phase', background: [1] }, binned),
      compileTemplate('locked-squeezed', { fields: 2, background: [1] }, binned),
    ].flatMap(({ parameters: list }) => list.map((declaration) => [declaration.name, declaration] as const)),
  );
  const faults: [string, Prior, string, string][] = [
    ['mu1', { kind: 'uniform', lo: 3, hi: 2 }, 'prior_invalid', 'priors.mu1.lo'],
    ['mu1', { kind: 'uniform', lo: 2, hi: 2 }, 'prior_invalid', 'priors.mu1.lo'],
    ['mu1', { kind: 'uniform', lo: Number.NaN, hi: 2 }, 'prior_invalid', 'priors.mu1.lo'],
    ['mu1', { kind: 'log-uniform', lo: 0, hi: 2 }, 'prior_invalid', 'priors.mu1.lo'],
    ['mu1', { kind: 'uniform', lo: -1, hi: 2 }, 'prior_outside_range', 'priors.mu1.lo'],
    ['mu1', { kind: 'uniform', lo: 1, hi: 200 }, 'prior_outside_range', 'priors.mu1.hi'],
    ['mu1', { kind: 'normal', mean: 2, sd: 1 }, 'prior_outside_range', 'priors.mu1.lo'],
    ['mu1', { kind: 'fixed', value: -2 }, 'prior_outside_range', 'priors.mu1.value'],
    ['mu2', { kind: 'fixed', value: 0 }, 'prior_outside_range', 'priors.mu2.value'],
    ['c1', { kind: 'normal', mean: 0, sd: 0 }, 'prior_invalid', 'priors.c1.sd'],
    ['A1', { kind: 'normal', mean: 0, sd: 1 }, 'prior_outside_range', 'priors.A1.lo'],
    ['A1', { kind: 'uniform', lo: -0.1, hi: 1 }, 'prior_outside_range', 'priors.A1.lo'],
    ['c1', { kind: 'isotropic' }, 'prior_not_allowed', 'priors.c1.kind'],
    ['c1', { kind: 'truncated-normal', mean: 90, sd: 1, lo: 0, hi: 1 }, 'prior_invalid', 'priors.c1.mean'],
  ];
  it.each(faults)('%s refuses %j', (name, prior, code, path) => {
    const fault = validatePrior(prior, parameters[name]);
    expect(fault).toBeInstanceOf(InferenceError);
    expect(fault).toMatchObject({ code, path });
    expect(fault?.message).toContain(name);
    expect(fault?.remedy.length).toBeGreaterThan(5);
  });

  it('accepts every default prior', () => {
    for (const declaration of Object.values(parameters)) {
      expect(validatePrior(declaration.defaultPrior, declaration)).toBeNull();
    }
  });
});

describe('ordered masses', () => {
  const uniform = (lo: number, hi: number): ScalarPrior => ({ kind: 'uniform', lo, hi });
  const fixed = (value: number) => ({ kind: 'fixed' as const, value });

  it('have probability 1/n! for equal priors', () => {
    const prior: ScalarPrior = { kind: 'truncated-normal', mean: 2, sd: 1, lo: 0.1, hi: 6 };
    expect(logOrderProbability([prior])).toBe(0);
    expect(logOrderProbability([prior, prior])).toBeCloseTo(-Math.log(2), 14);
    expect(logOrderProbability([prior, prior, prior, prior])).toBeCloseTo(-Math.log(24), 14);
  });

  it('have the closed forms of overlapping uniforms and fixed masses to 1e-10', () => {
    // P(x1 < x2), x1 in [0, 2], x2 in [1, 4]: 1 − P(both in [1, 2], x1 > x2) = 1 − ½ (1/2)(1/3).
    expect(logOrderProbability([uniform(0, 2), uniform(1, 4)])).toBeCloseTo(Math.log(11 / 12), 10);
    expect(logOrderProbability([uniform(0, 1), uniform(1, 4)])).toBeCloseTo(0, 10);
    expect(logOrderProbability([uniform(0.2, 8), fixed(3)])).toBeCloseTo(Math.log(2.8 / 7.8), 10);
    expect(logOrderProbability([fixed(3), uniform(0.2, 8)])).toBeCloseTo(Math.log(5 / 7.8), 10);
    const between = logOrderProbability([uniform(0, 4), fixed(1), uniform(0, 4)]);
    expect(between).toBeCloseTo(Math.log((1 / 4) * (3 / 4)), 10);
    // A log-uniform below a uniform: ∫ ln(x/0.5)/ln 16 dx/7 on [1, 8], upper part certain.
    const below = integrate((x) => Math.log(x / 0.5) / Math.log(16) / 7, 1, 8);
    expect(logOrderProbability([{ kind: 'log-uniform', lo: 0.5, hi: 8 }, uniform(1, 8)])).toBeCloseTo(
      Math.log(below),
      10,
    );
  });

  it('are refused a place where no order is possible', () => {
    expect(logOrderProbability([uniform(3, 4), uniform(1, 2)])).toBe(-Infinity);
    expect(logOrderProbability([fixed(2), fixed(1)])).toBe(-Infinity);
  });

  it('are drawn in order, as order statistics for equal uniforms', () => {
    const rng = createRng('order');
    const out = new Float64Array(3);
    const sums = new Float64Array(3);
    const count = 20_000;
    for (let k = 0; k < count; k += 1) {
      drawOrderedMasses([uniform(0, 4), uniform(0, 4), uniform(0, 4)], rng, out);
      expect(out[0] < out[1] && out[1] < out[2]).toBe(true);
      out.forEach((value, i) => (sums[i] += value));
    }
    // Means 1, 2, 3; sds 4 √(3/80), 4 √(4/80), 4 √(3/80).
    [1, 2, 3].forEach((mean, i) => {
      const sd = 4 * Math.sqrt((i === 1 ? 4 : 3) / 80);
      expect(Math.abs(sums[i] / count - mean)).toBeLessThan((4 * sd) / Math.sqrt(count));
    });
  });
});
