import { TemplateError, quoteValue } from './errors';
import { ExchangeFunction, regularStencil } from './exchange-function';
import type { Vertex } from './types';

/**
 * The exact tree-level shape of single exchange, Ŝ = (k₁k₂k₃)² B at unit couplings (ρ = Λ = H = 1), dimensionless. For the leg
 * k_m on the mixing vertex and k_a, k_b on the cubic one, r = k_m/(k_a + k_b), q = k_a k_b/(k_a + k_b)², θ = r d/dr:
 *
 *   vertex 1 (π̇²σ):        Ŝ = (q/2) θ(θ + 1) h(r),
 *   vertex 2 ((∂π)²σ/a²):   Ŝ = −½ f (1 + θ)(1 + qθ) h(r),   f = (k_a² + k_b² − k_m²)/(2 k_a k_b),
 *
 * with h of exchange-function.ts. In an isosceles triangle of κ = k₃/k₁, 0 < κ < 2, the total has the permutation with k₃ on
 * the mixing vertex once and the one with k₁ twice. Derived by us; checked against direct in-in integrals.
 */

/** Which triangle: legs of a permutation in units of the short side. */
interface Permutation {
  r: number;
  q: number;
  f: number;
}

/** k₃ on the mixing vertex. */
export function softPermutation(kappa: number): Permutation {
  return { r: kappa / 2, q: 0.25, f: 1 - (kappa * kappa) / 2 };
}

/** k₁ on the mixing vertex, k₂ = k₁ and k₃ on the cubic one. */
export function hardPermutation(kappa: number): Permutation {
  const r = 1 / (1 + kappa);
  return { r, q: kappa * r * r, f: kappa / 2 };
}

/** Adds `times` Ŝ of both vertices into out[0], out[1]; `h` is working space of three numbers. */
export function addShapes(
  exchange: ExchangeFunction,
  { r, q, f }: Permutation,
  times: number,
  h: Float64Array,
  out: Float64Array,
): void {
  exchange.write(r, h);
  out[0] += times * 0.5 * q * (h[1] + h[2]);
  out[1] -= times * 0.5 * f * (h[0] + (1 + q) * h[1] + q * h[2]);
}

function requireKappa(kappa: number): void {
  if (!(kappa > 0 && kappa < 2)) {
    throw new TemplateError(
      'invalid_axis',
      'kappa',
      `kappa = ${quoteValue(kappa)} belongs to no isosceles triangle; give 0 < kappa < 2`,
    );
  }
}

/** z of a heavy field; throws TemplateError `invalid_mass` unless 0 ≤ μ < ∞. */
export function heavySquare(mu: number): number {
  if (mu >= 0 && mu < Infinity) return mu * mu;
  throw new TemplateError(
    'invalid_mass',
    'mu',
    `mu = ${quoteValue(mu)} is not a heavy field; give a finite mu of at least 0`,
  );
}

/** z of a light field; throws TemplateError `invalid_mass` unless 0 ≤ ν < 3/2. */
export function lightSquare(nu: number): number {
  if (nu >= 0 && nu < 1.5) return -nu * nu;
  throw new TemplateError(
    'invalid_mass',
    'nu',
    `nu = ${quoteValue(nu)} is not a light massive field; give nu from 0 to below 3/2`,
  );
}

type Adding = (exchange: ExchangeFunction, h: Float64Array, shapes: Float64Array) => void;

/** One vertex of what `add` adds, at z or read from the stencil round a removable point. */
function atStencil(z: number, vertex: Vertex, add: Adding): number {
  const stencil = regularStencil(z);
  const h = new Float64Array(3);
  const shapes = new Float64Array(2);
  let sum = 0;
  stencil.z.forEach((node, k) => {
    shapes.fill(0);
    add(new ExchangeFunction(node), h, shapes);
    sum += stencil.weight[k] * shapes[vertex - 1];
  });
  return sum;
}

function evaluate(z: number, kappa: number, vertex: Vertex, total: boolean): number {
  requireKappa(kappa);
  return atStencil(z, vertex, (exchange, h, shapes) => {
    addShapes(exchange, softPermutation(kappa), 1, h, shapes);
    if (total) addShapes(exchange, hardPermutation(kappa), 2, h, shapes);
  });
}

/**
 * Ŝ of one permutation, the long leg on the mixing vertex, of a heavy field: isosceles, 0 < κ < 2, 0 ≤ μ ≤ 20 to 1e-10 of the
 * larger of its two parts. Throws TemplateError `invalid_axis` or `invalid_mass` elsewhere.
 */
export function exactShape(mu: number, kappa: number, vertex: Vertex): number {
  return evaluate(heavySquare(mu), kappa, vertex, false);
}

/**
 * Ŝ of the permutation with k₃ on the mixing vertex of any triangle, |k₁ − k₂| < k₃ < k₁ + k₂ (same unit for all three; only
 * ratios matter), of a heavy field; range, accuracy and errors as `exactShape`.
 */
export function exactTriangleShape(
  mu: number,
  [k1, k2, k3]: readonly [number, number, number],
  vertex: Vertex,
): number {
  const sum = k1 + k2;
  if (!(k1 > 0 && k2 > 0 && Math.abs(k1 - k2) < k3 && k3 < sum && sum < Infinity)) {
    throw new TemplateError(
      'invalid_axis',
      'k3',
      `${k1}, ${k2}, ${k3} are not the sides of a triangle; give positive sides, none as long as the other two`,
    );
  }
  const permutation = {
    r: k3 / sum,
    q: (k1 * k2) / (sum * sum),
    f: (k1 * k1 + k2 * k2 - k3 * k3) / (2 * k1 * k2),
  };
  return atStencil(heavySquare(mu), vertex, (exchange, h, shapes) =>
    addShapes(exchange, permutation, 1, h, shapes),
  );
}

/** Ŝ summed over the three permutations; ranges and errors as `exactShape`. */
export function exactShapeTotal(mu: number, kappa: number, vertex: Vertex): number {
  return evaluate(heavySquare(mu), kappa, vertex, true);
}

/** Ŝ of one permutation of a light field, 0 ≤ ν < 3/2; κ, accuracy and errors as `exactShape`. */
export function exactLightShape(nu: number, kappa: number, vertex: Vertex): number {
  return evaluate(lightSquare(nu), kappa, vertex, false);
}

/** Ŝ of a light field summed over the three permutations; ranges and errors as `exactLightShape`. */
export function exactLightShapeTotal(nu: number, kappa: number, vertex: Vertex): number {
  return evaluate(lightSquare(nu), kappa, vertex, true);
}
