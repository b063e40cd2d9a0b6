import { expect, it } from 'vitest';
import { buildCollapsedModel, scanModes } from '@/lib/inference/scan';
import { madeUpSpec } from '../fixtures';

it.each([
  ['free-phase', { fields: 1 }, {}],
  ['free-phase', { fields: 2 }, {}],
  ['free-phase', { fields: 1, amplitudes: 'amplitude-phase' }, { A1: { kind: 'fixed', value: 0.1 } }],
  ['free-phase', { fields: 2, amplitudes: 'amplitude-phase' }, {}],
  ['free-phase', { fields: 1 }, { a1: { kind: 'fixed', value: 0.1 } }],
  ['locked-squeezed', { fields: 1, vertex: 'mixture' }, {}],
  ['locked-squeezed', { fields: 2, vertex: 'mixture' }, {}],
  ['locked-squeezed', { fields: 2, vertex: 1 }, { g: { kind: 'fixed', value: 5 } }],
  ['locked-squeezed', { fields: 2, vertex: 1 }, { theta: { kind: 'fixed', value: 0.4 } }],
  ['locked-squeezed', { fields: 2, vertex: 1, phases: 'free' }, {}],
  ['locked-squeezed', { fields: 1, vertex: 'mixture', phases: 'free' }, {}],
] as const)(
  '%s %j with %j: shares add up to one, fits are finite',
  { timeout: 60_000 },
  (id, options, priors) => {
    const spec = madeUpSpec(id, { ...options, background: [1] }, priors);
    const model = buildCollapsedModel(spec);
    const at = options.fields === 1 ? [2.1] : [1.1, 2.6];
    expect(Number.isFinite(model.fit(at).logLikelihood)).toBe(true);
    expect(model.fit(at).logLikelihood).toBeGreaterThanOrEqual(model.background().logLikelihood - 20);
    const evidence = model.logEvidence(at, 1);
    if (evidence !== null) expect(Number.isFinite(evidence)).toBe(true);
    const modes = scanModes(spec, 'seed')?.modes ?? [];
    const known = modes.filter(({ weight }) => !Number.isNaN(weight));
    if (modes.length > 0 && known.length === modes.length) {
      const sum = known.reduce((total, { weight }) => total + weight, 0);
      expect(sum).toBeGreaterThan(0.97);
      expect(sum).toBeLessThan(1 + 1e-9);
    }
  },
);
