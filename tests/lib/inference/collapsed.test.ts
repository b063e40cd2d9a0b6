import { inverse, Matrix, determinant } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { FieldSystem } from '@/lib/inference/field-system';
import { LinearModel } from '@/lib/inference/collapsed';
import { layOutParameters, massRange } from '@/lib/inference/parameter-layout';
import { QuadratureStage } from '@/lib/inference/stage-quadrature';
import { MixingStage } from '@/lib/inference/stage-mixing';
import { whitenBackground } from '@/lib/inference/target';
import { buildWhitenedField } from '@/lib/inference/whitened-field';
import { buildWhitening } from '@/lib/inference/whitening';
import { buildInference, type InferenceSpec } from '@/lib/inference';
import { gaussLegendre } from '../templates/gauss-legendre';
import { madeUpSpec } from './fixtures';

function pieces(spec: InferenceSpec) {
  const layout = layOutParameters(spec);
  const whitening = buildWhitening(spec.data);
  const fields = spec.template.blocks.map((block, f) =>
    buildWhitenedField(block, whitening, massRange(layout.massPriors[f])),
  );
  const model = new LinearModel(layout, whitening, fields, whitenBackground(layout, whitening), 1);
  return { layout, model, system: new FieldSystem(model, fields.length) };
}

describe('the collapsed evidence', () => {
  it('of normal amplitudes is ln N(d; X m₀, C + X D Xᵀ), fixed ones subtracted', () => {
    const spec = madeUpSpec(
      'free-phase',
      { fields: 2, background: [1, 2] },
      { b1: { kind: 'fixed', value: 0.3 } },
    );
    const { layout, system } = pieces(spec);
    const full = Float64Array.from(layout.base);
    [full[0], full[3]] = [1.3, 2.9];
    system.load((f) => full[layout.masses[f]]);
    const found = new QuadratureStage(layout).logEvidence(system);

    const { template, data } = spec;
    const p = data.S.length;
    const at = (name: string, value: number): number[] => {
      const vector = new Float64Array(template.parameters.length);
      template.parameters.forEach(
        (q, i) => (vector[i] = q.role === 'mass' ? full[i] : q.name === name ? value : 0),
      );
      return [...template.predict(vector)];
    };
    const covariance = new Matrix(
      Array.from({ length: p }, (_, i) => [...data.covariance.subarray(i * p, (i + 1) * p)]),
    );
    for (const { name, role } of template.parameters) {
      const prior = spec.priors[name];
      if (role === 'mass' || prior.kind !== 'normal') continue;
      const column = Matrix.columnVector(at(name, 1));
      covariance.add(column.mmul(column.transpose()).mul(prior.sd ** 2));
    }
    const held = at('b1', 0.3);
    const residual = Matrix.columnVector([...data.S].map((value, i) => value - held[i]));
    const chiSquare = residual.transpose().mmul(inverse(covariance)).mmul(residual).get(0, 0);
    const expected = -0.5 * (chiSquare + p * Math.log(2 * Math.PI) + Math.log(determinant(covariance)));
    expect(found).toBeCloseTo(expected, 7);
  });

  it('of mixed fields is the likelihood integrated over angle, coupling and background by brute force', () => {
    const spec = madeUpSpec(
      'locked-squeezed',
      { fields: 2, vertex: 2, background: [1] },
      { g: { kind: 'normal', mean: 0.1, sd: 0.5 }, c1: { kind: 'normal', mean: 0, sd: 0.3 } },
      0.1,
    );
    const { layout, system } = pieces(spec);
    const full = Float64Array.from(layout.base);
    [full[0], full[1]] = [0.9, 1.6];
    system.load((f) => full[layout.masses[f]]);
    const found = new MixingStage(layout).logEvidence(system, full);

    const { target } = buildInference(spec);
    const rule = gaussLegendre(40);
    const massPrior = -Math.log(7.8 * 7.8) + Math.LN2;
    let sum = 0;
    for (const [t, wt] of rule) {
      for (const [g, wg] of rule) {
        for (const [c, wc] of rule) {
          const theta = (Math.PI / 4) * (1 + t);
          const x = Float64Array.of(0.9, 1.6, theta, 0.1 + 3 * g, 1.8 * c);
          const weight = (Math.PI / 4) * wt * 3 * wg * 1.8 * wc;
          sum += weight * Math.exp(target.logPrior(x) - massPrior + target.logLikelihood(x));
        }
      }
    }
    // The stage takes θ as the middle of 64 cells.
    expect(found).toBeCloseTo(Math.log(sum), 3);
  });
});
