import { describe, expect, it } from 'vitest';
import {
  compileTemplate,
  exactLightShapeTotal,
  exactShapeTotal,
  findTemplate,
  lightCoefficients,
  TemplateError,
} from '@/lib/templates';
import type { Axis, CompiledTemplate } from '@/lib/templates';
import { regularStencil } from '@/lib/templates/exchange-function';
import { addLeadingLight } from '@/lib/templates/light-coefficients';
import { binMeanByQuadrature } from './gauss-legendre';

const points = (...kappa: number[]): Axis => ({ kind: 'points', kappa: Float64Array.from(kappa) });
const bins = (weightPower: number): Axis => ({
  kind: 'bins',
  lo: Float64Array.of(0.002, 0.05, 0.4),
  hi: Float64Array.of(0.0025, 0.2, 0.41),
  weightPower,
});

/** Both columns of one field. */
function columns(template: CompiledTemplate, field: number, mass: number): Float64Array[] {
  const out = [new Float64Array(template.length), new Float64Array(template.length)];
  template.blocks[field].fill(mass, out);
  return out;
}

function thrown(action: () => unknown): TemplateError {
  try {
    action();
  } catch (error) {
    if (error instanceof TemplateError) return error;
  }
  throw new Error('no TemplateError was thrown');
}

describe('columns of the exact shape', () => {
  it('are the total at points, to 1e-10, for heavy and light fields beside each other', () => {
    const kappa = [1e-3, 0.03, 0.4, 1];
    const template = compileTemplate('locked-exact', { fields: ['heavy', 'light'] }, points(...kappa));
    for (const [field, masses] of [
      [0, [0.01, 0.3, 0.5, 0.77, 0.999, 1.2, 1.45]],
      [1, [0.002, 0.9, 1, 2.345, 7.9, 19.9]],
    ] as const) {
      for (const mass of masses) {
        const found = columns(template, field, mass);
        for (const vertex of [1, 2] as const) {
          kappa.forEach((x, i) => {
            const exact = (field === 0 ? exactLightShapeTotal : exactShapeTotal)(mass, x, vertex);
            expect(Math.abs(found[vertex - 1][i] / exact - 1)).toBeLessThan(1e-10);
          });
        }
      }
    }
  });

  it.each([0, 2])('are means over bins with weight κ^%i, to 1e-10', (q) => {
    const axis = bins(q);
    if (axis.kind !== 'bins') return;
    const template = compileTemplate('locked-exact', {}, axis);
    for (const mu of [0.6, 3.1, 12]) {
      const found = columns(template, 0, mu);
      axis.lo.forEach((lo, i) => {
        const mean = binMeanByQuadrature((x) => exactShapeTotal(mu, x, 2), lo, axis.hi[i], q, mu);
        expect(Math.abs(found[1][i] / mean - 1)).toBeLessThan(1e-10);
      });
    }
  });

  it('have g w_i cos α and g w_i sin α as coefficients', () => {
    const template = compileTemplate('locked-exact', { fields: 2, vertex: 'mixture' }, points(0.1, 0.2));
    const [theta, g, alpha] = [0.4, -3, 0.7];
    const found = template.predict([1.1, 2.2, theta, g, alpha]);
    [0.1, 0.2].forEach((kappa, i) => {
      const shape = (mu: number): number =>
        Math.cos(alpha) * exactShapeTotal(mu, kappa, 1) + Math.sin(alpha) * exactShapeTotal(mu, kappa, 2);
      const wanted = g * (Math.cos(theta) ** 2 * shape(1.1) + Math.sin(theta) ** 2 * shape(2.2));
      expect(found[i]).toBeCloseTo(wanted, 12);
    });
  });

  it('refuse bins beyond κ = 2, where there is no isosceles triangle', () => {
    const axis: Axis = {
      kind: 'bins',
      lo: Float64Array.of(0.1, 1.5),
      hi: Float64Array.of(1.5, 2.5),
      weightPower: 0,
    };
    const error = thrown(() => compileTemplate('locked-exact', {}, axis));
    expect(error.path).toBe('axis.hi[1]');
    expect(error.message).toContain('kappaMax');
  });
});

