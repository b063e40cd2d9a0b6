import { describe, expect, it } from 'vitest';
import {
  compileTemplate,
  exactLightShape,
  exactLightShapeTotal,
  exactShape,
  exactShapeTotal,
  exactTriangleShape,
  lightCoefficients,
  mixingWeights,
  oscillatingPart,
  smoothCoefficients,
  smoothPart,
  squeezedCorrection,
} from '@/lib/templates';
import type { Vertex } from '@/lib/templates';
import shapes from './data/exact-shape-checks.json';
import totals from './data/exact-total-checks.json';

/** Reference values derived by us; how is said at the head of each data file. */
interface Check {
  what: string;
  inputs: Record<string, number | number[] | string | undefined>;
  value: number | number[];
  error: number;
}

const all = shapes.values as Check[];
const used = new Set<Check>();

function entries(what: string, count: number): Check[] {
  const found = all.filter((entry) => entry.what.startsWith(what));
  expect(found.length, `entries of "${what}"`).toBe(count);
  found.forEach((entry) => used.add(entry));
  return found;
}

const scalar = (entry: Check, name: string): number => entry.inputs[name] as number;
const vertexOf = (entry: Check): Vertex => scalar(entry, 'V') as Vertex;

/** Worst |found/reference − 1| over some entries with one number each. */
function worst(found: Check[], value: (entry: Check) => number): number {
  return Math.max(...found.map((entry) => Math.abs(value(entry) / (entry.value as number) - 1)));
}

