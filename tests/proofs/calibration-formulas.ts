/**
 * Predictions of the templates, written anew from their formulas, so that data are simulated by other code than what fits
 * them: complex arithmetic on pairs, Γ by Lanczos' sum (g = 7, nine coefficients, from memory; reflected below ½).
 */
type Complex = readonly [number, number];

const LANCZOS = [
  0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059,
  12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
];

const times = ([a, b]: Complex, [c, d]: Complex): Complex => [a * c - b * d, a * d + b * c];
const over = ([a, b]: Complex, [c, d]: Complex): Complex => {
  const size = c * c + d * d;
  return [(a * c + b * d) / size, (b * c - a * d) / size];
};
const exp = ([a, b]: Complex): Complex => [Math.exp(a) * Math.cos(b), Math.exp(a) * Math.sin(b)];
const ln = ([a, b]: Complex): Complex => [Math.log(Math.hypot(a, b)), Math.atan2(b, a)];
const sine = ([a, b]: Complex): Complex => [Math.sin(a) * Math.cosh(b), Math.cos(a) * Math.sinh(b)];

/** Γ(z). */
export function gamma(z: Complex): Complex {
  if (z[0] < 0.5) {
    return over([Math.PI, 0], times(sine([Math.PI * z[0], Math.PI * z[1]]), gamma([1 - z[0], -z[1]])));
  }
  const w: Complex = [z[0] - 1, z[1]];
  let sum: Complex = [LANCZOS[0], 0];
  for (let k = 1; k < LANCZOS.length; k += 1) {
    const term = over([LANCZOS[k], 0], [w[0] + k, w[1]]);
    sum = [sum[0] + term[0], sum[1] + term[1]];
  }
  const t: Complex = [w[0] + 7.5, w[1]];
  const power = times([w[0] + 0.5, w[1]], ln(t));
  return times([Math.sqrt(2 * Math.PI), 0], times(exp([power[0] - t[0], power[1] - t[1]]), sum));
}

/** C₁(μ) = (√π/16) (1 + i sinh πμ)/cosh πμ · 4^{−iμ} Γ(5/2 + iμ) Γ(−iμ). */
export function firstCoefficient(mu: number): Complex {
  const y = Math.PI * mu;
  const turn: Complex = [1 / Math.cosh(y), Math.tanh(y)];
  const gammas = times(gamma([2.5, mu]), gamma([0, -mu]));
  const c = times(times(turn, exp([0, -mu * Math.log(4)])), gammas);
  return [(Math.sqrt(Math.PI) / 16) * c[0], (Math.sqrt(Math.PI) / 16) * c[1]];
}

/** ⟨κ^s⟩, uniform in ln κ from lo to hi: (hi^s − lo^s)/(s ln(hi/lo)). */
export function meanPower(s: Complex, lo: number, hi: number): Complex {
  const a = Math.log(lo);
  const b = Math.log(hi);
  const high = exp([s[0] * b, s[1] * b]);
  const low = exp([s[0] * a, s[1] * a]);
  return over([high[0] - low[0], high[1] - low[1]], [s[0] * (b - a), s[1] * (b - a)]);
}

/** ⟨κ^{1/2} Re[C κ^{iμ}]⟩. */
export function oscillation(c: Complex, mu: number, lo: number, hi: number): number {
  return times(c, meanPower([0.5, mu], lo, hi))[0];
}

/** ⟨c₋ κ^{1/2−ν} + c₊ κ^{1/2+ν} + a₀ κ⟩ of vertex 1, c_± = (√π/32) 4^{∓ν} tan(π/4 ± πν/2) Γ(5/2 ± ν) Γ(∓ν), a₀ = 1/(8 (1/4 − ν²)). */
export function lightShape(nu: number, lo: number, hi: number): number {
  const term = (s: number): number =>
    (Math.sqrt(Math.PI) / 32) *
    4 ** -s *
    Math.tan(Math.PI / 4 + (Math.PI * s) / 2) *
    gamma([2.5 + s, 0])[0] *
    gamma([-s, 0])[0] *
    meanPower([0.5 + s, 0], lo, hi)[0];
  return term(-nu) + term(nu) + meanPower([1, 0], lo, hi)[0] / (8 * (0.25 - nu * nu));
}
