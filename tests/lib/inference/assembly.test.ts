import { describe, expect, it } from 'vitest';
import {
  assemble,
  buildInference,
  buildLikelihood,
  exactLogEvidence,
  InferenceError,
  theoryOfPart,
  type Assembly,
  type AssemblyPart,
  type InferenceSpec,
} from '@/lib/inference';
import { buildCollapsedModel } from '@/lib/inference/scan';
import { logSumExp } from '@/lib/inference/scan/quadrature-nodes';
import { choleskyInto, forwardSolve } from '@/lib/inference/cholesky';
import { createRng } from '@/lib/sampler';
import { compileTemplate, type Axis, type Prior } from '@/lib/templates';
import { binned, madeUpData, madeUpSpec } from './fixtures';

const normal = (sd: number, mean = 0): Prior => ({ kind: 'normal', mean, sd });
const free = { id: 'free-phase', options: { fields: 1, background: [1] } };

/** Bins, values and block of the covariance from row `from` to before `to`. */
function rowsOf(from: number, to: number, noise = 0.05, mockCount: number | null = null): AssemblyPart {
  const { S, covariance } = madeUpData(noise);
  const { lo, hi } = binned as Axis & { kind: 'bins' };
  return {
    label: `rows ${from} to ${to - 1}`,
    axis: { kind: 'bins', lo: lo.slice(from, to), hi: hi.slice(from, to), weightPower: 0 },
    data: {
      S: S.slice(from, to),
      covariance: Float64Array.from({ length: (to - from) ** 2 }, (_, k) => {
        const [i, j] = [Math.floor(k / (to - from)), k % (to - from)];
        return covariance[(from + i) * 16 + from + j];
      }),
      mockCount,
    },
  };
}

const tilt = Float64Array.from({ length: 16 }, (_, i) => 0.3 * Math.sin(0.9 * i + 1));

/** (x − y)ᵀ C⁻¹ (x − y), from a factor of its own. */
function chiSquareOf(x: ArrayLike<number>, y: ArrayLike<number>, covariance: Float64Array): number {
  const p = x.length;
  const factor = new Float64Array(p * p);
  choleskyInto(covariance, p, factor);
  const rest = Float64Array.from({ length: p }, (_, i) => x[i] - y[i]);
  forwardSolve(factor, p, rest);
  return rest.reduce((sum, value) => sum + value * value, 0);
}

function withDefaults(assembly: Omit<Assembly, 'priors'>, priors: Record<string, Prior> = {}): InferenceSpec {
  const { template } = assemble({ ...assembly, priors: {} });
  const all = template.parameters.map(({ name, defaultPrior }) => [name, priors[name] ?? defaultPrior]);
  return assemble({ ...assembly, priors: Object.fromEntries(all) as Record<string, Prior> });
}

describe('two halves of one data set with a covariance of blocks are the whole', () => {
  const parts = [rowsOf(0, 8), rowsOf(8, 16)];
  const joint = withDefaults({ parts, template: free, likelihood: 'normal' });
  const whole = madeUpSpec('free-phase', free.options);
  for (let i = 0; i < 16; i += 1) {
    for (let j = 0; j < 16; j += 1) if (i < 8 !== j < 8) whole.data.covariance[i * 16 + j] = 0;
  }

  it('in χ² and log density to 1e-12, with the backgrounds at the same value', () => {
    const [one, two] = [buildInference(whole), buildInference(joint)];
    expect(two.target.names).toEqual(['mu1', 'a1', 'b1', 'c1_1', 'c1_2']);
    for (const [mu, a, b, c] of [
      [2.1, 0.1, -0.05, 0.2],
      [5.3, -0.4, 0.3, 1.1],
    ]) {
      const [x, y] = [Float64Array.of(mu, a, b, c), Float64Array.of(mu, a, b, c, c)];
      const relative = (p: number, q: number): number => Math.abs(p / q - 1);
      expect(relative(two.chiSquare(y), one.chiSquare(x))).toBeLessThan(1e-12);
      expect(relative(two.target.logLikelihood(y), one.target.logLikelihood(x))).toBeLessThan(1e-12);
    }
  });

  it('and in the evidence without a background', () => {
    const bare = { id: 'free-phase', options: { fields: 1, background: [] } };
    const two = withDefaults({ parts, template: bare, likelihood: 'normal' });
    const one = { ...madeUpSpec('free-phase', bare.options), data: whole.data };
    const [p, q] = [one, two].map((spec) => buildCollapsedModel(spec).logEvidence([2.1], 3) ?? NaN);
    expect(Math.abs(p - q)).toBeLessThan(1e-11);
  });
});

