import { describe, expect, it } from 'vitest';
import { buildInference, type Inference } from '@/lib/inference';
import { createRng } from '@/lib/sampler/rng';
import type { Prior } from '@/lib/templates';
import { madeUpSpec } from './fixtures';
import { diagnoseAll, runReplicas } from './sampling';

const uniform = (lo: number, hi: number): Prior => ({ kind: 'uniform', lo, hi });
const fixed = (value: number): Prior => ({ kind: 'fixed', value });
const locked = { vertex: 2, background: [1, 2] };
const free = { background: [1, 2] };
const masses = { mu1: uniform(0.5, 4), mu2: uniform(0.5, 4), mu3: uniform(0.5, 4) };
const couplings = { ...masses, g: { kind: 'normal', mean: 0, sd: 5 } as Prior };
const half: Prior = { kind: 'half-normal', sd: 1 };

const cases: { what: string; id: string; options: Record<string, unknown>; priors: Record<string, Prior> }[] =
  [
    { what: 'background', id: 'background', options: free, priors: {} },
    { what: 'quadrature, one field', id: 'free-phase', options: { fields: 1, ...free }, priors: masses },
    { what: 'quadrature, two fields', id: 'free-phase', options: { fields: 2, ...free }, priors: masses },
    {
      what: 'quadrature, uniform and fixed amplitudes, fixed background',
      id: 'free-phase',
      options: { fields: 2, ...free },
      priors: {
        ...masses,
        a1: uniform(-2, 2),
        b1: fixed(0.1),
        a2: uniform(-1, 1),
        c1: uniform(-1, 1),
        c2: fixed(0.2),
      },
    },
    {
      what: 'polar, one field',
      id: 'free-phase',
      options: { fields: 1, amplitudes: 'amplitude-phase', ...free },
      priors: { ...masses, A1: uniform(0, 2) },
    },
    {
      what: 'polar, half-normal and log-uniform amplitudes',
      id: 'free-phase',
      options: { fields: 2, amplitudes: 'amplitude-phase', ...free },
      priors: { ...masses, A1: half, A2: { kind: 'log-uniform', lo: 0.05, hi: 2 } },
    },
    {
      what: 'polar, a fixed amplitude, a fixed phase and a fixed mass',
      id: 'free-phase',
      options: { fields: 2, amplitudes: 'amplitude-phase', ...free },
      priors: { mu1: uniform(0.5, 2), mu2: fixed(2.5), A1: fixed(0.2), A2: uniform(0, 2), phi2: fixed(0.4) },
    },
    { what: 'mixed, one field', id: 'locked-squeezed', options: { fields: 1, ...locked }, priors: couplings },
    {
      what: 'mixed, two fields',
      id: 'locked-squeezed',
      options: { fields: 2, ...locked },
      priors: couplings,
    },
    {
      what: 'mixed, fixed coupling and another angle prior',
      id: 'locked-squeezed',
      options: { fields: 2, ...locked },
      priors: { ...masses, g: fixed(3), theta: uniform(0.2, 1.2) },
    },
    {
      what: 'mixed, fixed angle',
      id: 'locked-squeezed',
      options: { fields: 2, ...locked },
      priors: { ...couplings, theta: fixed(0.6) },
    },
    {
      what: 'mixed with free phases, one field',
      id: 'locked-squeezed',
      options: { fields: 1, phases: 'free', ...locked },
      priors: couplings,
    },
    {
      what: 'mixed with free phases, two fields',
      id: 'locked-squeezed',
      options: { fields: 2, phases: 'free', ...locked },
      priors: couplings,
    },
    {
      what: 'mixed with free phases and a positive coupling',
      id: 'locked-squeezed',
      options: { fields: 2, phases: 'free', ...locked },
      priors: { ...masses, g: uniform(0, 10) },
    },
    {
      what: 'mixture of vertices, one field',
      id: 'locked-squeezed',
      options: { fields: 1, ...locked, vertex: 'mixture' },
      priors: couplings,
    },
    {
      what: 'mixture of vertices, two fields',
      id: 'locked-squeezed',
      options: { fields: 2, ...locked, vertex: 'mixture' },
      priors: couplings,
    },
    {
      what: 'mixture of vertices, another prior of its angle, fixed coupling',
      id: 'locked-squeezed',
      options: { fields: 2, ...locked, vertex: 'mixture' },
      priors: {
        ...masses,
        g: fixed(2),
        alpha: { kind: 'truncated-normal', mean: 0.3, sd: 0.4, lo: -1, hi: 1.5 },
      },
    },
    {
      what: 'mixture of vertices with free phases',
      id: 'locked-squeezed',
      options: { fields: 2, phases: 'free', ...locked, vertex: 'mixture' },
      priors: couplings,
    },
  ];

/** Draws of a jump from one starting point, with their ln densities. */
function drawJump(
  { target, jumps }: Inference,
  count: number,
  seed: string,
): { x: Float64Array; lnq: number }[] {
  const rng = createRng(seed);
  const from = new Float64Array(target.names.length);
  target.drawPrior(rng, from);
  return Array.from({ length: count }, () => {
    const x = new Float64Array(from.length);
    jumps[0].draw(rng, from, x);
    return { x, lnq: jumps[0].logDensity(x, from) };
  });
}

