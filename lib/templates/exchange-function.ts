import { complexLogGamma } from './log-gamma';
import { writeSqueezedCoefficient } from './squeezed-coefficient';

/**
 * The function h(r) from which every exchange of one field follows, r = k_m / (k_a + k_b) with k_m the leg that mixes and
 * k_a, k_b those at the cubic vertex; z = m²/H² − 9/4 (μ² for a heavy field, −ν² for a light one), θ = r d/dr:
 *
 *   [(θ − 1/2)² + z] h = r² θ(θ + 1) h + r/(1 + r),   regular at r = 1 (no excitation before inflation).
 *
 * About r = 0, with s² = −z and b = 1/2 + s:
 *   h = Σ_± c(±s) r^b Σ_j d_j r^{2j} + Σ_n (−1)ⁿ u_n r^{n+1},
 *   d_{j+1}/d_j = (b + 2j)(b + 2j + 1) / (4 (j + 1)(1 + s + j)),   u_n [(n + 1/2)² + z] = 1 + n(n − 1) u_{n−2},
 *   c(s) = 2^{b+3} C₁(s) / (b (b + 1)),  C₁ the coefficient of the leading squeezed term (squeezed-coefficient.ts).
 * About r = 1 a power series in t = 1 − r of the same equation, its one free number matched to the first form. Derived by us.
 */
export class ExchangeFunction {
  private readonly branches: Branch[];
  private readonly analytic: number[] = [];
  /** Below it the series about r = 0 is summed, above it the one about r = 1. */
  private readonly seam: number;
  private aboutOne: Float64Array | null = null;
  private readonly sums = new Float64Array(3);

  /** `z` is at least SEPARATION away from 0, −1/4 and −1, where the parts have poles that cancel. */
  constructor(private readonly z: number) {
    this.branches =
      z > 0 ? [heavyBranch(Math.sqrt(z))] : [lightBranch(-Math.sqrt(-z)), lightBranch(Math.sqrt(-z))];
    // The series about 1 loses digits as exp(μ arcosh 1/r): start it where that stays below 500.
    this.seam = z > 0 ? 1 / Math.cosh(Math.min(WIDEST, 6 / Math.sqrt(z))) : 1 / Math.cosh(WIDEST);
  }

  /** Writes h, θh, θ²h at r, 0 < r ≤ 1, dimensionless; relative accuracy about 1e-12 for z ≤ 400. */
  write(r: number, out: Float64Array): void {
    if (r <= this.seam) this.writeAboutZero(r, out);
    else this.writeAboutOne(1 - r, out);
  }

  private writeAboutZero(r: number, out: Float64Array): void {
    const { sums } = this;
    out.fill(0, 0, 3);
    for (const branch of this.branches) {
      branch.write(r, sums);
      for (let k = 0; k < 3; k += 1) out[k] += sums[k];
    }
    let power = r;
    for (let n = 0; n < MAX_TERMS; n += 1) {
      const term = this.coefficient(n) * power;
      const e = n + 1;
      out[0] += term;
      out[1] += e * term;
      out[2] += e * e * term;
      if (e * e * Math.abs(term) < ROUNDING * (Math.abs(out[0]) + Math.abs(out[2]))) break;
      power *= -r;
    }
  }

  /** u_n. */
  private coefficient(n: number): number {
    const { analytic, z } = this;
    for (let k = analytic.length; k <= n; k += 1) {
      const source = k < 2 ? 1 : 1 + k * (k - 1) * analytic[k - 2];
      analytic.push(source / ((k + 0.5) ** 2 + z));
    }
    return analytic[n];
  }

  private writeAboutOne(t: number, out: Float64Array): void {
    this.aboutOne ??= this.match();
    sumAboutOne(this.aboutOne, t, out);
  }

  /** The series about 1 that agrees at the seam with the one about 0, in value and slope. */
  private match(): Float64Array {
    const { seam, z } = this;
    if (z >= HEAVY) return smoothSeriesAboutOne(z);
    const particular = seriesAboutOne(z, 0, 1);
    const homogeneous = seriesAboutOne(z, 1, 0);
    const wanted = new Float64Array(3);
    const own = new Float64Array(3);
    const free = new Float64Array(3);
    this.writeAboutZero(seam, wanted);
    sumAboutOne(particular, 1 - seam, own);
    sumAboutOne(homogeneous, 1 - seam, free);
    // Both conditions hold for the right number; together they never lose it to a zero of h or of its slope.
    const slope = 1 / (1 + Math.abs(z));
    const scale = free[0] * free[0] + slope * free[1] * free[1];
    const value = ((wanted[0] - own[0]) * free[0] + slope * (wanted[1] - own[1]) * free[1]) / scale;
    return particular.map((x, n) => x + value * homogeneous[n]);
  }
}

/** arcosh 2: the series about 0 is used to r = 1/2 at least. */
const WIDEST = Math.acosh(2);
const ROUNDING = 1e-17;
const MAX_TERMS = 2000;
/** Terms of the series about 1: t ≤ 1/2, so that the last is below rounding. */
const TERMS_ABOUT_ONE = 72;