describe('a window matrix', () => {
  const { axis, data } = { axis: binned, data: madeUpData(0.05) };
  const x = Float64Array.of(2.1, 0.1, -0.05, 0.2);
  const plain = madeUpSpec('free-phase', free.options);

  it('of the identity changes nothing', () => {
    const identity = Float64Array.from({ length: 256 }, (_, k) => (k % 17 === 0 ? 1 : 0));
    const spec = withDefaults({
      parts: [{ label: 'one', axis, data, window: identity }],
      template: free,
      likelihood: 'normal',
    });
    expect(spec.template.parameters).toEqual(plain.template.parameters);
    expect(spec.template.predict(x)).toEqual(plain.template.predict(x));
    expect(buildInference(spec).target.logLikelihood(x)).toBe(buildInference(plain).target.logLikelihood(x));
  });

  it('that takes pairs of finer bins together gives the prediction in the wide ones', () => {
    const edge = (i: number): number => 0.01 * 25 ** (i / 32);
    const fine: Axis = {
      kind: 'bins',
      lo: Float64Array.from({ length: 32 }, (_, i) => edge(i)),
      hi: Float64Array.from({ length: 32 }, (_, i) => edge(i + 1)),
      weightPower: 0,
    };
    const pairs = Float64Array.from({ length: 16 * 32 }, (_, k) =>
      Math.floor((k % 32) / 2) === Math.floor(k / 32) ? 0.5 : 0,
    );
    const spec = withDefaults({
      parts: [{ label: 'one', axis: fine, data, window: pairs }],
      template: free,
      likelihood: 'normal',
    });
    const [seen, due] = [spec.template.predict(x), plain.template.predict(x)];
    seen.forEach((value, i) => expect(Math.abs(value - due[i])).toBeLessThan(1e-14));
  });

  it('lets columns by: their values are those of the data already', () => {
    const half = Float64Array.from({ length: 256 }, (_, k) => (k % 17 === 0 ? 0.5 : 0));
    const spec = withDefaults({
      parts: [{ label: 'one', axis, data, window: half, columns: [{ name: 'tilt', values: tilt }] }],
      template: free,
      likelihood: 'normal',
    });
    const seen = spec.template.predict(Float64Array.of(...x, 2));
    const due = plain.template.predict(x);
    seen.forEach((value, i) => expect(value).toBeCloseTo(0.5 * due[i] + 2 * tilt[i], 14));
  });

  it('of the wrong size is refused with the sizes that are due', () => {
    expect(() =>
      withDefaults({
        parts: [{ label: 'one', axis, data, window: new Float64Array(100) }],
        template: free,
        likelihood: 'normal',
      }),
    ).toThrow('16 data values of 16 theory bins need 16 × 16 = 256');
  });
});

