import { describe, expect, it } from 'vitest';
import { buildCollapsedModel, linearPrior } from '@/lib/inference/scan';
import { gaussLegendre, logSumExp } from '@/lib/inference/scan/quadrature-nodes';
import { compileTemplate, type Prior } from '@/lib/templates';
import alias from '../../../published/data/posteriors/alias.json';
import two from '../../../published/data/posteriors/two-field.json';

/** Exact posteriors derived by us: tests/published/data/posteriors/README.md. */
function modelOf(reference: typeof alias | typeof two, fields: number) {
  const {
    prior_osc: amplitude,
    prior_smooth: smooth,
    smooth_powers: background,
    prior_mu: mass,
  } = reference.model;
  const axis = {
    kind: 'bins' as const,
    lo: Float64Array.from(reference.kappa_lo),
    hi: Float64Array.from(reference.kappa_hi),
    weightPower: 0,
  };
  const template = compileTemplate('free-phase', { fields, background }, axis);
  const normal = ({ mean, sd }: { mean: number; sd: number }): Prior => ({ kind: 'normal', mean, sd });
  const priors = Object.fromEntries(
    template.parameters.map(({ name, role }): [string, Prior] => [
      name,
      role === 'mass'
        ? { kind: 'uniform', lo: mass.lo, hi: mass.hi }
        : normal(role === 'quadrature' ? amplitude : smooth),
    ]),
  );
  const data = {
    S: Float64Array.from(reference.S),
    covariance: Float64Array.from(reference.covariance.flat()),
    mockCount: null,
  };
  return buildCollapsedModel({ data, likelihood: 'normal', template, priors });
}

/** Composite Gauss–Legendre on [lo, hi]. */
function panels(lo: number, hi: number, count: number, nodes: number) {
  const all = Array.from({ length: count }, (_, k) =>
    gaussLegendre(lo + ((hi - lo) * k) / count, lo + ((hi - lo) * (k + 1)) / count, nodes),
  );
  return all.flatMap(({ at, weight }) => Array.from(at, (x, i) => [x, weight[i]] as const));
}

describe('integrated over the frequencies, the collapsed evidence gives the known one', () => {
  it('one field with an alias: ln Z, and the weight of every mode', () => {
    const model = modelOf(alias, 1);
    expect(model.backgroundEvidence()).toBeCloseTo(alias.exact.none.logZ, 9);
    const integral = (lo: number, hi: number): number =>
      logSumExp(
        panels(lo, hi, 60, 10).map(([mu, w]) => Math.log(w / 39.5) + (model.logEvidence([mu], 1) ?? NaN)),
      );
    const whole = integral(0.5, 40);
    expect(whole).toBeCloseTo(alias.exact.one.logZ, 6);
    for (const { mu_lo, mu_hi, weight } of alias.exact.one.modes) {
      expect(Math.exp(integral(mu_lo, mu_hi) - whole)).toBeCloseTo(weight, 6);
    }
  });

  it('two fields: ln Z over the ordered plane', { timeout: 60_000 }, () => {
    const { lo, hi } = two.model.prior_mu;
    const model = modelOf(two, 2);
    const nodes = panels(lo, hi, 14, 8);
    // The integrand is symmetric, so that half of the square is the triangle; the ordered prior is twice as dense.
    const whole = logSumExp(
      nodes.flatMap(([x, wx]) =>
        nodes.map(([y, wy]) =>
          x === y
            ? -Infinity
            : Math.log(wx * wy) + (model.logEvidence([Math.min(x, y), Math.max(x, y)], 1) ?? NaN),
        ),
      ),
    );
    expect(whole - 2 * Math.log(hi - lo)).toBeCloseTo(two.exact.two.logZ, 3);
  });
});

it('priors of linear coefficients are normalised', () => {
  for (const prior of [
    { kind: 'uniform', lo: -1, hi: 2 },
    { kind: 'log-uniform', lo: 0.5, hi: 3 },
    { kind: 'half-normal', sd: 0.6 },
    { kind: 'truncated-normal', mean: 0.2, sd: 0.5, lo: -0.3, hi: 2 },
    { kind: 'normal', mean: 1, sd: 0.4 },
  ] as const) {
    const { lo, hi, mean, precision, logConstant, power } = linearPrior(prior);
    const nodes = panels(Math.max(lo, -6), Math.min(hi, 8), 20, 12);
    const sum = nodes.reduce(
      (total, [x, w]) => total + w * Math.exp(logConstant - 0.5 * precision * (x - mean) ** 2) * x ** power,
      0,
    );
    expect(sum, prior.kind).toBeCloseTo(1, 10);
  }
});