/** One non-analytic branch: writes its share of h, θh, θ²h. */
interface Branch {
  write(r: number, out: Float64Array): void;
}

/** Re[c(iμ) r^b Σ d_j r^{2j}], both conjugate branches of a heavy field together. */
function heavyBranch(mu: number): Branch {
  const c = new Float64Array(2);
  writeSqueezedCoefficient(mu, 1, c);
  // c = 2^{b+3} C₁ / (b (b + 1)), b = 1/2 + iμ, b (b + 1) = 3/4 − μ² + 2iμ.
  const scale = 8 * Math.SQRT2;
  const [turnRe, turnIm] = [scale * Math.cos(mu * Math.LN2), scale * Math.sin(mu * Math.LN2)];
  const [downRe, downIm] = [0.75 - mu * mu, 2 * mu];
  const size = downRe * downRe + downIm * downIm;
  const [upRe, upIm] = [c[0] * turnRe - c[1] * turnIm, c[0] * turnIm + c[1] * turnRe];
  const re = [(upRe * downRe + upIm * downIm) / size];
  const im = [(upIm * downRe - upRe * downIm) / size];
  const grow = (): void => {
    const j = re.length - 1;
    const e = 0.5 + 2 * j;
    const [numRe, numIm] = [e * (e + 1) - mu * mu, mu * (2 * e + 1)];
    const [denRe, denIm] = [4 * (j + 1) * (1 + j), 4 * (j + 1) * mu];
    const norm = denRe * denRe + denIm * denIm;
    const [ratioRe, ratioIm] = [
      (numRe * denRe + numIm * denIm) / norm,
      (numIm * denRe - numRe * denIm) / norm,
    ];
    re.push(re[j] * ratioRe - im[j] * ratioIm);
    im.push(re[j] * ratioIm + im[j] * ratioRe);
  };
  return {
    write(r, out) {
      const angle = mu * Math.log(r);
      const [cos, sin] = [Math.cos(angle), Math.sin(angle)];
      const square = r * r;
      let power = Math.sqrt(r);
      out.fill(0, 0, 3);
      for (let j = 0; j < MAX_TERMS; j += 1) {
        if (j === re.length) grow();
        const a = (re[j] * cos - im[j] * sin) * power;
        const b = (re[j] * sin + im[j] * cos) * power;
        const e = 0.5 + 2 * j;
        out[0] += a;
        // θ multiplies the complex term by e + iμ.
        out[1] += e * a - mu * b;
        out[2] += (e * e - mu * mu) * a - 2 * e * mu * b;
        const size = (e * e + mu * mu) * (Math.abs(a) + Math.abs(b));
        if (size < ROUNDING * (Math.abs(out[0]) + Math.abs(out[2]))) break;
        power *= square;
      }
    },
  };
}

/** c(s) r^b Σ d_j r^{2j} for real s = ±ν. */
function lightBranch(s: number): Branch {
  const b = 0.5 + s;
  const terms = [(2 ** (b + 3) * lightLeading(s)) / (b * (b + 1))];
  return {
    write(r, out) {
      const square = r * r;
      let power = r ** b;
      out.fill(0, 0, 3);
      for (let j = 0; j < MAX_TERMS; j += 1) {
        if (j === terms.length) {
          const at = b + 2 * (j - 1);
          terms.push((terms[j - 1] * at * (at + 1)) / (4 * j * (s + j)));
        }
        const e = b + 2 * j;
        const term = terms[j] * power;
        out[0] += term;
        out[1] += e * term;
        out[2] += e * e * term;
        if (j > 1 && e * e * Math.abs(term) < ROUNDING * (Math.abs(out[0]) + Math.abs(out[2]))) break;
        power *= square;
      }
    },
  };
}

function gamma(x: number): number {
  const out = new Float64Array(2);
  complexLogGamma(x, 0, out);
  return Math.exp(out[0]) * Math.cos(out[1]);
}

/**
 * Coefficient of κ^{1/2+s} in Ŝ of vertex 1 for real s = ±ν: c_±(ν) = (√π/32) tan(π/4 + πs/2) 4^{−s} Γ(5/2 + s) Γ(−s).
 * −3/2 < s < 3/2; infinite at s = 0, 1/2, 1. Derived by us.
 */
export function lightLeading(s: number): number {
  return (
    (Math.sqrt(Math.PI) / 32) * Math.tan(0.5 * Math.PI * (s + 0.5)) * 4 ** -s * gamma(2.5 + s) * gamma(-s)
  );
}

/** From μ = 14 on what oscillates is below 1e-12 of h near r = 1. */
const HEAVY = 196;
/** t(1 − t)²(2 − t)² and 2(1 − t)³(2 − t) by powers of t. */
const SECOND = [0, 4, -12, 13, -6, 1];
const SLOPE = [4, -14, 18, -10, 2];

