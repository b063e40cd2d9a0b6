import { describe, expect, it } from 'vitest';
import {
  anglesJacobian,
  compileTemplate,
  complexLogGamma,
  logIsotropicDensity,
  mixingWeights,
  oscillationColumns,
  squeezedCoefficient,
  squeezedLogModulus,
} from '@/lib/templates';
import type { Vertex } from '@/lib/templates';
import { gaussLegendre } from '../lib/templates/gauss-legendre';
import checks from './data/physics-checks.json';

/** Reference values derived by us (see the head of the data file): closed forms at 40 to 60 digits. */
interface Check {
  what: string;
  inputs: Record<string, number | number[] | undefined>;
  value: number | number[];
  error: number;
}

const all = checks.values as Check[];

function entries(what: string): Check[] {
  const found = all.filter((entry) => entry.what === what || entry.what.startsWith(`${what} `));
  expect(found.length, `entries of "${what}"`).toBeGreaterThan(0);
  return found;
}

const scalar = (entry: Check, name: string): number => entry.inputs[name] as number;
const list = (entry: Check, name: string): number[] => entry.inputs[name] as number[];
const vertexOf = (entry: Check): Vertex => scalar(entry, 'V') as Vertex;
const pair = (entry: Check): [number, number] => entry.value as [number, number];

function logGamma(re: number, im: number): [number, number] {
  const out = new Float64Array(2);
  complexLogGamma(re, im, out);
  return [out[0], out[1]];
}

/** |value − reference| in units of the reference's size. */
function relative(value: readonly number[], reference: readonly number[]): number {
  const difference = Math.hypot(...value.map((v, i) => v - reference[i]));
  return difference / Math.hypot(...reference);
}

/** d ln C/dμ of the program's C by a central difference of eighth order. */
function logDerivative(mu: number, vertex: Vertex): [number, number] {
  const step = 0.01 * mu;
  const stencil = [4 / 5, -1 / 5, 4 / 105, -1 / 280];
  const { re, im } = squeezedCoefficient(mu, vertex);
  let real = 0;
  let imaginary = 0;
  stencil.forEach((weight, k) => {
    for (const sign of [1, -1]) {
      const c = squeezedCoefficient(mu + sign * (k + 1) * step, vertex);
      // ln of the ratio to the centre, so that no phase is wrapped.
      const ratioRe = (c.re * re + c.im * im) / (re * re + im * im);
      const ratioIm = (c.im * re - c.re * im) / (re * re + im * im);
      real += (sign * weight * Math.log(Math.hypot(ratioRe, ratioIm))) / step;
      imaginary += (sign * weight * Math.atan2(ratioIm, ratioRe)) / step;
    }
  });
  return [real, imaginary];
}

describe('complex log-Gamma', () => {
  const arguments_: [string, (mu: number) => [number, number]][] = [
    ['5/2+i mu', (mu) => [2.5, mu]],
    ['1+i mu', (mu) => [1, mu]],
    ['1/2+i mu', (mu) => [0.5, mu]],
    ['-i mu', (mu) => [0, -mu]],
  ];
  it.each(arguments_)('agrees with ln Gamma(%s) on the continuous branch to 1e-13', (label, at) => {
    for (const entry of entries(`logGamma(${label})`)) {
      const [re, im] = logGamma(...at(scalar(entry, 'mu')));
      const size = Math.max(1, Math.hypot(...pair(entry)));
      expect(Math.abs(re - pair(entry)[0]) / size).toBeLessThan(1e-13);
      expect(Math.abs(im - pair(entry)[1]) / size).toBeLessThan(1e-13);
    }
  });
  it.each(arguments_)('gives Gamma(%s) to 1e-12', (label, at) => {
    for (const entry of entries(`Gamma(${label})`)) {
      const [re, im] = logGamma(...at(scalar(entry, 'mu')));
      const value = [Math.exp(re) * Math.cos(im), Math.exp(re) * Math.sin(im)];
      expect(relative(value, pair(entry))).toBeLessThan(1e-12);
    }
  });
  it('agrees at arguments left of the imaginary axis and in both half planes', () => {
    for (const entry of entries('logGamma(z)')) {
      const value = logGamma(scalar(entry, 're'), scalar(entry, 'im'));
      const size = Math.max(1, Math.hypot(...pair(entry)));
      expect(Math.hypot(value[0] - pair(entry)[0], value[1] - pair(entry)[1]) / size).toBeLessThan(1e-13);
    }
  });
});

describe.each([1, 2] as const)('the squeezed coefficient of vertex %i', (vertex) => {
  it('agrees with the closed form to 1e-12 from mu = 0.001 to mu = 100', () => {
    for (const entry of entries(`C${vertex}(mu)`)) {
      const { re, im } = squeezedCoefficient(scalar(entry, 'mu'), vertex);
      expect(relative([re, im], pair(entry)), `mu = ${scalar(entry, 'mu')}`).toBeLessThan(1e-12);
    }
  });
  it('has the modulus of the closed form to 1e-13 in its logarithm', () => {
    for (const entry of entries(`ln|C${vertex}(mu)|`)) {
      const value = squeezedLogModulus(scalar(entry, 'mu'), vertex);
      expect(Math.abs(value - (entry.value as number))).toBeLessThan(1e-13);
    }
  });
  it('has the phase of the closed form to 1e-12', () => {
    for (const entry of entries(`arg C${vertex}(mu)`)) {
      const { re, im } = squeezedCoefficient(scalar(entry, 'mu'), vertex);
      const difference = Math.atan2(im, re) - (entry.value as number);
      expect(Math.abs(Math.sin(difference / 2))).toBeLessThan(1e-12);
    }
  });
  it('changes with mu as the digamma form of its derivative says', () => {
    for (const entry of entries(`d ln C${vertex}/d mu`)) {
      const value = logDerivative(scalar(entry, 'mu'), vertex);
      expect(relative(value, pair(entry)), `mu = ${scalar(entry, 'mu')}`).toBeLessThan(1e-11);
    }
  });
});

