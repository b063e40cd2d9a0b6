import { describe, expect, it } from 'vitest';
import { compileTemplate } from '@/lib/templates';
import type { Axis, CompiledTemplate, Vertex } from '@/lib/templates';
import { binMeanByQuadrature } from './gauss-legendre';
import checks from '../../published/data/physics-checks.json';

type Bins = Extract<Axis, { kind: 'bins' }>;
interface Complex {
  re: number;
  im: number;
}

const bins = (weightPower = 0): Bins => ({
  kind: 'bins',
  lo: Float64Array.of(0.001, 0.0012, 0.01, 0.05, 0.08),
  hi: Float64Array.of(0.0012, 0.01, 0.011, 0.08, 0.3),
  weightPower,
});
const points: Axis = { kind: 'points', kappa: Float64Array.of(0.002, 0.03, 0.2) };

/** C(μ) at a listed mass, from the reference values and not from the program. */
function reference(mu: number, vertex: Vertex): Complex {
  const entry = checks.values.find(({ what, inputs }) => what === `C${vertex}(mu)` && inputs.mu === mu);
  const [re, im] = entry?.value as number[];
  return { re, im };
}

/** Compares a prediction with the mean over every bin of a curve written out here, to 1e-12 of the curve's size. */
function expectMeans(
  template: CompiledTemplate,
  axis: Axis,
  x: number[],
  curve: (kappa: number) => number,
  mu: number,
): void {
  const predicted = template.predict(x);
  expect(predicted.length).toBe(template.length);
  const slow =
    axis.kind === 'points'
      ? axis.kappa.map(curve)
      : axis.lo.map((lo, i) => binMeanByQuadrature(curve, lo, axis.hi[i], axis.weightPower, mu));
  const size = Math.max(...slow.map(Math.abs));
  predicted.forEach((value, i) => expect(Math.abs(value - slow[i]) / size).toBeLessThan(1e-12));
}

const smooth = (coefficients: number[], powers: number[]) => (kappa: number) =>
  coefficients.reduce((sum, c, j) => sum + c * kappa ** powers[j], 0);

describe.each<[string, Axis]>([
  ['bins', bins()],
  ['bins weighted with kappa squared', bins(2)],
  ['points', points],
])('the prediction on %s', (_, axis) => {
  it('of the background is the mean of its powers', () => {
    const template = compileTemplate('background', { background: [4, -1, 0, 1] }, axis);
    expect(template.parameters.map(({ name }) => name)).toEqual(['cm1', 'c0', 'c1', 'c4']);
    const x = [0.002, 0.3, -1.2, 0.7];
    expectMeans(template, axis, x, smooth(x, [-1, 0, 1, 4]), 0);
  });

  it('of free cosine and sine amplitudes is the mean of the stated curve', () => {
    const template = compileTemplate('free-phase', { fields: 2 }, axis);
    const x = [1.7, 0.4, -0.9, 25, 0.2, 0.6, 0.3, -0.8];
    const tail = smooth(x.slice(6), [1, 2]);
    const curve = (kappa: number): number => {
      const l = Math.log(kappa);
      const first = 0.4 * Math.cos(1.7 * l) - 0.9 * Math.sin(1.7 * l);
      const second = 0.2 * Math.cos(25 * l) + 0.6 * Math.sin(25 * l);
      return Math.sqrt(kappa) * (first + second) + tail(kappa);
    };
    expectMeans(template, axis, x, curve, 25);
  });

  it('of amplitudes and phases is A cos(mu ln kappa + phi)', () => {
    const template = compileTemplate(
      'free-phase',
      { fields: 3, amplitudes: 'amplitude-phase', background: [] },
      axis,
    );
    const x = [0.5, 1.1, 2.9, 3, 0.3, -1.4, 9, 0.6, 0.2];
    const curve = (kappa: number): number =>
      [0, 3, 6].reduce(
        (sum, k) => sum + Math.sqrt(kappa) * x[k + 1] * Math.cos(x[k] * Math.log(kappa) + x[k + 2]),
        0,
      );
    expectMeans(template, axis, x, curve, 9);
  });

  it.each([1, 2, 'mixture'] as const)(
    'of locked phases is g times the weighted Re[C kappa^(i mu)], vertex %s',
    (vertex) => {
      const mu = [0.5, 1.5, 3, 4];
      const alpha = -0.7;
      const angles = [0.5, 0.9, 1.2];
      const weights = [
        Math.cos(0.5) ** 2,
        (Math.sin(0.5) * Math.cos(0.9)) ** 2,
        (Math.sin(0.5) * Math.sin(0.9) * Math.cos(1.2)) ** 2,
        (Math.sin(0.5) * Math.sin(0.9) * Math.sin(1.2)) ** 2,
      ];
      const template = compileTemplate('locked-squeezed', { fields: 4, vertex, background: [2] }, axis);
      const x = [...mu, ...angles, -17, ...(vertex === 'mixture' ? [alpha] : []), 0.4];
      const coefficient = (mass: number): Complex => {
        if (vertex !== 'mixture') return reference(mass, vertex);
        const [one, two] = [reference(mass, 1), reference(mass, 2)];
        return {
          re: Math.cos(alpha) * one.re + Math.sin(alpha) * two.re,
          im: Math.cos(alpha) * one.im + Math.sin(alpha) * two.im,
        };
      };
      const curve = (kappa: number): number =>
        mu.reduce(
          (sum, mass, i) => {
            const { re, im } = coefficient(mass);
            const turn = mass * Math.log(kappa);
            return sum - 17 * weights[i] * Math.sqrt(kappa) * (re * Math.cos(turn) - im * Math.sin(turn));
          },
          0.4 * kappa ** 2,
        );
      expectMeans(template, axis, x, curve, 4);
    },
  );

  it.each([1, 2, 'mixture'] as const)('of free phases keeps the modulus of C, vertex %s', (vertex) => {
    const mu = [1, 2.5];
    const alpha = 0.9;
    const template = compileTemplate(
      'locked-squeezed',
      { fields: 2, vertex, phases: 'free', background: [1] },
      axis,
    );
    const x = [...mu, 0.6, 8, 1.3, -2.1, ...(vertex === 'mixture' ? [alpha] : []), -0.2];
    const modulus = (mass: number): number => {
      const [one, two] = [reference(mass, 1), reference(mass, 2)];
      if (vertex === 1) return Math.hypot(one.re, one.im);
      if (vertex === 2) return Math.hypot(two.re, two.im);
      return Math.hypot(
        Math.cos(alpha) * one.re + Math.sin(alpha) * two.re,
        Math.cos(alpha) * one.im + Math.sin(alpha) * two.im,
      );
    };
    const [w1, w2] = [Math.cos(0.6) ** 2, Math.sin(0.6) ** 2];
    const curve = (kappa: number): number =>
      8 *
        Math.sqrt(kappa) *
        (w1 * modulus(1) * Math.cos(Math.log(kappa) + 1.3) +
          w2 * modulus(2.5) * Math.cos(2.5 * Math.log(kappa) - 2.1)) -
      0.2 * kappa;
    expectMeans(template, axis, x, curve, 2.5);
  });
});