/** What the equation in t has of x_n … x_{n−4} in its coefficient of tⁿ (x_{n+1} has 4 (n + 1)²). */
function rowAboutOne(m: number, n: number, k: number): number {
  let entry = k === 0 ? 2 * m : k === 1 ? -m : 0;
  if (k + 2 < SECOND.length) entry += SECOND[k + 2] * (n - k) * (n - k - 1);
  if (k + 1 < SLOPE.length) entry += SLOPE[k + 1] * (n - k);
  return entry;
}

/**
 * The coefficients in t of a heavy field. The recurrence upwards from x_0 loses a factor of M a step, so the coefficients
 * are solved for together, with those beyond the last set to 0: Olver's algorithm, which finds the solution that doesn't
 * grow. The last is well beyond where the homogeneous solution's are largest, n ≈ √2 μ.
 */
function smoothSeriesAboutOne(z: number): Float64Array {
  const m = 0.25 + z;
  const size = Math.ceil(2.6 * Math.sqrt(z)) + 1;
  const rows = Array.from({ length: size }, (_, n) => {
    const row = new Float64Array(size);
    for (let k = 0; k <= 4 && k <= n; k += 1) row[n - k] = rowAboutOne(m, n, k);
    if (n + 1 < size) row[n + 1] = 4 * (n + 1) * (n + 1);
    return row;
  });
  const x = new Float64Array(size);
  x[0] = 1;
  x[1] = -1;
  // Gaussian elimination; entries stand at most four rows below the diagonal.
  for (let j = 0; j < size; j += 1) {
    const below = Math.min(size, j + 5);
    let pivot = j;
    for (let i = j + 1; i < below; i += 1) if (Math.abs(rows[i][j]) > Math.abs(rows[pivot][j])) pivot = i;
    [rows[j], rows[pivot]] = [rows[pivot], rows[j]];
    [x[j], x[pivot]] = [x[pivot], x[j]];
    for (let i = j + 1; i < below; i += 1) {
      const factor = rows[i][j] / rows[j][j];
      if (factor === 0) continue;
      for (let k = j; k < size; k += 1) rows[i][k] -= factor * rows[j][k];
      x[i] -= factor * x[j];
    }
  }
  for (let j = size - 1; j >= 0; j -= 1) {
    for (let k = j + 1; k < size; k += 1) x[j] -= rows[j][k] * x[k];
    x[j] /= rows[j][j];
  }
  return x;
}

/**
 * Coefficients in t = 1 − r, first one given: t(1−t)²(2−t)² h'' + 2(1−t)³(2−t) h' + M(2−t) h = source·(1 − t), primes by t,
 * M = 1/4 + z.
 */
function seriesAboutOne(z: number, first: number, source: 0 | 1): Float64Array {
  const m = 0.25 + z;
  const x = new Float64Array(TERMS_ABOUT_ONE);
  x[0] = first;
  for (let n = 0; n + 1 < TERMS_ABOUT_ONE; n += 1) {
    let rest = n === 0 ? source : n === 1 ? -source : 0;
    for (let k = 0; k <= 4 && k <= n; k += 1) rest -= rowAboutOne(m, n, k) * x[n - k];
    x[n + 1] = rest / (4 * (n + 1) * (n + 1));
  }
  return x;
}

/** h, θh, θ²h from the series in t, with θ = −(1 − t) d/dt. */
function sumAboutOne(x: Float64Array, t: number, out: Float64Array): void {
  let value = 0;
  let slope = 0;
  let curve = 0;
  for (let n = x.length - 1; n >= 0; n -= 1) {
    curve = curve * t + 2 * slope;
    slope = slope * t + value;
    value = value * t + x[n];
  }
  const r = 1 - t;
  out[0] = value;
  out[1] = -r * slope;
  out[2] = r * r * curve - r * slope;
}

/** Closer than this in z to 0, −1/4 or −1, poles of the parts cancel and digits are lost. */
export const SEPARATION = 0.05;
const REMOVABLE = [0, -0.25, -1];
const STENCIL = 12;
const REACH = 2 * SEPARATION;

/** Values of z and weights whose sum gives any function that is regular in z: {z, 1} itself away from removable points. */
export interface Stencil {
  z: Float64Array;
  weight: Float64Array;
}

/**
 * Where to evaluate what is regular in z although its parts aren't: z itself, or near 0, −1/4 and −1 twelve Chebyshev points
 * round the removable point, from which the polynomial through them is read at z. The nearest singularity that is real
 * (z = −9/4) is 12 half-widths away, so the interpolation is exact to rounding.
 */
export function regularStencil(z: number): Stencil {
  const centre = REMOVABLE.find((point) => Math.abs(z - point) < SEPARATION);
  if (centre === undefined) return { z: Float64Array.of(z), weight: Float64Array.of(1) };
  const nodes = Float64Array.from(
    { length: STENCIL },
    (_, k) => centre + REACH * Math.cos((Math.PI * (k + 0.5)) / STENCIL),
  );
  const weight = nodes.map((node, k) =>
    nodes.reduce((product, other, l) => (l === k ? product : (product * (z - other)) / (node - other)), 1),
  );
  return { z: nodes, weight };
}
