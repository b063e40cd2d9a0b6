/**
 * The three special functions that the diagnostics need, to about 1e-14 relative.
 *
 * Sources: Wichura (1988), Algorithm AS 241, Applied Statistics 37, 477 (inverse normal); Stirling's series,
 * DLMF 5.11.1 (log gamma); continued fraction DLMF 8.17.22 by Lentz's method, with the prefactor in the
 * saddle-point form of Loader (2000), "Fast and accurate computation of binomial probabilities" (beta).
 */

const HALF_LOG_2PI = 0.9189385332046727;

/** Stirling's series starts here: with eight terms its remainder is below 1e-17. */
const STIRLING_FROM = 15;

function stirlingSeries(x: number): number {
  const r = 1 / (x * x);
  const inner = 1 / 1680 - r * (1 / 1188 - r * (691 / 360360 - r * (1 / 156 - (r * 3617) / 122400)));
  return (1 / 12 - r * (1 / 360 - r * (1 / 1260 - r * inner))) / x;
}

/** ln Γ(x) for x > 0; NaN elsewhere. */
export function logGamma(x: number): number {
  if (!(x > 0)) return NaN;
  if (x === Infinity) return Infinity;
  let shift = 1;
  let y = x;
  while (y < STIRLING_FROM) {
    shift *= y;
    y += 1;
  }
  return (y - 0.5) * Math.log(y) - y + HALF_LOG_2PI + stirlingSeries(y) - Math.log(shift);
}

/** ln Γ(x + 1) − [(x + ½) ln x − x + ½ ln 2π] for x > 0: what Stirling's formula leaves out. */
function stirlingError(x: number): number {
  if (x >= STIRLING_FROM) return stirlingSeries(x);
  return logGamma(x + 1) - (x + 0.5) * Math.log(x) + x - HALF_LOG_2PI;
}

/** x ln(x/m) + m − x without cancellation where x is near m. */
function devianceTerm(x: number, m: number): number {
  if (Math.abs(x - m) >= 0.1 * (x + m)) return x * Math.log(x / m) + m - x;
  const v = (x - m) / (x + m);
  let sum = (x - m) * v;
  let term = 2 * x * v;
  for (let j = 1; j < 100; j++) {
    term *= v * v;
    const next = sum + term / (2 * j + 1);
    if (next === sum) break;
    sum = next;
  }
  return sum;
}

/** x^a (1 − x)^b / B(a, b) for 0 < x < 1. */
function betaPrefactor(x: number, a: number, b: number): number {
  const n = a + b;
  const exponent =
    stirlingError(n) -
    stirlingError(a) -
    stirlingError(b) -
    devianceTerm(a, n * x) -
    devianceTerm(b, n * (1 - x));
  return Math.sqrt((a * b) / (2 * Math.PI * n)) * Math.exp(exponent);
}

/** The continued fraction of I_x(a, b) over its prefactor / a; converges fast for x < (a + 1)/(a + b + 2). */
function betaFraction(x: number, a: number, b: number): number {
  const tiny = 1e-300;
  let c = 1;
  let d = 1 - ((a + b) * x) / (a + 1);
  d = 1 / (Math.abs(d) < tiny ? tiny : d);
  let value = d;
  for (let m = 1; m < 100_000; m++) {
    const even = (m * (b - m) * x) / ((a + 2 * m - 1) * (a + 2 * m));
    d = 1 + even * d;
    d = 1 / (Math.abs(d) < tiny ? tiny : d);
    c = 1 + even / c;
    if (Math.abs(c) < tiny) c = tiny;
    value *= d * c;
    const odd = (-(a + m) * (a + b + m) * x) / ((a + 2 * m) * (a + 2 * m + 1));
    d = 1 + odd * d;
    d = 1 / (Math.abs(d) < tiny ? tiny : d);
    c = 1 + odd / c;
    if (Math.abs(c) < tiny) c = tiny;
    const factor = d * c;
    value *= factor;
    if (Math.abs(factor - 1) < 2e-16) break;
  }
  return value;
}

