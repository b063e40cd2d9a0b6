import { describe, expect, it } from 'vitest';
import { fitMeasurement, measurement } from '../lib/inference/measured';
import { diagnoseAll, runReplicas } from '../lib/inference/sampling';
import { lockedPosterior } from './locked-quadrature';

describe('measurements with mocks', () => {
  it('one field of free phase: the mass put in is within 3 sd', () => {
    const run = runReplicas(
      fitMeasurement('one-field', 'free-phase', { fields: 1, background: [1, 2, 3] }),
      2000,
    );
    const { mu1, ...others } = diagnoseAll(run);
    for (const found of [mu1, ...Object.values(others)]) expect(found.rhat).toBeLessThan(1.01);
    expect(Math.abs(mu1.mean - 1.3)).toBeLessThan(3 * mu1.sd);
    expect(mu1.sd).toBeLessThan(0.1);
  });

  it('two mixed fields: masses and angle are those of an independent quadrature', () => {
    const { axis, data } = measurement('two-field', 0.2);
    const run = runReplicas(
      fitMeasurement('two-field', 'locked-squeezed', { fields: 2, vertex: 2, background: [1, 2, 3] }),
      4000,
    );
    const diagnoses = diagnoseAll(run);
    const p = data.S.length;
    const mocks = data.mockCount ?? NaN;
    const parameters = 7;
    const b = (mocks - p - 2) / ((mocks - p - 1) * (mocks - p - 4));
    const inflation = b * (p - parameters);
    const exact = lockedPosterior({
      lo: axis.lo,
      hi: axis.hi,
      S: data.S,
      covariance: data.covariance,
      mocks,
      exponent: parameters + 2 + (mocks - 1 + inflation) / (1 + inflation),
      massRange: [0.2, 8],
      fineEnd: 1.6,
      fineStep: 0.004,
      couplingSd: 30,
      backgroundSd: 3,
      powers: [1, 2, 3],
    });
    expect(Math.min(...run.jumpAcceptance)).toBeGreaterThan(0.4);
    for (const name of ['mu1', 'mu2', 'theta'] as const) {
      const found = diagnoses[name];
      expect(found.rhat, `R-hat of ${name}`).toBeLessThan(1.01);
      expect(Math.abs(found.mean - exact.mean[name]) / found.sd, `mean of ${name} in sd`).toBeLessThan(3);
      expect(Math.abs(found.mean - exact.mean[name]) / found.mcseMean, `mean of ${name}`).toBeLessThan(4);
      expect(Math.abs(found.sd - exact.sd[name]) / found.mcseSd, `sd of ${name}`).toBeLessThan(4);
    }
  });
});