describe('a column with a normal prior', () => {
  const s = 0.7;
  const smooth = { id: 'background', options: { background: [1, 2] } };
  const part = { label: 'one', axis: binned, data: madeUpData(0.05) };
  const withColumn = { ...part, columns: [{ name: 'tilt', values: tilt }] };
  const added = Float64Array.from({ length: 256 }, (_, k) => s * s * tilt[Math.floor(k / 16)] * tilt[k % 16]);

  it('has the posterior of generalised least squares with a prior', () => {
    // Normal model d = A c + n, n ~ N(0, C), c ~ N(m, D): c | d ~ N(V (AᵀC⁻¹d + D⁻¹m), V), V = (AᵀC⁻¹A + D⁻¹)⁻¹
    // (Lindley and Smith 1972, J. R. Statist. Soc. B 34, 1, from memory; follows by completing the square).
    const spec = withDefaults(
      { parts: [withColumn], template: smooth, likelihood: 'normal' },
      { c1: normal(3), c2: normal(3), tilt: normal(s, 0.1) },
    );
    const columns = spec.template.fixedColumns.map(({ values }) => values);
    const [means, sds] = [
      [0, 0, 0.1],
      [3, 3, s],
    ];
    const factor = new Float64Array(256);
    choleskyInto(spec.data.covariance, 16, factor);
    const white = [...columns, spec.data.S].map((column) => {
      const out = Float64Array.from(column);
      forwardSolve(factor, 16, out);
      return out;
    });
    const product = (a: number, b: number): number =>
      white[a].reduce((sum, value, i) => sum + value * white[b][i], 0);
    const precision = means.map((_, i) =>
      means.map((_unused, j) => product(i, j) + (i === j ? 1 / sds[i] ** 2 : 0)),
    );
    const right = means.map((mean, i) => product(i, 3) + mean / sds[i] ** 2);
    const mean = solve(precision, right);
    const { target, jumps } = buildInference(spec);
    const at = (c: readonly number[]): number => {
      const x = Float64Array.from(c);
      return target.logPrior(x) + target.logLikelihood(x);
    };
    for (const step of [
      [0.02, 0, 0],
      [0, 0.05, -0.03],
      [0.01, -0.2, 0.04],
    ]) {
      const fall = at(mean) - at(mean.map((value, i) => value + step[i]));
      const due =
        0.5 * step.reduce((sum, a, i) => sum + step.reduce((t, b, j) => t + a * b * precision[i][j], 0), 0);
      expect(Math.abs(fall / due - 1)).toBeLessThan(1e-9);
    }
    // The jump draws from exactly this posterior, so that its density misses the evidence alone.
    const evidence = exactLogEvidence(spec) ?? NaN;
    const x = Float64Array.from(mean);
    const rng = createRng('columns');
    for (let k = 0; k < 5; k += 1) {
      jumps[0].draw(rng, x, x);
      // A fiftieth of the jumps is drawn from the prior; the rest of the density is the posterior's.
      const own = Math.log(
        0.98 * Math.exp(target.logPrior(x) + target.logLikelihood(x) - evidence) +
          0.02 * Math.exp(target.logPrior(x)),
      );
      expect(Math.abs(jumps[0].logDensity(x, x) - own)).toBeLessThan(1e-9);
    }
  });

  it('integrated out is a theory covariance s² c cᵀ: evidence and posterior of the rest to 1e-10', () => {
    const priors = { tilt: normal(s) };
    const column = withDefaults({ parts: [withColumn], template: smooth, likelihood: 'normal' }, priors);
    const theory = withDefaults({
      parts: [{ ...part, theoryCovariance: added }],
      template: smooth,
      likelihood: 'normal',
    });
    const [one, two] = [column, theory].map((spec) => exactLogEvidence(spec) ?? NaN);
    expect(Math.abs(one - two)).toBeLessThan(1e-10);
    // Posterior of (c1, c2): ln of ∫ over the column's coefficient against the density with the covariance added.
    const [wide, narrow] = [buildInference(column).target, buildInference(theory).target];
    for (const [c1, c2] of [
      [0.2, 0.1],
      [0.35, -0.4],
    ]) {
      const held = { ...column, priors: { ...column.priors, c1: fixed(c1), c2: fixed(c2) } };
      const own = exactLogEvidence(held) ?? NaN;
      expect(Math.abs(own - narrow.logLikelihood(Float64Array.of(c1, c2)))).toBeLessThan(1e-10);
    }
    expect(wide.names).toEqual(['c1', 'c2', 'tilt']);
  });

  it('and so is the evidence of a frequency, with a field', () => {
    const column = withDefaults(
      { parts: [withColumn], template: free, likelihood: 'normal' },
      { tilt: normal(s) },
    );
    const theory = withDefaults({
      parts: [{ ...part, theoryCovariance: added }],
      template: free,
      likelihood: 'normal',
    });
    const [p, q] = [column, theory].map((spec) => buildCollapsedModel(spec).logEvidence([2.3], 3) ?? NaN);
    expect(Math.abs(p - q)).toBeLessThan(1e-10);
  });

  it('must have a prior, a name of its own and as many numbers as the data', () => {
    const build = (columns: { name: string; values: Float64Array }[]): InferenceSpec =>
      assemble({ parts: [{ ...part, columns }], template: smooth, likelihood: 'normal', priors: {} });
    expect(() => buildInference(build([{ name: 'tilt', values: tilt }]))).toThrow('c1 has no prior');
    expect(() => build([{ name: 'mu1', values: tilt }])).toThrow('“mu1” is the name of a parameter');
    expect(() => build([{ name: 'late time', values: tilt }])).toThrow('is no name for a column');
    expect(() =>
      build([
        { name: 'tilt', values: tilt },
        { name: 'tilt', values: tilt },
      ]),
    ).toThrow('“tilt” is there twice');
    expect(() => build([{ name: 'tilt', values: tilt.slice(1) }])).toThrow(
      'has 15 numbers for 16 data values',
    );
  });
});

