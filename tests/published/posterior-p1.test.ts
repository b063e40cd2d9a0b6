import { describe, expect, it } from 'vitest';
import { buildP1 } from '../../scripts/bench/p1';
import { diagnoseAll, runReplicas } from '../lib/inference/sampling';
import reference from './data/posteriors/p1.json';

/** Reference by importance sampling, derived by us (see data/posteriors/README.md). */
describe('the benchmark posterior of two fields in amplitude–phase form', () => {
  const inference = buildP1();

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
