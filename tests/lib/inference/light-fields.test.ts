import { describe, expect, it } from 'vitest';
import { buildInference, type InferenceSpec } from '@/lib/inference';
import { IndependentRun, judgeModes, modeTable, scanModes } from '@/lib/inference/scan';
import { createRng } from '@/lib/sampler';
import { compileTemplate, type Prior } from '@/lib/templates';
import { diagnoseAll, runReplicas } from './sampling';

const kappa = Float64Array.from({ length: 24 }, (_, i) => 0.004 * Math.exp(0.16 * i));
const covariance = (sd: number): Float64Array =>
  Float64Array.from({ length: 24 * 24 }, (_, k) => (k % 25 === 0 ? sd * sd : 0));

function specOf(fields: ('heavy' | 'light')[], truth: number[], sd: number, replaced = {}): InferenceSpec {
  const template = compileTemplate('locked-exact', { fields, vertex: 2 }, { kind: 'points', kappa });
  const priors: Record<string, Prior> = Object.fromEntries(
    template.parameters.map((p) => [p.name, p.defaultPrior]),
  );
  return {
    data: { S: template.predict(truth), covariance: covariance(sd), mockCount: null },
    likelihood: 'normal',
    template,
    priors: { ...priors, ...replaced },
  };
}

function inferenceOf(...given: Parameters<typeof specOf>) {
  return buildInference(specOf(...given));
}

describe('posteriors with light fields', () => {
  it('order ν downwards, μ upwards and let light stand before heavy whatever their values', () => {
    const { target } = inferenceOf(['light', 'light', 'heavy', 'heavy'], [1, 0.5, 1, 2, 0.5, 0.6, 0.7, 3], 1);
    const lnPrior = (...masses: number[]): number =>
      target.logPrior(Float64Array.from([...masses, 0.5, 0.6, 0.7, 3]));
    expect(lnPrior(1, 0.5, 0.3, 2)).toBeGreaterThan(-Infinity);
    expect(lnPrior(0.5, 1, 0.3, 2)).toBe(-Infinity);
    expect(lnPrior(1, 0.5, 2, 0.3)).toBe(-Infinity);
    // Z = (1/2)(1/2) for equal priors of each kind: both orders of each kind together have probability one.
    const [nu, mu] = [Math.log(1 / 1.4), Math.log(1 / 7.8)];
    const rest = inferenceOf(['heavy'], [1, 3], 1).target.logPrior(Float64Array.of(1, 3)) - mu;
    const angles = lnPrior(1, 0.5, 0.3, 2) - 2 * nu - 2 * mu - rest - 2 * Math.LN2;
    const other = lnPrior(1.2, 0.1, 3, 5) - 2 * nu - 2 * mu - rest - 2 * Math.LN2;
    expect(angles).toBeCloseTo(other, 12);
    expect(Math.exp(angles)).toBeGreaterThan(0);
  });

  it('draw their masses from the order statistics where the prior decides', () => {
    const { target } = inferenceOf(['light', 'light', 'heavy'], [1, 0.5, 1, 0.4, 0.5, 3], 1);
    const rng = createRng('light prior');
    const x = new Float64Array(target.names.length);
    const n = 4000;
    let [larger, smaller] = [0, 0];
    for (let k = 0; k < n; k += 1) {
      target.drawPrior(rng, x);
      larger += x[0] / n;
      smaller += x[1] / n;
    }
    // Means of the maximum and the minimum of two uniforms on (0, 1.4); sd of each 1.4/√18.
    const bound = (4 * 1.4) / Math.sqrt(18 * n);
    expect(Math.abs(larger - (2 * 1.4) / 3)).toBeLessThan(bound);
    expect(Math.abs(smaller - 1.4 / 3)).toBeLessThan(bound);
  });

  it('find one light field and one heavy beside it', () => {
    const inference = inferenceOf(['light', 'heavy'], [0.8, 1.5, 0.7, 5], 0.05, {
      g: { kind: 'normal', mean: 0, sd: 30 },
    });
    const { nu1, g } = diagnoseAll(runReplicas(inference, 4000));
    for (const found of [nu1, g]) {
      expect(found.rhat).toBeLessThan(1.01);
      expect(found.essBulk).toBeGreaterThan(400);
    }
    expect(Math.abs(nu1.mean - 0.8)).toBeLessThan(3 * nu1.sd);
    expect(nu1.sd).toBeLessThan(0.3);
  });

  it('have modes of ν by a scan for one field, and by an independent run beside a heavy one', () => {
    const one = scanModes(specOf(['light'], [0.8, 5], 0.05), 'modes');
    expect(one).toMatchObject({ by: 'scan', names: ['nu1'] });
    expect(one?.modes.length).toBeGreaterThan(0);
    const spec = specOf(['light', 'heavy'], [0.8, 1.5, 0.7, 5], 0.05);
    expect(scanModes(spec, 'modes')).toBeNull();
    const inference = buildInference(spec);
    const run = IndependentRun.of(spec, 'modes', () => inference)!.modesAt(300);
    expect(run).toMatchObject({ by: 'run', names: ['nu1', 'mu1'] });
    const { chains } = runReplicas(inference, 1000);
    expect(judgeModes(run, modeTable(run, [chains.nu1, chains.mu1]))).toEqual([]);
  });
});