describe('mixing', () => {
  it('gives the weights of two to five fields to 1e-15', () => {
    for (const entry of entries('weights')) {
      const weights = mixingWeights(list(entry, 'angles'));
      (entry.value as number[]).forEach((w, i) => expect(Math.abs(weights[i] - w)).toBeLessThan(1e-15));
    }
  });
  it('gives the Jacobian of the weights of three fields', () => {
    for (const entry of entries('|d(w1,w2)/d(th12,th13)|')) {
      const value = anglesJacobian([scalar(entry, 'th12'), scalar(entry, 'th13')]);
      expect(value / (entry.value as number)).toBeCloseTo(1, 14);
    }
  });
  it('has an isotropic density whose weights have the moments of Dirichlet(1/2, …, 1/2)', () => {
    const rule = gaussLegendre(40);
    for (const entry of entries('Dirichlet(1/2,..) moments')) {
      const n = scalar(entry, 'N');
      if (n > 4) continue;
      const [mean, variance, covariance, product] = entry.value as number[];
      const sums = [0, 0, 0, 0, 0];
      const angles = new Float64Array(n - 1);
      // Gauss–Legendre in every angle on [0, π/2]; the integrands are smooth there.
      const visit = (k: number, weight: number): void => {
        if (k < n - 1) {
          for (const [node, w] of rule) {
            angles[k] = (Math.PI / 4) * (1 + node);
            visit(k + 1, (weight * w * Math.PI) / 4);
          }
          return;
        }
        const density = weight * Math.exp(logIsotropicDensity(angles));
        const w = mixingWeights(angles);
        [1, w[n - 1], w[0] ** 2, w[0] * w[n - 1], Math.sqrt(w.reduce((p, x) => p * x, 1))].forEach((f, i) => {
          sums[i] += density * f;
        });
      };
      visit(0, 1);
      expect(sums[0]).toBeCloseTo(1, 12);
      expect(sums[1]).toBeCloseTo(mean, 12);
      expect(sums[2] - mean * mean).toBeCloseTo(variance, 12);
      expect(sums[3] - mean * mean).toBeCloseTo(covariance, 12);
      expect(sums[4]).toBeCloseTo(product, 12);
    }
  });
});

describe('the mass matrix of two fields', () => {
  const axis = { kind: 'points', kappa: Float64Array.of(0.01) } as const;
  const template = compileTemplate('locked-squeezed', { fields: 2 }, axis);
  const elements = (m1: number, m2: number, theta: number): number[] => {
    const x = [Math.sqrt(m1 * m1 - 2.25), Math.sqrt(m2 * m2 - 2.25), theta, 1, 0, 0];
    return ['M2_11', 'M2_22', 'M2_12'].map(
      (name) => template.derived.find((quantity) => quantity.name === name)?.evaluate(x) ?? NaN,
    );
  };
  it('has the elements of the flavour basis', () => {
    for (const entry of entries('flavour-basis')) {
      const value = elements(scalar(entry, 'm1'), scalar(entry, 'm2'), scalar(entry, 'theta'));
      (entry.value as number[]).forEach((element, i) =>
        expect(Math.abs(value[i] - element)).toBeLessThan(1e-13),
      );
    }
  });
  it('is met again from the masses and angle of its diagonal form', () => {
    for (const entry of entries('(m1,m2,theta) from')) {
      const [m1, m2, theta] = entry.value as number[];
      const value = elements(m1, m2, theta);
      ['M2_11', 'M2_22', 'M2_12'].forEach((name, i) =>
        expect(Math.abs(value[i] - scalar(entry, name))).toBeLessThan(1e-13),
      );
    }
  });
});

describe('means over bins', () => {
  it('agree with the quadrature of kappa^p cos(mu ln kappa + phi) for every weight and width', () => {
    for (const entry of entries('bin average of')) {
      const [p, mu, phi, xa, xb, q] = ['p', 'mu', 'phi', 'xa', 'xb', 'q'].map((name) => scalar(entry, name));
      const columns = oscillationColumns(
        {
          kind: 'bins',
          lo: Float64Array.of(Math.exp(xa)),
          hi: Float64Array.of(Math.exp(xb)),
          weightPower: q,
        },
        p,
      );
      const out = [new Float64Array(1), new Float64Array(1)];
      columns.fill(mu, out);
      const value = Math.cos(phi) * out[0][0] - Math.sin(phi) * out[1][0];
      expect(Math.abs(value / (entry.value as number) - 1)).toBeLessThan(1e-13);
    }
  });
});

describe('the template of single exchange', () => {
  it('predicts the leading squeezed mixture of two and three fields', () => {
    for (const entry of entries('leading squeezed template mixture')) {
      const mu = list(entry, 'mu');
      const template = compileTemplate(
        'locked-squeezed',
        { fields: mu.length, vertex: vertexOf(entry), background: [] },
        { kind: 'points', kappa: Float64Array.of(scalar(entry, 'kappa')) },
      );
      const [value] = template.predict([...mu, ...list(entry, 'angles'), 1]);
      expect(Math.abs(value / (entry.value as number) - 1)).toBeLessThan(1e-12);
    }
  });
});
