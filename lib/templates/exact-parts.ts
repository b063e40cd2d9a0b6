import { TemplateError, quoteValue } from './errors';
import { heavySquare } from './exact-shape';
import { writeSqueezedCoefficient } from './squeezed-coefficient';
import type { Vertex } from './types';

/**
 * The two parts of the exact shape of one permutation, long leg on the mixing vertex, heavy field, κ < 2:
 *
 *   Ŝ = κ^{1/2} Re[C(μ) κ^{iμ} F(μ, κ)] + Σ_{n≥0} a_n κ^{n+1},   s = iμ, b = 1/2 + s, r = κ/2,
 *   F₁ = ₂F₁(5/4 + s/2, 7/4 + s/2; 1 + s; r²),   F₂ = (1 − κ²/2) ₃F₂(b/2, (b + 3)/2, (b + 6)/2; 1 + s, (b + 4)/2; r²),
 *   v_n [(n + 1/2)² + μ²] = 1/n! + v_{n−2},   vertex 1: a_n = (−1)ⁿ (n + 2)! v_n / 2^{n+4},
 *   vertex 2: Σ a_n κ^{n+1} = −(κ/16)(1 − κ²/2) Σ (−1)ⁿ n! (n + 2)(n + 5) v_n (κ/2)ⁿ.
 *
 * They say how far the leading template holds and which background the rest needs. Derived by us.
 */

function requireKappa(kappa: number): void {
  if (kappa > 0 && kappa < 2) return;
  throw new TemplateError(
    'invalid_axis',
    'kappa',
    `kappa = ${quoteValue(kappa)} belongs to no isosceles triangle; give 0 < kappa < 2`,
  );
}

/**
 * F(μ, κ), what corrects the leading squeezed oscillation; dimensionless, 1 as κ → 0. 0 < μ ≤ 100, 0 < κ < 2 to 1e-12 relative for
 * κ ≤ 1.5. Throws TemplateError `invalid_mass` or `invalid_axis` elsewhere.
 */
export function squeezedCorrection(mu: number, kappa: number, vertex: Vertex): { re: number; im: number } {
  heavySquare(mu);
  requireKappa(kappa);
  const square = (kappa * kappa) / 4;
  let [termRe, termIm, re, im] = [1, 0, 1, 0];
  const half = mu / 2;
  // Pochhammer factors of the numerator and the denominator, x + iμ/2 each, and 1 + j + iμ below.
  const upper = vertex === 1 ? [1.25, 1.75] : [0.25, 1.75, 3.25];
  const lower = vertex === 1 ? [] : [2.25];
  for (let j = 0; j < 5000; j += 1) {
    let [ratioRe, ratioIm] = [square / (j + 1), 0];
    for (const x of upper) {
      [ratioRe, ratioIm] = [ratioRe * (x + j) - ratioIm * half, ratioRe * half + ratioIm * (x + j)];
    }
    const below = [[1 + j, mu], ...lower.map((x) => [x + j, half])];
    for (const [c, d] of below) {
      const size = c * c + d * d;
      [ratioRe, ratioIm] = [(ratioRe * c + ratioIm * d) / size, (ratioIm * c - ratioRe * d) / size];
    }
    [termRe, termIm] = [termRe * ratioRe - termIm * ratioIm, termRe * ratioIm + termIm * ratioRe];
    re += termRe;
    im += termIm;
    if (Math.abs(termRe) + Math.abs(termIm) < 1e-17 * (Math.abs(re) + Math.abs(im))) break;
  }
  const factor = vertex === 1 ? 1 : 1 - 2 * square;
  return { re: factor * re, im: factor * im };
}

/** κ^{1/2} Re[C κ^{iμ} F], the oscillating part of Ŝ; range and errors as `squeezedCorrection`. */
export function oscillatingPart(mu: number, kappa: number, vertex: Vertex): number {
  const f = squeezedCorrection(mu, kappa, vertex);
  const c = new Float64Array(2);
  writeSqueezedCoefficient(mu, vertex, c);
  const angle = mu * Math.log(kappa);
  const re = c[0] * f.re - c[1] * f.im;
  const im = c[0] * f.im + c[1] * f.re;
  return Math.sqrt(kappa) * (re * Math.cos(angle) - im * Math.sin(angle));
}

/**
 * a_0 … a_{count−1} of the smooth part: coefficients of κ, κ², …; dimensionless, exact to rounding. Throws TemplateError
 * `invalid_mass` unless 0 ≤ μ < ∞.
 */
export function smoothCoefficients(mu: number, count: number, vertex: Vertex): Float64Array {
  const z = heavySquare(mu);
  // u_n = n! v_n, so that u_n [(n + 1/2)² + μ²] = 1 + n (n − 1) u_{n−2}.
  const u = new Float64Array(count);
  const plain = new Float64Array(count);
  for (let n = 0; n < count; n += 1) {
    u[n] = (1 + (n < 2 ? 0 : n * (n - 1) * u[n - 2])) / ((n + 0.5) ** 2 + z);
    const sign = n % 2 === 0 ? 1 : -1;
    const polynomial = vertex === 1 ? (n + 1) * (n + 2) : -(n + 2) * (n + 5);
    plain[n] = (sign * polynomial * u[n]) / 2 ** (n + 4);
  }
  return vertex === 1 ? plain : plain.map((a, n) => a - (n < 2 ? 0 : 0.5 * plain[n - 2]));
}

/** Σ a_n κ^{n+1}, the smooth part of Ŝ; range and errors as `squeezedCorrection`, accuracy 1e-12 for κ ≤ 1.5. */
export function smoothPart(mu: number, kappa: number, vertex: Vertex): number {
  requireKappa(kappa);
  const count = Math.min(4000, Math.ceil(80 / Math.log(2 / kappa)) + 8);
  const a = smoothCoefficients(mu, count, vertex);
  let sum = 0;
  for (let n = count - 1; n >= 0; n -= 1) sum = sum * kappa + a[n];
  return sum * kappa;
}
