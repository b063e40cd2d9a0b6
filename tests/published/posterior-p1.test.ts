import { describe, expect, it } from 'vitest';
import { buildInference } from '@/lib/inference';
import { compileTemplate, type Prior } from '@/lib/templates';
import { diagnoseAll, runReplicas } from '../lib/inference/sampling';
import reference from './data/posteriors/p1.json';

/** Reference by importance sampling, derived by us (see data/posteriors/README.md). */
describe('the benchmark posterior of two fields in amplitude–phase form', () => {
  const uniform = (lo: number, hi: number): Prior => ({ kind: 'uniform', lo, hi });
  const inference = buildInference({
    data: {
      S: Float64Array.from(reference.S),
      covariance: Float64Array.from(reference.covariance.flat()),
      mockCount: null,
    },
    likelihood: 'normal',
    template: compileTemplate(
      'free-phase',
      { fields: 2, amplitudes: 'amplitude-phase', background: [1, 2] },
      { kind: 'points', kappa: Float64Array.from(reference.kappa) },
    ),
    priors: {
      mu1: uniform(0.3, 8),
      mu2: uniform(0.3, 8),
      A1: uniform(0, 3),
      A2: uniform(0, 3),
      phi1: uniform(-Math.PI, Math.PI),
      phi2: uniform(-Math.PI, Math.PI),
      c1: uniform(-3, 3),
      c2: uniform(-3, 3),
    },
  });

  it('has its means and sds within the errors, with half of the jumps accepted, started over the prior', () => {
    const run = runReplicas(inference, 6000);
    const diagnoses = diagnoseAll(run);
    expect(Math.min(...run.jumpAcceptance)).toBeGreaterThan(0.5);
    for (const [name, { mean, mean_error: error, sd }] of Object.entries(reference.reference.parameters)) {
      const found = diagnoses[name];
      expect(found.rhat, `R-hat of ${name}`).toBeLessThan(1.01);
      expect(found.essBulk, `bulk size of ${name}`).toBeGreaterThan(5000);
      expect(Math.abs(found.mean - mean) / Math.hypot(found.mcseMean, error), `mean of ${name}`).toBeLessThan(
        4,
      );
      // The reference's sds are rounded to 1e-5 and quoted without an error.
      expect(Math.abs(found.sd - sd) / Math.hypot(found.mcseSd, 1e-3), `sd of ${name}`).toBeLessThan(4);
    }
  }, 60_000);
});
