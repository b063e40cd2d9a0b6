import { lightSquare } from './exact-shape';
import { lightLeading } from './exchange-function';
import { writeSqueezedCoefficient } from './squeezed-coefficient';
import type { Vertex } from './types';

/**
 * A light field in the squeezed limit: Ŝ = c₋ κ^{1/2−ν} + c₊ κ^{1/2+ν} + a₀ κ, 0 < ν < 3/2, at unit couplings, with
 *
 *   vertex 1: c_±(ν) = (√π/32) 4^{∓ν} tan(π/4 ± πν/2) Γ(5/2 ± ν) Γ(∓ν),   a₀ = 1/(8 (1/4 − ν²)),
 *   vertex 2: c_± times −(9/2 ± ν)/(1/2 ± ν),   a₀ times −5.
 *
 * At ν = 1/2 the poles of c₊ and a₀ cancel. Derived by us: the continuation iμ → ±ν of the heavy field.
 */

/** c_s of a vertex, s = ±ν. */
function coefficient(s: number, vertex: Vertex): number {
  if (vertex === 1) return lightLeading(s);
  // tan(π/4 + πs/2)/(1/2 + s) at s = −1/2, where both vanish.
  if (s === -0.5) return (-Math.PI * Math.PI) / 8;
  return (-lightLeading(s) * (4.5 + s)) / (0.5 + s);
}

/**
 * c₋ and c₊ of the leading terms κ^{1/2−ν} and κ^{1/2+ν} of a light field, dimensionless, 0 < ν < 3/2. `plus` is infinite at
 * ν = 1/2 and 1, where its pole is cancelled by another term. Throws TemplateError `invalid_mass` elsewhere.
 */
export function lightCoefficients(nu: number, vertex: Vertex): { minus: number; plus: number } {
  lightSquare(nu);
  const infinite = nu === 0.5 || nu === 1;
  return { minus: coefficient(-nu, vertex), plus: infinite ? Infinity : coefficient(nu, vertex) };
}

/** 0 up to ν = 3/4, 1 from 9/10 on, six derivatives continuous: the integral of t⁶(1 − t)⁶, normalised. */
function share(nu: number): number {
  const t = (nu - 0.75) / 0.15;
  if (t <= 0) return 0;
  if (t >= 1) return 1;
  const inner = 1716 + t * (-9009 + t * (20020 + t * (-24024 + t * (16380 + t * (-6006 + t * 924)))));
  return t ** 7 * inner;
}

const correction = (s: number, vertex: Vertex): number =>
  vertex === 1
    ? ((2.5 + s) * (3.5 + s)) / (16 * (1 + s))
    : ((0.5 + s) * (3.5 + s) * (6.5 + s)) / (16 * (1 + s) * (4.5 + s)) - 0.5;

/**
 * Adds `weight` times the leading terms of both vertices at z = −ν² (at z > 0 their continuation, Re C κ^{1/2+iμ} + a₀ κ).
 * The next term of the first series, κ^{5/2−ν}, has at ν = 1 the pole that cancels c₊'s and outgrows κ^{1/2+ν} beyond: it is
 * taken in there (from ν = 3/4 on, by degrees), and is below κ² of the first term elsewhere.
 */
export function addLeadingLight(
  z: number,
  weight: number,
  kappa: Float64Array,
  out: readonly Float64Array[],
): void {
  const smooth = 1 / (8 * (0.25 + z));
  const c = new Float64Array(2);
  for (const vertex of [1, 2] as const) {
    const column = out[vertex - 1];
    const a = vertex === 1 ? smooth : -5 * smooth;
    if (z > 0) {
      const mu = Math.sqrt(z);
      writeSqueezedCoefficient(mu, vertex, c);
      for (let i = 0; i < kappa.length; i += 1) {
        const angle = mu * Math.log(kappa[i]);
        const wave = Math.sqrt(kappa[i]) * (c[0] * Math.cos(angle) - c[1] * Math.sin(angle));
        column[i] += weight * (wave + a * kappa[i]);
      }
      continue;
    }
    const nu = Math.sqrt(-z);
    const minus = coefficient(-nu, vertex);
    const plus = coefficient(nu, vertex);
    const next = share(nu) * minus * (share(nu) > 0 ? correction(-nu, vertex) : 0);
    for (let i = 0; i < kappa.length; i += 1) {
      const x = kappa[i];
      column[i] +=
        weight * (minus * x ** (0.5 - nu) + plus * x ** (0.5 + nu) + next * x ** (2.5 - nu) + a * x);
    }
  }
}