describe('the light template', () => {
  it.each([0.1, 0.25, 0.4, 0.6, 0.7])('is c₋κ^{1/2−ν} + c₊κ^{1/2+ν} + a₀κ at ν = %f', (nu) => {
    const kappa = [1e-3, 0.05, 0.3];
    for (const vertex of [1, 2] as const) {
      const template = compileTemplate('light', { vertex, background: [] }, points(...kappa));
      const { minus, plus } = lightCoefficients(nu, vertex);
      const smooth = (vertex === 1 ? 1 : -5) / (8 * (0.25 - nu * nu));
      const found = template.predict([nu, 2]);
      kappa.forEach((x, i) => {
        const wanted = 2 * (minus * x ** (0.5 - nu) + plus * x ** (0.5 + nu) + smooth * x);
        expect(Math.abs(found[i] - wanted)).toBeLessThan(1e-11 * Math.abs(minus) + 1e-13);
      });
    }
  });

  it('is read from its panels as it is evaluated, to 1e-10, also where its terms change', () => {
    const kappa = Float64Array.of(1e-4, 0.01, 0.3);
    const template = compileTemplate('light', {}, { kind: 'points', kappa });
    for (const nu of [0, 0.01, 0.374, 0.499, 0.74, 0.76, 0.82, 0.899, 0.91, 0.97, 1.001, 1.19, 1.21, 1.45]) {
      const wanted = [new Float64Array(3), new Float64Array(3)];
      const { z, weight } = regularStencil(-nu * nu);
      z.forEach((node, k) => addLeadingLight(node, weight[k], kappa, wanted));
      const found = columns(template, 0, nu);
      found.forEach((column, v) => {
        const size = Math.max(...wanted[v].map(Math.abs));
        column.forEach((value, i) => expect(Math.abs(value - wanted[v][i])).toBeLessThan(1e-10 * size));
      });
    }
  });

  it('passes smoothly through ν = 1/2 and ν = 1, where its terms have poles', () => {
    const template = compileTemplate('light', { vertex: 2, background: [] }, points(0.02));
    for (const centre of [0.5, 1]) {
      const values = [-2, -1, 0, 1, 2].map((k) => template.predict([centre + 1e-3 * k, 1])[0]);
      const fourth = values[0] - 4 * values[1] + 6 * values[2] - 4 * values[3] + values[4];
      expect(Math.abs(fourth)).toBeLessThan(1e-8 * Math.abs(values[2]));
    }
  });

  it('is the exact shape of the long leg’s permutation and a smooth background as κ → 0', () => {
    // Beyond the leading terms the exact total has powers κ, κ², … only: at κ = 1e-5 they are below 1e-4 of it.
    const template = compileTemplate('light', { background: [] }, points(1e-5));
    for (const nu of [0.8, 1, 1.2, 1.4]) {
      const ratio = template.predict([nu, 1])[0] / exactLightShapeTotal(nu, 1e-5, 1);
      expect(Math.abs(ratio - 1)).toBeLessThan(1e-4);
    }
  });
});

describe('options and parameters of mixed heavy and light fields', () => {
  const names = (id: string, options: object): string[] =>
    findTemplate(id)
      .parameters(options)
      .map(({ name }) => name);

  it('puts light fields first and numbers each kind by itself', () => {
    expect(names('locked-exact', { fields: ['heavy', 'light', 'light'] })).toEqual([
      'nu1',
      'nu2',
      'mu1',
      'theta12',
      'theta13',
      'g',
    ]);
    expect(names('locked-exact', { fields: 1, vertex: 'mixture', background: [1] })).toEqual([
      'mu1',
      'g',
      'alpha',
      'c1',
    ]);
    expect(names('light', { fields: 2 })).toEqual(['nu1', 'nu2', 'theta', 'g', 'c1', 'c2']);
  });

  it('settles a list of heavy fields to their number and refuses what is neither', () => {
    const { normaliseOptions } = findTemplate('locked-exact');
    expect(normaliseOptions({ fields: ['heavy', 'heavy'] }).fields).toBe(2);
    expect(normaliseOptions({ fields: ['heavy', 'light'] }).fields).toEqual(['light', 'heavy']);
    expect(thrown(() => normaliseOptions({ fields: ['heavy', 'dark'] })).path).toBe('options.fields[1]');
    expect(thrown(() => normaliseOptions({ fields: 5 })).path).toBe('options.fields');
    expect(thrown(() => normaliseOptions({ fields: [] })).path).toBe('options.fields');
  });

  it('derives masses, weights, mass matrix and ρ/Λ = −2π √P_ζ g', () => {
    const template = compileTemplate('locked-exact', { fields: ['light', 'heavy'] }, points(0.1));
    const x = [1, 2, 0.3, 10];
    const value = (name: string): number =>
      template.derived.find((quantity) => quantity.name === name)?.evaluate(x) ?? NaN;
    expect(value('m1_over_H')).toBeCloseTo(Math.sqrt(1.25), 14);
    expect(value('m2_over_H')).toBeCloseTo(2.5, 14);
    const [c2, s2] = [Math.cos(0.3) ** 2, Math.sin(0.3) ** 2];
    expect(value('M2_11')).toBeCloseTo(c2 * 1.25 + s2 * 6.25, 13);
    expect(value('M2_22')).toBeCloseTo(s2 * 1.25 + c2 * 6.25, 13);
    expect(value('M2_12')).toBeCloseTo(5 * Math.sin(0.3) * Math.cos(0.3), 13);
    // The prefactor of the shape, 1/(2π √P_ζ), is 3473.045590214283 at P_ζ = 2.1e-9 (closed form, derived by us).
    expect(value('rho_over_Lambda')).toBeCloseTo(-10 / 3473.045590214283, 12);
  });
});
