import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { buildInference, type FitData, type Inference } from '@/lib/inference';
import { compileTemplate, type Axis } from '@/lib/templates';
import { diagnoseAll, runReplicas } from '../lib/inference/sampling';
import { lockedPosterior } from './locked-quadrature';

/** Measurement files with mocks, derived by us (see tests/data/measurements/README.md). */
function rowsOf(file: string): number[][] {
  const path = fileURLToPath(new URL(`../data/measurements/${file}`, import.meta.url));
  return readFileSync(path, 'utf8')
    .trim()
    .split('\n')
    .filter((line) => /^[-+.\d]/.test(line))
    .map((line) => line.split(',').map(Number));
}

/** Bins below the cut, and the sample covariance of their mocks. */
function measurement(name: string, kappaMax: number): { axis: Axis & { kind: 'bins' }; data: FitData } {
  const rows = rowsOf(`${name}.csv`);
  const kept = rows.flatMap((row, i) => (row[1] <= kappaMax * (1 + 1e-9) ? [i] : []));
  const mocks = rowsOf(`${name}-mocks.csv`);
  const mean = kept.map((i) => mocks.reduce((sum, mock) => sum + mock[i], 0) / mocks.length);
  const covariance = kept.flatMap((i, a) =>
    kept.map((j, b) => {
      const sum = mocks.reduce((total, mock) => total + (mock[i] - mean[a]) * (mock[j] - mean[b]), 0);
      return sum / (mocks.length - 1);
    }),
  );
  return {
    axis: {
      kind: 'bins',
      lo: Float64Array.from(kept, (i) => rows[i][0]),
      hi: Float64Array.from(kept, (i) => rows[i][1]),
      weightPower: 0,
    },
    data: {
      S: Float64Array.from(kept, (i) => rows[i][3]),
      covariance: Float64Array.from(covariance),
      mockCount: mocks.length,
    },
  };
}

function fit(name: string, id: string, options: Record<string, unknown>): Inference {
  const { axis, data } = measurement(name, 0.2);
  const template = compileTemplate(id, options, axis);
  const priors = Object.fromEntries(template.parameters.map((p) => [p.name, p.defaultPrior]));
  return buildInference({ data, likelihood: 'matched-t', template, priors });
}

describe('measurements with mocks', () => {
  it('one field of free phase: the mass put in is within 3 sd', () => {
    const run = runReplicas(fit('one-field', 'free-phase', { fields: 1, background: [1, 2, 3] }), 2000);
    const { mu1, ...others } = diagnoseAll(run);
    for (const found of [mu1, ...Object.values(others)]) expect(found.rhat).toBeLessThan(1.01);
    expect(Math.abs(mu1.mean - 1.3)).toBeLessThan(3 * mu1.sd);
    expect(mu1.sd).toBeLessThan(0.1);
  });

  it('two mixed fields: masses and angle are those of an independent quadrature', () => {
    const { axis, data } = measurement('two-field', 0.2);
    const run = runReplicas(
      fit('two-field', 'locked-squeezed', { fields: 2, vertex: 2, background: [1, 2, 3] }),
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