describe('a theory covariance', () => {
  const theoryCovariance = Float64Array.from({ length: 256 }, (_, k) => (k % 17 === 0 ? 4e-4 : 1e-4));
  const part = { label: 'one', axis: binned, data: madeUpData(0.05, 60), theoryCovariance };
  const x = Float64Array.of(2.1, 0.1, -0.05, 0.2);

  it('is added to the estimate scaled by Hartlap’s factor, and the density is that normal one', () => {
    const spec = withDefaults({ parts: [part], template: free, likelihood: 'hartlap' });
    const h = (60 - 16 - 2) / (60 - 1);
    const covariance = part.data.covariance.map((value, k) => value / h + theoryCovariance[k]);
    const due = {
      ...spec,
      data: { S: part.data.S, covariance, mockCount: null },
      likelihood: 'normal' as const,
    };
    const [own, other] = [spec, due].map((one) => buildInference(one).target.logLikelihood(x));
    expect(Math.abs(own - other)).toBeLessThan(1e-10);
  });

  it.each(['sellentin-heavens', 'matched-t'] as const)('has no place in the %s likelihood', (likelihood) => {
    const spec = withDefaults({ parts: [part], template: free, likelihood });
    expect(() => buildInference(spec)).toThrow(InferenceError);
    expect(() => buildInference(spec)).toThrow('no closed form');
  });
});