describe('the exact shape of single exchange', () => {
  it('agrees with the closed forms of one permutation to 1e-10: oscillating part, smooth part, sum', () => {
    const at = (f: (mu: number, kappa: number, vertex: Vertex) => number) => (entry: Check) =>
      f(scalar(entry, 'mu'), scalar(entry, 'kappa'), vertexOf(entry));
    expect(worst(entries('S_hat nonanalytic part', 12), at(oscillatingPart))).toBeLessThan(1e-10);
    expect(worst(entries('S_hat analytic part', 12), at(smoothPart))).toBeLessThan(1e-10);
    expect(worst(entries('S_hat full single-permutation', 12), at(exactShape))).toBeLessThan(1e-10);
  });

  it('has F₁ and F₂ to 1e-10', () => {
    for (const [name, vertex] of [
      ['F1(mu,kappa)', 1],
      ['F2(mu,kappa)', 2],
    ] as const) {
      for (const entry of entries(name, 6)) {
        const { re, im } = squeezedCorrection(scalar(entry, 'mu'), scalar(entry, 'kappa'), vertex);
        const [wantedRe, wantedIm] = entry.value as number[];
        expect(Math.hypot(re - wantedRe, im - wantedIm)).toBeLessThan(1e-10 * Math.hypot(wantedRe, wantedIm));
      }
    }
  });

  it('has the first six coefficients of the smooth part to 1e-12', () => {
    for (const entry of entries('analytic coefficients', 10)) {
      const found = smoothCoefficients(scalar(entry, 'mu'), 6, vertexOf(entry));
      (entry.value as number[]).forEach((a, n) => expect(Math.abs(found[n] / a - 1)).toBeLessThan(1e-12));
    }
  });

  it('agrees with direct in-in integrals of one permutation to 1e-8, isosceles, any triangle and light', () => {
    const isosceles = worst(entries('S_hat direct in-in, isosceles', 64), (entry) =>
      exactShape(scalar(entry, 'mu'), scalar(entry, 'kappa'), vertexOf(entry)),
    );
    const general = worst(entries('S_hat direct in-in, general triangle', 20), (entry) =>
      exactTriangleShape(
        scalar(entry, 'mu'),
        [scalar(entry, 'k1'), scalar(entry, 'k2'), scalar(entry, 'k3')],
        vertexOf(entry),
      ),
    );
    const light = worst(entries('S_hat direct in-in, light field', 32), (entry) =>
      exactLightShape(scalar(entry, 'nu'), scalar(entry, 'kappa'), vertexOf(entry)),
    );
    expect(Math.max(isosceles, general, light)).toBeLessThan(1e-8);
  });

  it('agrees with direct in-in integrals summed over the three permutations to 1e-8', () => {
    const found = worst(entries('S_hat total', 30), (entry) =>
      exactShapeTotal(scalar(entry, 'mu'), scalar(entry, 'kappa'), vertexOf(entry)),
    );
    expect(found).toBeLessThan(1e-8);
  });

  it('has the leading coefficients of a light field to 1e-10, and its logarithms at ν = 1/2', () => {
    for (const entry of entries('c_minus', 6)) {
      const { minus } = lightCoefficients(scalar(entry, 'nu'), vertexOf(entry));
      expect(Math.abs(minus - (entry.value as number))).toBeLessThan(1e-10);
    }
    const plus = worst(
      entries('c_plus', 4),
      (entry) => lightCoefficients(scalar(entry, 'nu'), vertexOf(entry)).plus,
    );
    expect(plus).toBeLessThan(1e-10);
    // Ŝ = s₀ + s₁ κ ln κ + s₂ κ + O(κ² ln κ): at κ = 1e-6 what is left out is below 2e-11 of κ.
    for (const entry of entries('nu=1/2 leading coefficients', 2)) {
      const [constant, logarithm, linear] = entry.value as number[];
      const kappa = 1e-6;
      const leading = constant + kappa * (logarithm * Math.log(kappa) + linear);
      expect(Math.abs(exactLightShape(0.5, kappa, vertexOf(entry)) - leading)).toBeLessThan(1e-9);
    }
  });

  it('mixes fields by their weights', () => {
    for (const entry of entries('S_hat full mixture', 4)) {
      const weights = mixingWeights(entry.inputs.angles as number[]);
      const sum = (entry.inputs.mu as number[]).reduce(
        (total, mu, i) => total + weights[i] * exactShape(mu, scalar(entry, 'kappa'), vertexOf(entry)),
        0,
      );
      expect(Math.abs(sum / (entry.value as number) - 1)).toBeLessThan(1e-10);
    }
    entries('leading squeezed template mixture', 4).forEach((entry) => {
      const mu = entry.inputs.mu as number[];
      const angles = entry.inputs.angles as number[];
      const axis = { kind: 'points', kappa: Float64Array.of(scalar(entry, 'kappa')) } as const;
      const options = { fields: mu.length, vertex: vertexOf(entry), background: [] };
      const template = compileTemplate('locked-squeezed', options, axis);
      const [found] = template.predict([...mu, ...angles, 1]);
      expect(Math.abs(found / (entry.value as number) - 1)).toBeLessThan(1e-10);
    });
    expect(used.size, 'entries that were compared').toBe(all.length);
  });

  it('sums the permutations right for κ from 1e-4 to 1, μ from 0.05 to 20, ν from 0 to 1.45, to 1e-10', () => {
    const found = totals.values.map((entry) => {
      const vertex = entry.V as Vertex;
      const value =
        entry.mu === undefined
          ? exactLightShapeTotal(entry.nu as number, entry.kappa, vertex)
          : exactShapeTotal(entry.mu, entry.kappa, vertex);
      return { error: Math.abs(value / entry.value - 1), entry };
    });
    expect(found.length).toBeGreaterThan(200);
    const bad = found.filter(({ error }) => !(error < 1e-10));
    expect(bad.map(({ entry, error }) => `${JSON.stringify(entry)} off by ${error}`)).toEqual([]);
    // Most lose nothing: the median is at rounding.
    const sorted = found.map(({ error }) => error).sort((a, b) => a - b);
    expect(sorted[Math.floor(sorted.length / 2)]).toBeLessThan(1e-12);
  });
});