describe('the density that a spectral jump states is the one it draws from', () => {
  it.each(cases)('$what', ({ id, options, priors }) => {
    // Two jumps of the same model, one from data with errors half as large again: draws of the wide one, weighted by
    // narrow/wide, must have total weight 1 and the moments of draws of the narrow one.
    const narrow = buildInference(madeUpSpec(id, options, priors, 0.06));
    const wide = buildInference(madeUpSpec(id, options, priors, 0.075));
    const count = 12_000;
    const drawn = drawJump(narrow, count, 'narrow');
    const from = drawn[0].x;
    const weighted = drawJump(wide, count, 'wide').map(({ x, lnq }) => ({
      x,
      weight: Math.exp(narrow.jumps[0].logDensity(x, from) - lnq),
    }));
    const mean = (values: number[]): number => values.reduce((sum, value) => sum + value, 0) / values.length;
    const error = (values: number[], centre: number): number =>
      Math.sqrt(mean(values.map((value) => (value - centre) ** 2)) / values.length);

    const weights = weighted.map(({ weight }) => weight);
    const total = mean(weights);
    expect(Math.abs(total - 1)).toBeLessThan(4.5 * error(weights, total) + 1e-9);
    expect(error(weights, total), 'the two overlap').toBeLessThan(0.05);
    narrow.target.names.forEach((name, i) => {
      const circular = narrow.target.periods[i] !== null;
      const functions = circular
        ? [Math.sin, Math.cos]
        : [(v: number) => v, (v: number) => Math.abs(v) ** 0.5];
      for (const f of functions) {
        const plain = drawn.map(({ x }) => f(x[i]));
        const centre = mean(plain);
        const terms = weighted.map(({ x, weight }) => weight * (f(x[i]) - centre));
        const shift = mean(terms);
        const allowed = 4.5 * Math.hypot(error(terms, shift), error(plain, centre)) + 1e-9;
        expect(Math.abs(shift), `moment of ${name}`).toBeLessThan(allowed);
      }
    });
  });

  it('is the same when asked again after other points', () => {
    const inference = buildInference(
      madeUpSpec('locked-squeezed', { fields: 2, phases: 'free', ...locked }, couplings),
    );
    const drawn = drawJump(inference, 40, 'again');
    const fresh = buildInference(
      madeUpSpec('locked-squeezed', { fields: 2, phases: 'free', ...locked }, couplings),
    );
    for (const { x, lnq } of drawn.reverse()) expect(fresh.jumps[0].logDensity(x, x)).toBe(lnq);
  });
});

describe('with the likelihood off the jumps leave the prior as it is', () => {
  const flat = [
    { what: 'three quadrature fields', id: 'free-phase', options: { fields: 3, ...free }, priors: masses },
    {
      what: 'three mixed fields',
      id: 'locked-squeezed',
      options: { fields: 3, ...locked },
      priors: couplings,
    },
    {
      what: 'two mixed fields with free phases',
      id: 'locked-squeezed',
      options: { fields: 2, phases: 'free', ...locked },
      priors: couplings,
    },
    {
      what: 'two fields of a mixture of vertices',
      id: 'locked-squeezed',
      options: { fields: 2, ...locked, vertex: 'mixture' },
      priors: couplings,
    },
    {
      what: 'a field of a mixture of vertices with a free phase',
      id: 'locked-squeezed',
      options: { fields: 1, phases: 'free', ...locked, vertex: 'mixture' },
      priors: couplings,
    },
    {
      what: 'free phases with a fixed coupling',
      id: 'locked-squeezed',
      options: { fields: 2, phases: 'free', ...locked },
      priors: { ...masses, g: fixed(2) },
    },
  ];
  it.each(flat)('$what', ({ id, options, priors }) => {
    const draws = options.fields === 3 ? 2500 : 6000;
    // Errors so large that the jump, made for these data, reaches the whole prior.
    const inference = buildInference(madeUpSpec(id, options, priors, 2));
    const target = { ...inference.target, logLikelihood: () => 0 };
    const run = runReplicas(inference, draws, { target });
    expect(Math.min(...run.jumpAcceptance)).toBeGreaterThan(0.05);
    const diagnoses = diagnoseAll(run);
    const rng = createRng('prior');
    const x = new Float64Array(target.names.length);
    const reference = Array.from({ length: 40_000 }, () => {
      target.drawPrior(rng, x);
      return Float64Array.from(x);
    });
    target.names.forEach((name, i) => {
      const found = diagnoses[name];
      const values = reference.map((draw) => draw[i]);
      const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
      const variance = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (values.length - 1);
      const sd = Math.sqrt(variance);
      const error = Math.hypot(found.mcseMean, sd / Math.sqrt(values.length));
      expect(found.essBulk, `bulk size of ${name}`).toBeGreaterThan(400);
      expect(Math.abs(found.mean - mean) / error, `mean of ${name}`).toBeLessThan(4);
      expect(Math.abs(found.sd - sd) / Math.hypot(found.mcseSd, sd / 280), `sd of ${name}`).toBeLessThan(4);
    });
  });
});