describe('measurements with mocks of their own', () => {
  const parts = [rowsOf(0, 8, 0.05, 40), rowsOf(8, 16, 0.08, 90)];
  const spec = withDefaults({ parts, template: free, likelihood: 'sellentin-heavens' });

  it('have the product of their t densities', () => {
    const { target } = buildInference(spec);
    const x = Float64Array.of(2.1, 0.1, -0.05, 0.2, 0.3);
    const due = parts.reduce((sum, { data, axis }, k) => {
      const prediction = compileTemplate('free-phase', free.options, axis).predict([
        2.1,
        0.1,
        -0.05,
        x[3 + k],
      ]);
      const p = data.S.length;
      const factor = new Float64Array(p * p);
      choleskyInto(data.covariance, p, factor);
      let logDeterminant = 0;
      for (let i = 0; i < p; i += 1) logDeterminant += 2 * Math.log(factor[i * p + i]);
      const likelihood = buildLikelihood('sellentin-heavens', data.mockCount, p, 5, logDeterminant);
      return sum + likelihood.logDensity(chiSquareOf(data.S, prediction, data.covariance));
    }, 0);
    expect(Math.abs(target.logLikelihood(x) - due)).toBeLessThan(1e-11);
  });

  it.each([
    ['both with mocks', parts],
    ['one with a known covariance', [rowsOf(0, 8, 0.05, 40), rowsOf(8, 16, 0.08)]],
  ])('jump in proportion to a density that is normalised: %s', (_, own) => {
    // Weights posterior/proposal have the evidence as their mean: against the collapsed evidence integrated over the mass.
    const priors = { mu1: { kind: 'uniform', lo: 0.5, hi: 6 } as const };
    const joint = withDefaults({ parts: own, template: free, likelihood: 'sellentin-heavens' }, priors);
    const { target, jumps } = buildInference(joint);
    const rng = createRng('joint');
    const x = new Float64Array(5);
    target.drawPrior(rng, x);
    const logs = Array.from({ length: 4000 }, () => {
      jumps[0].draw(rng, x, x);
      return target.logPrior(x) + target.logLikelihood(x) - jumps[0].logDensity(x, x);
    });
    const model = buildCollapsedModel(joint);
    const nodes = Array.from({ length: 500 }, (_unused, k) => 0.5 + (5.5 * (k + 0.5)) / 500);
    const exact = logSumExp(nodes.map((mu) => model.logEvidence([mu], 3) ?? NaN)) - Math.log(500);
    const weights = logs.map((log) => Math.exp(log - exact));
    const mean = weights.reduce((sum, w) => sum + w, 0) / weights.length;
    const variance = weights.reduce((sum, w) => sum + (w - mean) ** 2, 0) / weights.length;
    // Half of the draws are worth keeping, and the mean is 1 within four errors.
    expect(1 / (1 + variance / mean ** 2)).toBeGreaterThan(0.5);
    expect(Math.abs(mean - 1)).toBeLessThan(4 * Math.sqrt(variance / weights.length));
  });

  it('are refused under the matched-prior t, which is derived for one set of mocks', () => {
    expect(() => buildInference({ ...spec, likelihood: 'matched-t' })).toThrow(
      'not for several measurements',
    );
  });

  it('that are the same simulations have one covariance, and the matched t', () => {
    const rng = createRng('mocks');
    const sky = Array.from({ length: 50 }, () =>
      Float64Array.from({ length: 16 }, () => 0.05 * rng.normal()),
    );
    const mocks = [0, 8].map((from) =>
      Float64Array.from(sky.flatMap((row) => Array.from(row.subarray(from, from + 8)))),
    );
    const shared = withDefaults({ parts, sharedMocks: mocks, template: free, likelihood: 'matched-t' });
    const { covariance, mockCount } = shared.data;
    expect(mockCount).toBe(50);
    const mean = (i: number): number => sky.reduce((sum, row) => sum + row[i], 0) / 50;
    const due = sky.reduce((sum, row) => sum + (row[3] - mean(3)) * (row[12] - mean(12)), 0) / 49;
    expect(covariance[3 * 16 + 12]).toBeCloseTo(due, 15);
    expect(buildInference(shared).target.evidence?.exponent).toBeGreaterThan(0.9);
    const fewer = [mocks[0], mocks[1].subarray(8)];
    expect(() => withDefaults({ parts, sharedMocks: fewer, template: free, likelihood: 'normal' })).toThrow(
      '50 and 49 mocks',
    );
  });
});

it('the theory of one measurement elsewhere reads the parameters of all', () => {
  const parts = [rowsOf(0, 8), rowsOf(8, 16)].map((part) => ({ ...part, length: 8 }));
  const columns = [{ name: 'tilt', values: tilt.slice(0, 8) }];
  const curve = theoryOfPart([{ ...parts[0], columns }, parts[1]], free, 1, binned);
  expect(curve.parameters.map(({ name }) => name)).toEqual(['mu1', 'a1', 'b1', 'c1_1', 'c1_2', 'tilt_1']);
  const due = compileTemplate('free-phase', free.options, binned).predict([2.1, 0.1, -0.05, 0.3]);
  expect(curve.predict([2.1, 0.1, -0.05, 0.2, 0.3, 9])).toEqual(due);
});

const fixed = (value: number): Prior => ({ kind: 'fixed', value });

/** Gauss elimination without pivots: the matrix is symmetric and positive definite. */
function solve(matrix: readonly number[][], right: readonly number[]): number[] {
  const rows = matrix.map((row, i) => [...row, right[i]]);
  rows.forEach((row, i) => {
    for (let k = i + 1; k < rows.length; k += 1) {
      const factor = rows[k][i] / row[i];
      for (let j = i; j < rows[k].length; j += 1) rows[k][j] -= factor * row[j];
    }
  });
  const x = right.map(() => 0);
  for (let i = rows.length - 1; i >= 0; i -= 1) {
    x[i] = rows[i][right.length];
    for (let j = i + 1; j < x.length; j += 1) x[i] -= rows[i][j] * x[j];
    x[i] /= rows[i][i];
  }
  return x;
}
