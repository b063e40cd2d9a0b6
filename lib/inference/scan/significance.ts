import { betaProbability, logGamma } from '@/lib/sampler';
import type { CollapsedBlock } from './moments';

/** P(χ²_q > x): exp(−x/2) times a finite sum for even q, with the complementary error function for odd q. */
export function chiSquareTail(x: number, q: number): number {
  if (!(x > 0)) return 1;
  const half = x / 2;
  if (q % 2 === 0) {
    let term = 1;
    let sum = 1;
    for (let k = 1; k < q / 2; k += 1) {
      term *= half / k;
      sum += term;
    }
    return Math.exp(-half) * sum;
  }
  // Γ(½, h)/Γ(½) = erfc √h, then Q(a + 1) = Q(a) + h^a e^{−h}/Γ(a + 1).
  let tail = complementaryError(Math.sqrt(half));
  for (let a = 0.5; a < q / 2; a += 1) tail += Math.exp(a * Math.log(half) - half - logGamma(a + 1));
  return Math.min(1, tail);
}

/** erfc(x), x ≥ 0: series below 2, Lentz's continued fraction above. */
function complementaryError(x: number): number {
  if (x < 2) {
    let term = x;
    let sum = x;
    for (let n = 1; n < 200 && Math.abs(term) > 1e-18 * Math.abs(sum); n += 1) {
      term *= (2 * x * x) / (2 * n + 1);
      sum += term;
    }
    return 1 - (2 / Math.sqrt(Math.PI)) * Math.exp(-x * x) * sum;
  }
  let tail = x;
  for (let k = 200; k >= 1; k -= 1) tail = x + k / 2 / tail;
  return Math.exp(-x * x) / (Math.sqrt(Math.PI) * tail);
}

/** P(F(d1, d2) > f) = I_{d2/(d2 + d1 f)}(d2/2, d1/2). */
export function fTail(f: number, d1: number, d2: number): number {
  if (!(f > 0)) return 1;
  return betaProbability(d2 / (d2 + d1 * f), d2 / 2, d1 / 2);
}

/**
 * The probability, without any signal, of a Δχ² at least this large at this one frequency. `freedom` q coefficients are added to
 * `background` fitted ones.
 *
 * Covariance known: χ² with q degrees of freedom. Covariance from N mocks (any likelihood; n = N − 1): by Rao's test for
 * additional information (Rao 1973, Linear Statistical Inference, 8c.4; from memory),
 *
 *     F = (n − p + k + 1)/q · (χ²_0 − χ²_1)/(n + χ²_1)  ~  F(q, n − p + k + 1),
 *
 * p data, k background coefficients, χ²_0 and χ²_1 with S without and with the field: exact for normal data, whatever the likelihood.
 */
export function localTail(
  block: CollapsedBlock,
  mocks: number | null,
  chiSquare: { without: number; with: number },
  freedom: number,
  background: number,
): number {
  const gain = Math.max(0, chiSquare.without - chiSquare.with);
  if (mocks === null) return chiSquareTail(gain, freedom);
  const n = mocks - 1;
  const second = n - block.data.length + background + 1;
  return fTail(((second / freedom) * gain) / (n + chiSquare.with), freedom, second);
}

/**
 * Global p of a maximum `height` of a χ²_q process by its upcrossings (Gross and Vitells 2010, Eur. Phys. J. C 70, 525):
 * P(χ²_q > u) + ⟨N(u_0)⟩ (u/u_0)^{(q−1)/2} exp(−(u − u_0)/2), at most 1. ⟨N(u_0)⟩: mean upcrossings of u_0 of nulls.
 */
export function upcrossingTail(
  height: number,
  freedom: number,
  level: number,
  meanUpcrossings: number,
): number {
  const expected =
    meanUpcrossings * (height / level) ** ((freedom - 1) / 2) * Math.exp(-(height - level) / 2);
  return Math.min(1, chiSquareTail(height, freedom) + expected);
}
