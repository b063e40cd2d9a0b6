import { inverse, Matrix, determinant } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { buildInference, lnPriorDensity, type InferenceSpec } from '@/lib/inference';
import { buildWhitenedField } from '@/lib/inference/whitened-field';
import { buildWhitening } from '@/lib/inference/whitening';
import { createRng } from '@/lib/sampler/rng';
import { logIsotropicDensity } from '@/lib/templates';
import { binned, madeUpData, madeUpSpec } from './fixtures';

/** −½ (χ² + ln |2πC|) from the template's own prediction and a dense inverse. */
function plainLikelihood(
  { data, template }: InferenceSpec,
  full: Float64Array,
): { chiSquare: number; logLikelihood: number } {
  const p = data.S.length;
  const covariance = new Matrix(
    Array.from({ length: p }, (_, i) => [...data.covariance.subarray(i * p, (i + 1) * p)]),
  );
  const prediction = template.predict(full);
  const residual = Matrix.columnVector([...data.S].map((value, i) => value - prediction[i]));
  const chiSquare = residual.transpose().mmul(inverse(covariance)).mmul(residual).get(0, 0);
  const constant = p * Math.log(2 * Math.PI) + Math.log(determinant(covariance));
  return { chiSquare, logLikelihood: -0.5 * (chiSquare + constant) };
}

describe('a target', () => {
  const cases: [string, string, Record<string, unknown>][] = [
    ['quadrature', 'free-phase', { fields: 2, background: [1, 2] }],
    ['amplitude and phase', 'free-phase', { fields: 2, amplitudes: 'amplitude-phase', background: [0, 1] }],
    ['mixed', 'locked-squeezed', { fields: 3, vertex: 2, background: [1] }],
    ['mixed, free phases', 'locked-squeezed', { fields: 2, vertex: 1, phases: 'free', background: [1] }],
    ['mixture of vertices', 'locked-squeezed', { fields: 2, vertex: 'mixture', background: [1] }],
  ];
  it.each(cases)('of %s has the likelihood of the template’s own prediction to 1e-7', (_, id, options) => {
    const spec = madeUpSpec(id, options, { g: { kind: 'normal', mean: 0, sd: 1 } });
    const { target, expand, chiSquare } = buildInference(spec);
    const rng = createRng('target');
    const x = new Float64Array(target.names.length);
    for (let k = 0; k < 50; k += 1) {
      target.drawPrior(rng, x);
      const plain = plainLikelihood(spec, expand(x));
      const allowed = 1e-7 * Math.max(1, plain.chiSquare);
      expect(Math.abs(target.logLikelihood(x) - plain.logLikelihood)).toBeLessThan(allowed);
      expect(Math.abs(chiSquare(x) - plain.chiSquare)).toBeLessThan(allowed);
    }
  });

  it('has the prior of ordered masses, isotropic angles and everything else, normalised', () => {
    const spec = madeUpSpec('locked-squeezed', { fields: 3, background: [1] });
    const { target, logOrderProbability } = buildInference(spec);
    expect(logOrderProbability).toBeCloseTo(-Math.log(6), 13);
    const x = Float64Array.of(1, 2, 3, 0.4, 0.7, 5, -1);
    const expected =
      Math.log(6) -
      3 * Math.log(7.8) +
      logIsotropicDensity([0.4, 0.7]) +
      lnPriorDensity({ kind: 'normal', mean: 0, sd: 30 }, 5) +
      lnPriorDensity({ kind: 'normal', mean: 0, sd: 3 }, -1);
    expect(target.logPrior(x)).toBeCloseTo(expected, 12);
    expect(target.logPrior(Float64Array.of(2, 1, 3, 0.4, 0.7, 5, -1))).toBe(-Infinity);
    expect(target.logPrior(Float64Array.of(1, 2, 3, 1.7, 0.7, 5, -1))).toBe(-Infinity);
    expect(target.logPrior(Float64Array.of(1, 2, 9, 0.4, 0.7, 5, -1))).toBe(-Infinity);
  });

  it('gives phases a circle of 2π and nothing else', () => {
    const { target, sampled } = buildInference(
      madeUpSpec('free-phase', { fields: 1, amplitudes: 'amplitude-phase', background: [1] }),
    );
    expect(target.names).toEqual(['mu1', 'A1', 'phi1', 'c1']);
    expect(target.periods).toEqual([null, null, 2 * Math.PI, null]);
    expect(sampled.map(({ name }) => name)).toEqual(target.names);
  });
});

describe('the whitened columns of a field', () => {
  const whitening = buildWhitening(madeUpData(0.05));
  const { template } = madeUpSpec('free-phase', { fields: 1, background: [1] });
  const [block] = template.blocks;

  it('are interpolated to 1e-10 of their norm over the whole range', () => {
    const field = buildWhitenedField(block, whitening, [0.2, 100]);
    expect(field.nodes).toBeGreaterThan(1000);
    expect(field.error).toBeLessThan(1e-10);
    const rng = createRng('columns');
    const columns = [new Float64Array(16), new Float64Array(16)];
    for (let k = 0; k < 300; k += 1) {
      const mass = 0.2 + 99.8 * rng.uniform();
      const found = field.at(mass);
      block.fill(mass, columns);
      columns.forEach((column) => whitening.apply(column));
      const truth = [...columns[0], ...columns[1]];
      const norm = Math.hypot(...truth);
      expect(Math.hypot(...truth.map((value, i) => value - found[i])) / norm).toBeLessThan(2e-10);
    }
  });

  it('are evaluated exactly for a fixed mass and where a table would be too big', () => {
    expect(buildWhitenedField(block, whitening, [2, 2])).toMatchObject({ nodes: 0, error: 0 });
    expect(buildWhitenedField(block, whitening, [0.2, 8], { maxBytes: 1000 })).toMatchObject({
      nodes: 0,
      error: 0,
    });
    expect(binned.kind).toBe('bins');
  });
});