/** Regularised incomplete beta function I_x(a, b), a, b > 0, 0 ≤ x ≤ 1; NaN elsewhere. */
export function betaProbability(x: number, a: number, b: number): number {
  if (!(a > 0 && b > 0 && x >= 0 && x <= 1 && a < Infinity && b < Infinity)) return NaN;
  if (x === 0 || x === 1) return x;
  const prefactor = betaPrefactor(x, a, b);
  if (x < (a + 1) / (a + b + 2)) return (prefactor * betaFraction(x, a, b)) / a;
  return 1 - (prefactor * betaFraction(1 - x, b, a)) / b;
}

/** The x with I_x(a, b) = p, for 0 ≤ p ≤ 1 and a, b > 0 (Newton's method held in a bracket); NaN elsewhere. */
export function betaQuantile(p: number, a: number, b: number): number {
  if (!(a > 0 && b > 0 && p >= 0 && p <= 1 && a < Infinity && b < Infinity)) return NaN;
  if (p === 0 || p === 1) return p;
  let low = 0;
  let high = 1;
  const n = a + b;
  let x = a / n + normalQuantile(p) * Math.sqrt((a * b) / (n * n * (n + 1)));
  for (let i = 0; i < 200; i++) {
    if (!(x > low && x < high)) x = 0.5 * (low + high);
    const miss = betaProbability(x, a, b) - p;
    if (miss === 0) return x;
    if (miss > 0) high = x;
    else low = x;
    const step = (miss * x * (1 - x)) / betaPrefactor(x, a, b);
    if (Math.abs(step) <= 2e-16 * x || high - low <= 2e-16 * high) return x;
    x -= step;
  }
  return x;
}

/** Φ⁻¹(p), the standard normal quantile; −∞ and ∞ at 0 and 1, NaN outside [0, 1]. */
export function normalQuantile(p: number): number {
  const q = p - 0.5;
  if (Math.abs(q) <= 0.425) return q * centralRatio(0.180625 - q * q);
  if (!(p >= 0 && p <= 1)) return NaN;
  const tail = q < 0 ? p : 1 - p;
  if (tail === 0) return q < 0 ? -Infinity : Infinity;
  const r = Math.sqrt(-Math.log(tail));
  const x = r <= 5 ? middleRatio(r - 1.6) : farRatio(r - 5);
  return q < 0 ? -x : x;
}

function centralRatio(r: number): number {
  const above =
    ((((((2509.0809287301226727 * r + 33430.575583588128105) * r + 67265.770927008700853) * r +
      45921.953931549871457) *
      r +
      13731.693765509461125) *
      r +
      1971.5909503065514427) *
      r +
      133.14166789178437745) *
      r +
    3.387132872796366608;
  const below =
    ((((((5226.495278852854561 * r + 28729.085735721942674) * r + 39307.89580009271061) * r +
      21213.794301586595867) *
      r +
      5394.1960214247511077) *
      r +
      687.1870074920579083) *
      r +
      42.313330701600911252) *
      r +
    1;
  return above / below;
}

function middleRatio(r: number): number {
  const above =
    ((((((7.7454501427834140764e-4 * r + 0.0227238449892691845833) * r + 0.24178072517745061177) * r +
      1.27045825245236838258) *
      r +
      3.64784832476320460504) *
      r +
      5.7694972214606914055) *
      r +
      4.6303378461565452959) *
      r +
    1.42343711074968357734;
  const below =
    ((((((1.05075007164441684324e-9 * r + 5.475938084995344946e-4) * r + 0.0151986665636164571966) * r +
      0.14810397642748007459) *
      r +
      0.68976733498510000455) *
      r +
      1.6763848301838038494) *
      r +
      2.05319162663775882187) *
      r +
    1;
  return above / below;
}

function farRatio(r: number): number {
  const above =
    ((((((2.01033439929228813265e-7 * r + 2.71155556874348757815e-5) * r + 0.0012426609473880784386) * r +
      0.026532189526576123093) *
      r +
      0.29656057182850489123) *
      r +
      1.7848265399172913358) *
      r +
      5.4637849111641143699) *
      r +
    6.6579046435011037772;
  const below =
    ((((((2.04426310338993978564e-15 * r + 1.4215117583164458887e-7) * r + 1.8463183175100546818e-5) * r +
      7.868691311456132591e-4) *
      r +
      0.0148753612908506148525) *
      r +
      0.13692988092273580531) *
      r +
      0.59983220655588793769) *
      r +
    1;
  return above / below;
}