describe('a compiled template', () => {
  const template = compileTemplate('locked-squeezed', { fields: 3, vertex: 2 }, bins());
  const x = [0.8, 1.9, 3.3, 0.4, 0.7, 12, 0.3, -0.5];

  it('predicts the sum of its columns times its coefficients', () => {
    const coefficients = new Float64Array(template.columnCount);
    template.coefficients(x, coefficients);
    const columns = template.blocks.flatMap((block) => {
      const out = Array.from({ length: block.width }, (): Float64Array => new Float64Array(template.length));
      block.fill(x[block.mass], out);
      return out;
    });
    columns.push(...template.fixedColumns.map(({ values }) => values));
    expect(columns.length).toBe(template.columnCount);
    template.predict(x).forEach((value, i) => {
      const sum = columns.reduce((total, column, j) => total + column[i] * coefficients[j], 0);
      expect(value).toBeCloseTo(sum, 14);
    });
  });

  it('names the coefficients of the background after their parameters', () => {
    expect(template.fixedColumns.map(({ name }) => name)).toEqual(['c1', 'c2']);
    expect(template.blocks.map(({ mass }) => template.parameters[mass].name)).toEqual(['mu1', 'mu2', 'mu3']);
  });

  it('writes into the array that it is given and returns it', () => {
    const out = new Float64Array(template.length).fill(9);
    expect(template.predict(x, out)).toBe(out);
    expect([...out]).toEqual([...template.predict(x)]);
  });

  it('is not changed by later changes to the axis', () => {
    const axis = bins();
    const own = compileTemplate('free-phase', {}, axis);
    const before = [...own.predict([2, 0.3, 0.4, 0.1, 0.2])];
    axis.lo.fill(0.5);
    axis.hi.fill(0.9);
    expect([...own.predict([2, 0.3, 0.4, 0.1, 0.2])]).toEqual(before);
  });

  it('refuses a locked field of mass zero by a typed error instead of an infinite prediction', () => {
    expect(() => template.predict([0, ...x.slice(1)])).toThrow(
      expect.objectContaining({ code: 'invalid_mass' }),
    );
    expect(template.parameters[0].exclusiveMinimum).toBe(true);
  });

  it('reports masses, weights and what is determined of the mass matrix', () => {
    expect(template.derived.map(({ name }) => name)).toEqual([
      'm1_over_H',
      'm2_over_H',
      'm3_over_H',
      'w1',
      'w2',
      'w3',
      'M2_11',
    ]);
    const value = (name: string): number =>
      template.derived.find((quantity) => quantity.name === name)?.evaluate(x) ?? NaN;
    const weights = [
      (Math.cos(0.4) * Math.cos(0.7)) ** 2,
      (Math.sin(0.4) * Math.cos(0.7)) ** 2,
      Math.sin(0.7) ** 2,
    ];
    weights.forEach((w, i) => expect(value(`w${i + 1}`)).toBeCloseTo(w, 14));
    expect(value('m2_over_H')).toBeCloseTo(Math.sqrt(1.9 ** 2 + 2.25), 14);
    expect(value('M2_11')).toBeCloseTo(
      weights.reduce((sum, w, i) => sum + w * (x[i] ** 2 + 2.25), 0),
      13,
    );
  });

  it('has no mixing to report for one field, nor in the free-phase template', () => {
    const names = (id: string, options: object) =>
      compileTemplate(id, options, points).derived.map(({ name }) => name);
    expect(names('locked-squeezed', { fields: 1 })).toEqual(['m1_over_H']);
    expect(names('free-phase', { fields: 2 })).toEqual(['m1_over_H', 'm2_over_H']);
    expect(names('background', {})).toEqual([]);
  });
});
